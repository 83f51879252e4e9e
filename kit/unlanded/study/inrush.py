"""What rushes to earth when a circuit is switched on: an indication, not a prediction.

The capacitance behind the device is met by the peak of the supply's voltage through the loop's
inductance alone. Resistance, the switch's own bounce, and the way along the run are left out;
most of them make the peak lower, bounce can make it higher.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

from ..errors import Refused
from .ends import Bonded, Driven
from .run import Run


@dataclass(frozen=True)
class Inrush:
    """A capacitance switched onto the crest of the voltage.

    Parameters
    ----------
    charge : that it takes [C]; without loss it first takes twice this
    peak : of the current [A]
    frequency : at which it rings [Hz]
    """

    charge: float
    peak: float
    frequency: float


def inrush(*, capacitance: float, voltage: float, inductance: float) -> Inrush:
    """Capacitance [F] onto the crest of a voltage, RMS [V], through an inductance [H], above 0.

    The peak is √2·V·√(C/L), at a frequency of 1/(2π√(LC)).

    >>> found = inrush(capacitance=47e-9, voltage=230.0, inductance=47e-6)
    >>> round(found.peak, 2), round(found.charge * 1e6, 2)  # 325.27 V × √0.001
    (10.29, 15.29)
    """
    if not (capacitance > 0 and inductance > 0 and voltage >= 0):
        raise Refused("inrush", "capacitance and inductance must be above 0",
                      given=f"{capacitance:g} F, {inductance:g} H")
    crest = math.sqrt(2) * voltage
    return Inrush(capacitance * crest, crest * math.sqrt(capacitance / inductance),
                  1 / (2 * math.pi * math.sqrt(inductance * capacitance)))


def run_inrush(run: Run, filters: float = 0.0) -> Inrush | None:
    """The run and the filters' capacitance [F] at its end; None where neither has any to earth.

    The capacitance is that of the run's own residual current.
    """
    omega = 2 * math.pi * run.frequency
    capacitance = abs(run.residual) / (omega * run.supply.voltage) + filters
    if capacitance == 0 or not any(isinstance(t, Driven) for t in run.near.values()):
        return None
    return inrush(capacitance=capacitance, voltage=run.supply.voltage,
                  inductance=run.supply.inductance + loop_inductance(run))


def loop_inductance(run: Run) -> float:
    """Of the first line out and the earth conductor back, or the earth itself [H]."""
    names = run.names
    matrix = run.series[1] * run.length
    i = next(k for k, n in enumerate(names) if isinstance(run.near[n], Driven))
    back = [k for k, n in enumerate(names) if run.near[n] == Bonded("earth")]
    if not back:
        return float(matrix[i, i])
    e = back[0]
    return float(matrix[i, i] + matrix[e, e] - 2 * matrix[i, e])
