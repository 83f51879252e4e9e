"""What a person would feel: current through the body model, charge and energy left, induction.

Findings hold a number against a limit of a document. None of them says that a conductor may be
touched.
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from ..errors import Refused, nearest
from ..physics.network import EARTH
from ..reference.instruments import INSTRUMENTS
from ..reference.limits import (
    BODY_CAPACITANCE,
    BODY_FRONT_RESISTANCE,
    BODY_SHUNT_RESISTANCE,
    CHARGE_PAIN,
    CHARGE_PERCEPTION,
    EXTRA_LOW_VOLTAGE_AC,
    FIBRILLATION_CURRENT,
    LET_GO_CURRENT,
    PERCEPTION_CURRENT,
    STORED_CHARGE,
    STORED_ENERGY,
)
from ..reference.records import Value
from ..units import show
from .ends import SCREEN, Driven
from .run import Run

Complex = NDArray[np.complex128]

# The reaction filter of the measuring network: 10 kΩ and 22 nF after the 500 Ω (IEC 60990).
FILTER_RESISTANCE = 10e3
FILTER_CAPACITANCE = 0.022e-6


def touch_network(frequency: float) -> tuple[complex, complex]:
    """Input impedance [ohm] and weighted over true current [1] of the body's measuring network.

    1500 Ω beside 0.22 µF, then 500 Ω with the filter 10 kΩ, 22 nF across it: the weighted touch
    current is the filter's voltage over 500 Ω. Source: IEC 60990, reaction network.

    >>> z, weight = touch_network(50.0)
    >>> round(abs(z), 1), round(abs(weight), 4)
    (1990.0, 0.9974)
    """
    if not (frequency > 0 and math.isfinite(frequency)):
        raise Refused("frequency", "must be above 0 Hz", given=f"{frequency:g} Hz")
    s = 2j * math.pi * frequency
    front, shunt = BODY_FRONT_RESISTANCE.likely, BODY_SHUNT_RESISTANCE.likely
    chain = FILTER_RESISTANCE + 1 / (s * FILTER_CAPACITANCE)
    lower = front * chain / (front + chain)
    weight = lower / chain / (s * FILTER_CAPACITANCE) / front
    return 1 / (1 / shunt + s * BODY_CAPACITANCE.likely) + lower, weight


@dataclass(frozen=True)
class Touch:
    """One end of a conductor, touched by a person who stands on earth.

    Parameters
    ----------
    point : such as "spare@far"
    fed : whether it is on the supply without capacitance between
    unloaded : voltage to earth, RMS [V]
    current : through the body model, RMS [A]
    weighted : the same as the measuring network of IEC 60990 weights it [A]
    bonded : current that an earth bond there carries, RMS [A]
    charge, energy : that the end may be left with when the supply goes off, at the crest of its
        voltage [C], [J]
    finding : against the limits, in words
    """

    point: str
    fed: bool
    unloaded: float
    current: float
    weighted: float
    bonded: float
    charge: float
    energy: float
    finding: str

    @property
    def dangerous(self) -> bool:
        """Whether it is fed, or passes a limit of letting go, of charge, or of stored energy."""
        return (self.fed or self.current >= LET_GO_CURRENT.likely
                or self.charge >= STORED_CHARGE.likely or self.energy >= STORED_ENERGY.likely)


def touch_sheet(run: Run) -> tuple[Touch, ...]:
    """Every conductor that no end bonds to earth, at the end that drives more; most first."""
    worst = {}
    for name in run.names:
        points = [f"{name}@{end}" for end in ("near", "far")]
        if EARTH not in map(run.node, points):
            worst[name] = max((_touch(run, p) for p in points), key=lambda t: t.current)
    return tuple(sorted(worst.values(), key=lambda t: -t.current))


def _touch(run: Run, point: str) -> Touch:
    port = run.port(point)
    effect = run.connect(INSTRUMENTS["body"].ranges[0].burden, point)
    _, weight = touch_network(run.frequency)
    capacitance = max(-1 / (2 * math.pi * run.frequency * port.impedance.imag), 0.0) \
        if port.impedance.imag < -abs(port.impedance.real) else 0.0
    crest = math.sqrt(2) * abs(port.voltage)
    charge, energy = capacitance * crest, capacitance * crest**2 / 2
    fed = _fed(run, point)
    current = abs(effect.current)
    return Touch(point, fed, abs(port.voltage), current, current * abs(weight),
                 _quotient(abs(port.voltage), abs(port.impedance)),
                 charge, energy,
                 _finding(fed, current, charge))


def _quotient(voltage: float, impedance: float) -> float:
    """Current of a source into a bond; none of one without voltage, such as the neutral."""
    if not voltage:
        return 0.0
    return voltage / impedance if impedance else math.inf


def _fed(run: Run, point: str) -> bool:
    """Whether the conductor meets a line at either of its ends."""
    name = point.rpartition("@")[0]
    return any(isinstance(getattr(run, end)[name], Driven) for end in ("near", "far"))


def _finding(fed: bool, current: float, charge: float) -> str:
    if fed:
        return "fed: a real source, as dangerous as the supply"
    steps = ((FIBRILLATION_CURRENT, "may stop a heart that it passes for a second or more"),
             (LET_GO_CURRENT, "above what all people can let go of"),
             (PERCEPTION_CURRENT, "can be felt: who starts may fall"))
    said = next((f"{words} ({show(limit.likely, 'A')})" for limit, words in steps
                 if current >= limit.likely),
                f"below what people feel ({show(PERCEPTION_CURRENT.likely, 'A')})")
    sparks = ((CHARGE_PAIN, "its charge hurts"), (CHARGE_PERCEPTION, "its charge can be felt"))
    spark = next((words for limit, words in sparks if charge >= limit.likely), "")
    return f"{said}; {spark}" if spark else said


def length_for_current(run: Run, point: str, limit: Value = PERCEPTION_CURRENT) -> float:
    """Length of the run [m] from which a bond at `point` would carry the limit's current.

    What a coupled conductor drives grows with the length of a run that is short electrically.
    """
    port = run.port(point)
    return run.length * limit.likely / abs(port.voltage / port.impedance)


def induced_voltages(run: Run, currents: Mapping[str, complex]) -> dict[str, complex]:
    """Voltage along each conductor that is not loaded itself, end to end, return by earth [V].

    E_i = Σ_k (R_e + jω L_ik) I_k l, with the earth return of Carson's first term. For a conductor
    bonded to earth at one end it stands at the other; bonded at both it drives a current, of
    which that in the screen (`screen_current`) counts here.

    Parameters
    ----------
    currents : by conductor, phasor from the near to the far end [A]; give go and return both

    Raises `Refused`. Source: Carson (1926).
    """
    if current := screen_current(run, currents):
        currents = {**currents, SCREEN: current}
    return {n: e for n, e in _open_voltages(run, currents).items() if n not in currents}


def screen_current(run: Run, currents: Mapping[str, complex]) -> complex:
    """Current that the others induce in a screen bonded to earth at both ends [A], else 0.

    I_s = −Σ_k Z_sk I_k / Z_ss, in the screen and back by earth. With all the currents inside it,
    what they induce in conductors inside is left as the share that `screening_factor` tells.
    """
    if run.screen is None or SCREEN in currents or {
            run.node(f"{SCREEN}@{end}") for end in ("near", "far")} != {EARTH}:
        return 0j
    return -_open_voltages(run, currents)[SCREEN] / complex(_impedance(run)[-1, -1])


def screening_factor(run: Run) -> float:
    """|R_s / Z_ss|: share of what inner currents induce in the cores that a screen leaves [1].

    For a screen bonded to earth at both ends and currents that return by earth; 1 with no screen.
    """
    if run.screen is None:
        return 1.0
    return abs(run.screen.resistance * run.length / complex(_impedance(run)[-1, -1]))


def _open_voltages(run: Run, currents: Mapping[str, complex]) -> dict[str, complex]:
    for name in currents:
        if name not in run.names:
            raise Refused(f'conductor "{name}"', "is not in this run",
                          hint=nearest(name, run.names))
    through = np.array([currents.get(name, 0.0) for name in run.names], dtype=complex)
    return dict(zip(run.names, map(complex, _impedance(run) @ through), strict=True))


def _impedance(run: Run) -> Complex:
    """Series impedance end to end with return by earth (n, n) [ohm]."""
    resistance, inductance = run.series
    return np.asarray((resistance + 2j * math.pi * run.frequency * inductance) * run.length)


def induction_finding(volts: float) -> str:
    """An induced voltage against the limit of extra-low voltage."""
    limit = EXTRA_LOW_VOLTAGE_AC.likely
    if volts >= limit:
        return (f"above {show(limit, 'V')}: bond to earth at the place of work before touching, "
                "under the rules for work near energised lines and by people licensed for it")
    return f"under {show(limit, 'V')}, which alone does not make a conductor fit to touch"
