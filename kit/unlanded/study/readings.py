"""The reading sheet: what every instrument should show on every pair of points, if all is well.

Each reading carries a band: its lowest and highest over the limits of the inputs (through a
`low` and a `high` run), the tolerance of the instrument's burden, and its accuracy statement.
"""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace
from itertools import combinations
from typing import TypeAlias

import numpy as np
from numpy.typing import ArrayLike, NDArray

from ..errors import Refused
from ..physics.network import EARTH
from ..reference.instruments import Instrument, Shown
from ..units import show
from .run import Port, Run
from .supply import NEUTRAL

Real = NDArray[np.float64]
STIFF = 0.02  # change of voltage below which an instrument leaves a pair as it was


@dataclass(frozen=True)
class Pair:
    """Two points of a run, in the order that a reading names them."""

    a: str
    b: str = EARTH


@dataclass(frozen=True)
class SheetRow:
    """One instrument on one pair; phasors are RMS.

    Parameters
    ----------
    unloaded : voltage with no instrument [V]
    source_impedance : Thevenin [ohm]
    source_capacitance : of that impedance where it is capacitive, else NaN [F]
    reading : as the instrument would show it; for a body model the current through it
    low, high : the same at the ends of its band
    voltage, current : across and through the instrument [V], [A]
    residual_added : change of the residual current [A]
    loading_error : change of the voltage by the instrument, relative [1], NaN on 0 V
    remark : on the pair, in words
    """

    pair: Pair
    instrument: Instrument
    unloaded: complex
    source_impedance: complex
    source_capacitance: float
    reading: Shown
    low: Shown
    high: Shown
    voltage: complex
    current: complex
    residual_added: complex
    loading_error: float
    remark: str


@dataclass(frozen=True, eq=False)
class ReadingSheet:
    """Every instrument on every pair of a run; `rows` go pair by pair, in the given order.

    A non-contact detector has rows only for pairs with earth, where it can be used.
    """

    run: Run
    pairs: tuple[Pair, ...]
    instruments: tuple[Instrument, ...]
    rows: tuple[SheetRow, ...]


def reading_sheet(
    run: Run,
    instruments: Sequence[Instrument],
    pairs: Sequence[Pair] | None = None,
    *,
    low: Run | None = None,
    high: Run | None = None,
) -> ReadingSheet:
    """Expected readings of a run.

    Parameters
    ----------
    instruments : at least one, each key once
    pairs : all that matter (`usual_pairs`) when None
    low, high : the run with its inputs at their limits, for the bands; `run` when None

    Raises `Refused`: for an unknown point, and where both points of a pair are one node.
    """
    tools = tuple(instruments)
    if not tools or len({i.key for i in tools}) < len(tools):
        raise Refused("instruments", "at least one is needed, and each key only once",
                      given=", ".join(i.key for i in tools))
    wanted = tuple(usual_pairs(run) if pairs is None else pairs)
    runs = (run, low or run, high or run)
    scales = {tool.key: _scales(tool, run.frequency) for tool in tools}
    rows: list[SheetRow] = []
    for pair in wanted:
        ports = [r.port(pair.a, pair.b) for r in runs]
        met = [(tool, _meet(tool, scales[tool.key], ports)) for tool in tools
               if tool.kind != "proximity" or EARTH in (pair.a, pair.b)]
        remark = _remark(ports[0], [(tool, m) for tool, m in met if tool.kind != "proximity"])
        rows += (_row(pair, tool, ports[0], m, run.frequency, remark) for tool, m in met)
    return ReadingSheet(run, wanted, tools, tuple(rows))


def usual_pairs(run: Run) -> Iterator[Pair]:
    """Every pair worth reading, each once: conductors to earth, to each other, to line and neutral.

    Lines and neutral are taken at the near end, where no conductor brings them. Pairs of points
    that are always at one potential are left out.
    """
    for end in ("near", "far"):
        points = [f"{n}@{end}" for n in run.names]
        supply = [*run.supply.lines, NEUTRAL] if end == "near" else []
        apart = [w for w in supply if not any(run.same(w, p) for p in points)]
        seen: set[frozenset[str]] = set()
        for a, b in (*((p, EARTH) for p in points), *combinations([*points, *apart], 2)):
            nodes = frozenset((run.node(a), run.node(b)))
            if len(nodes) == 2 and nodes not in seen and not {a, b} <= set(apart):
                seen.add(nodes)
                yield Pair(a, b)


def loading_curve(run: Run, pair: Pair, resistances: ArrayLike) -> Real:
    """Voltage on a pair (k,) RMS [V] with each of the resistances (k,) [ohm] put there."""
    port = run.port(pair.a, pair.b)
    conductance = 1 / np.asarray(resistances, dtype=float)
    return np.asarray(np.abs(port.voltage / (1 + conductance * port.impedance)))


def ports_along(run: Run, pair: Pair, lengths: ArrayLike) -> tuple[Port, ...]:
    """The port of a pair for runs that are as `run` but of `lengths` (k,) [m]."""
    runs = (replace(run, length=float(length), capacitance=run.matrix)
            for length in np.asarray(lengths, dtype=float))
    return tuple(r.port(pair.a, pair.b) for r in runs)


def voltages_across(instrument: Instrument, ports: Sequence[Port], *, frequency: float) -> Real:
    """Voltage across the instrument on each of the ports (k,) RMS [V]."""
    scales = _scales(instrument, frequency)
    return np.array([abs(_settled(scales, port)[0]) for port in ports])


def length_curve(run: Run, pair: Pair, instrument: Instrument, lengths: ArrayLike) -> Real:
    """Voltage across the instrument on a pair (k,) RMS [V] for runs of `lengths` (k,) [m]."""
    return voltages_across(instrument, ports_along(run, pair, lengths), frequency=run.frequency)


_Scales: TypeAlias = list[tuple[float, complex]]
"""Full scale [V] and admittance [S] of each range, rising."""


@dataclass(frozen=True)
class _Met:
    """An instrument on a port, and the lowest and highest of the voltages it may meet."""

    voltage: complex
    current: complex
    residual_added: complex
    lowest: float
    highest: float


def _meet(tool: Instrument, scales: _Scales, ports: Sequence[Port]) -> _Met:
    """`ports` of the run, and of its low and high ends."""
    voltage, current = _settled(scales, ports[0])
    ends = [abs(_settled(scales, port, impedance=1 + sign * tool.tolerance)[0])
            for port in dict.fromkeys(ports) for sign in (-1, 1)]
    size = abs(voltage)
    return _Met(voltage, current, current * ports[0].residual_per_ampere,
                min(*ends, size), max(*ends, size))


def _scales(tool: Instrument, frequency: float) -> _Scales:
    return [(r.full_scale, complex(r.burden.admittance(frequency))) for r in tool.ranges]


def _settled(
    scales: _Scales, port: Port, *, impedance: float = 1.0
) -> tuple[complex, complex]:
    """Voltage and current on the range that the instrument settles on.

    It is used as taught: from the largest range down, as long as the next one holds what is
    shown. `impedance` scales the burden's.
    """
    lower = [full_scale for full_scale, _ in scales[-2::-1]] + [-1.0]
    for (_, nominal), next_lower in zip(reversed(scales), lower, strict=True):
        admittance = nominal / impedance
        voltage = port.voltage / (1 + admittance * port.impedance)
        if abs(voltage) > next_lower:
            break
    return voltage, admittance * voltage


def _row(
    pair: Pair, tool: Instrument, port: Port, met: _Met, frequency: float, remark: str
) -> SheetRow:
    unloaded = abs(port.voltage)
    error = (abs(met.voltage) - unloaded) / unloaded if unloaded else math.nan
    reading, low, high = _band(tool, met)
    return SheetRow(pair, tool, port.voltage, port.impedance,
                    _capacitance(port.impedance, frequency), reading, low, high,
                    met.voltage, met.current, met.residual_added, error, remark)


def _band(tool: Instrument, met: _Met) -> tuple[Shown, Shown, Shown]:
    """The reading, and what the instrument's own accuracy may make of the ends of the band."""
    if tool.kind == "body":
        amperes = abs(met.current / met.voltage) if met.voltage else 0.0
        return tuple(Shown(show(amperes * v, "A"), math.nan, math.nan)  # type: ignore[return-value]
                     for v in (abs(met.voltage), met.lowest, met.highest))
    least = max(0.0, met.lowest - tool.accuracy_at(met.lowest))
    most = met.highest + tool.accuracy_at(met.highest)
    return tool.show(abs(met.voltage)), tool.show(least), tool.show(most)


def _capacitance(impedance: complex, frequency: float) -> float:
    if -impedance.imag <= abs(impedance.real):
        return math.nan
    return -1 / (2 * math.pi * frequency * impedance.imag)


def _remark(port: Port, tools: Sequence[tuple[Instrument, _Met]]) -> str:
    unloaded = abs(port.voltage)
    if unloaded == 0:
        return "at one potential: nothing to read"
    if not tools:
        return "no instrument here loads it"
    heaviest, met = min(tools, key=lambda t: abs(t[1].voltage))
    fallen = f"falls to {show(abs(met.voltage), 'V', 2)} on the {heaviest.name}"
    if abs(met.voltage) >= (1 - STIFF) * unloaded:
        return "solid: every instrument reads alike"
    if -port.impedance.imag > 10 * abs(port.impedance.real):
        return f"capacitive; {fallen}"
    if abs(port.impedance.imag) < abs(port.impedance.real) / 10:
        return f"resistive source; {fallen}"
    return f"fed through an impedance; {fallen}"
