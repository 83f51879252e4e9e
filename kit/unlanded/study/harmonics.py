"""Harmonics and switching bands through the same network, order by order.

The capacitive path passes current in proportion to the frequency, so a small share of harmonics in
the supply is a larger one in what is coupled. Where the π sections of a run no longer hold, the
run itself refuses.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, replace

from ..errors import Refused
from ..physics.burden import Burden
from .readings import Pair
from .run import Run


@dataclass(frozen=True)
class Component:
    """One frequency of what a pair carries; magnitudes are RMS.

    Parameters
    ----------
    frequency : [Hz]
    unloaded : with nothing on the pair [V]
    voltage, current : across and through the burden there [V], [A]
    """

    frequency: float
    unloaded: float
    voltage: float
    current: float


def spectrum(run: Run, pair: Pair, burden: Burden) -> tuple[Component, ...]:
    """The fundamental and every harmonic of the supply, on a pair with a burden there."""
    orders = (1, *sorted(run.supply.harmonics))
    return tuple(_component(run if n == 1 else run.at_order(n), pair, burden) for n in orders)


def switching(
    run: Run, pair: Pair, burden: Burden, *, frequencies: Sequence[float], voltage: float
) -> tuple[Component, ...]:
    """A common voltage [V] of a drive's switching on the run's lines, at each frequency [Hz].

    Raises `Refused` where the run is too long electrically for its π sections.
    """
    if not voltage > 0:
        raise Refused("switching voltage", "must be above 0 V", given=f"{voltage:g} V")
    return tuple(
        _component(replace(run, capacitance=run.matrix, order=1, supply=replace(
            run.supply, voltage=voltage, frequency=f, harmonics={})), pair, burden)
        for f in frequencies)


def total(components: Sequence[Component]) -> Component:
    """All of them together: roots of sums of squares, at the first one's frequency.

    >>> total([Component(50, 3, 3, 3e-3), Component(150, 4, 4, 4e-3)]).voltage
    5.0
    """
    return Component(
        components[0].frequency,
        math.hypot(*(c.unloaded for c in components)),
        math.hypot(*(c.voltage for c in components)),
        math.hypot(*(c.current for c in components)))


def _component(run: Run, pair: Pair, burden: Burden) -> Component:
    effect = run.connect(burden, pair.a, pair.b)
    return Component(run.frequency, abs(run.voltage(pair.a, pair.b)), abs(effect.voltage),
                     abs(effect.current))
