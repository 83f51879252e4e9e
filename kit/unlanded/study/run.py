"""A run with two ends: solve it, connect a burden between any two points, see what happens.

Points are "spare@near" and "spare@far" for a conductor's ends, "earth", "N", and the lines of the
supply. The neutral is bonded to earth at the source. The residual current is the sum of what the
supply's lines and neutral deliver, so it counts everything that returns by earth.
"""

from __future__ import annotations

import math
from dataclasses import dataclass, replace
from functools import cached_property
from itertools import pairwise

import numpy as np
from numpy.typing import ArrayLike, NDArray

from ..errors import Refused, nearest
from ..physics.burden import Burden
from ..physics.capacitance import capacitance_matrix
from ..physics.inductance import (
    earth_return_distance,
    earth_return_resistance,
    inductance_matrix,
    with_tube,
)
from ..physics.line import sections_needed
from ..physics.network import EARTH, Network, Solution
from ..physics.screen import with_screen
from ..physics.section import Pipe, Section
from .ends import SCREEN, Bonded, Driven, Ends, Joined, Open, Through, mistakes, word
from .supply import NEUTRAL, Supply

Real = NDArray[np.float64]
EARTH_RESISTIVITY = 100.0  # ohm·m; of little effect: it stands in a logarithm


@dataclass(frozen=True)
class Effect:
    """What a burden between two points brings about; phasors, RMS.

    Parameters
    ----------
    voltage : across it, from a to b [V]
    current : through it, from a to b [A]
    power : it takes [W]
    residual : current that the supply's protective device sees with it in place [A]
    residual_added : change of that by the burden, as a phasor [A]
    """

    voltage: complex
    current: complex
    power: float
    residual: complex
    residual_added: complex


@dataclass(frozen=True)
class Port:
    """Two points as whatever is put between them meets them: a Thevenin source, and more.

    Parameters
    ----------
    voltage : unloaded, from a to b, RMS [V]
    impedance : Thevenin [ohm]
    residual_per_ampere : residual current for each ampere drawn out of a and into b [1]
    """

    voltage: complex
    impedance: complex
    residual_per_ampere: complex


@dataclass(frozen=True)
class Screen:
    """The section's pipe as a cable's screen: a conductor with ends of its own.

    Parameters
    ----------
    resistance : end to end [ohm/m], at least 0
    to_earth : capacitance of its outside [F/m], at least 0
    """

    resistance: float
    to_earth: float

    def __post_init__(self) -> None:
        for value, what, unit in ((self.resistance, "resistance", "Ω/m"),
                                  (self.to_earth, "capacitance to earth", "F/m")):
            if not 0 <= value < math.inf:
                raise Refused("screen", f"{what} must be at least 0 {unit}", given=f"{value:g}")


@dataclass(frozen=True, eq=False)
class Run:
    """A cable between two ends.

    Parameters
    ----------
    section : cross-section
    length : [m], above 0
    near, far : what each conductor meets there; a conductor not named is open
    resistance : of each conductor of the section per metre [ohm/m], at least 0
    capacitance : Maxwell matrix (n, n) [F/m]; computed from the section when None
    order : multiple of the supply's frequency at which it is solved
    earth_resistivity : of the soil [ohm·m], for the return by earth
    screen : the section's pipe, where it is a conductor of the run and not at 0 V all along; it
        comes last of the n conductors, with the name "screen" at the ends

    The supply lies at the near end of what it feeds; a line or neutral that an end at the far side
    meets is the same one, through no impedance. Raises `Refused`.

    >>> from unlanded.physics.section import Conductor, Plane
    >>> pair = Section((Conductor("hot", 0, 0.02, 1e-3), Conductor("spare", 0.01, 0.02, 1e-3)),
    ...                Plane(0))
    >>> run = Run(pair, 50.0, Supply(230.0, 50.0), {"hot": Driven("L")}, {}, (7e-3, 7e-3))
    >>> c = run.matrix[1]  # the divider: −C₁₀ / C₁₁ of the line's voltage
    >>> round(float(abs(run.voltage("spare@far")) / (230.0 * -c[0] / c[1])), 6)
    1.0
    """

    section: Section
    length: float
    supply: Supply
    near: Ends
    far: Ends
    resistance: tuple[float, ...]
    capacitance: Real | None = None
    order: int = 1
    earth_resistivity: float = EARTH_RESISTIVITY
    screen: Screen | None = None

    def __post_init__(self) -> None:
        names = self.names
        if self.screen and (SCREEN in self.section.names
                            or not isinstance(self.section.surround, Pipe)):
            raise Refused(SCREEN, "needs a pipe round the section, and no conductor of its name")
        for end in ("near", "far"):
            given = getattr(self, end)
            if found := tuple(mistakes(end, given, names, self.supply.lines)):
                raise Refused.all_of(found)
            object.__setattr__(self, end, {n: given.get(n, Open()) for n in names})
        if not (self.length > 0 and math.isfinite(self.length)):
            raise Refused("run length", "must be above 0 m", given=f"{self.length:g} m")
        if not (len(self.resistance) == len(self.section.names)
                and all(0 <= r < math.inf for r in self.resistance)):
            raise Refused("run resistance", "must be at least 0 Ω/m for each conductor",
                          given=self.resistance)
        if not (isinstance(self.order, int) and self.order >= 1):
            raise Refused("run order", "must be a whole number of at least 1", given=self.order)
        if self.capacitance is not None and np.shape(self.capacitance) != (len(names),) * 2:
            raise Refused("run capacitance", f"must be {len(names)} × {len(names)}",
                          given=np.shape(self.capacitance))

    @property
    def names(self) -> tuple[str, ...]:
        """The conductors, in the order of every matrix: the section's, then the screen."""
        return (*self.section.names, SCREEN) if self.screen else self.section.names

    @property
    def spares(self) -> tuple[str, ...]:
        """Cores that are open at both ends, and that nothing is connected to."""
        met = {word(t) for end in (self.near, self.far) for t in end.values()
               if isinstance(t, Joined | Through)}
        return tuple(n for n in self.section.names if n not in met
                     and isinstance(self.near[n], Open) and isinstance(self.far[n], Open))

    @property
    def resistances(self) -> tuple[float, ...]:
        """Of each conductor (n,) [ohm/m], in the order of `names`."""
        return (*self.resistance, self.screen.resistance) if self.screen else self.resistance

    @property
    def frequency(self) -> float:
        """At which it is solved [Hz]."""
        return self.order * self.supply.frequency

    @property
    def points(self) -> tuple[str, ...]:
        """Every point that a burden can be connected to."""
        ends = (f"{n}@{end}" for end in ("near", "far") for n in self.names)
        return (*ends, *self.supply.lines, NEUTRAL, EARTH)

    @cached_property
    def matrix(self) -> Real:
        """Maxwell capacitance matrix (n, n) [F/m], in the order of `names`."""
        if self.capacitance is not None:
            return self.capacitance
        return self.screened(capacitance_matrix(self.section))

    def screened(self, inner: Real, to_earth: ArrayLike | None = None) -> Real:
        """Matrices of the section (..., m, m) [F/m] with the screen, if the run has one.

        `to_earth` (...) [F/m] is in place of the screen's own.
        """
        if self.screen is None:
            return inner
        return with_screen(inner, to_earth=self.screen.to_earth if to_earth is None else to_earth)

    @property
    def residual(self) -> complex:
        """What flows back by earth: the sum of the supply's line and neutral currents [A]."""
        return complex(sum(self._solution.source_current(k)[0] for k in self._sources))

    def voltage(self, a: str, b: str = EARTH) -> complex:
        """Unloaded voltage from a to b, RMS [V]."""
        return complex(self._solution.voltage(self.node(a), self.node(b))[0])

    def impedance(self, a: str, b: str = EARTH) -> complex:
        """What a burden between a and b sees: the Thevenin impedance [ohm]."""
        return complex(self._solution.impedance(self.node(a), self.node(b))[0])

    def node(self, point: str) -> str:
        """The node of a point: points bonded or joined together have the same one."""
        if point not in self._aliases:
            raise Refused("point", "is not one of this run", given=point,
                          hint=nearest(point, self.points))
        return self._aliases[point]

    def same(self, a: str, b: str) -> bool:
        """Whether two points are one node, such as a bonded end and earth."""
        return self.node(a) == self.node(b)

    def port(self, a: str, b: str = EARTH) -> Port:
        """What two points that are not the same node offer to anything put between them."""
        i, j = self.node(a), self.node(b)
        if i == j:
            raise Refused(f'points "{a}" and "{b}"', "are the same node: nothing can be between")
        solution = self._solution
        drawn = sum(solution.source_transfer(i, j, k)[0] for k in self._sources)
        return Port(complex(solution.voltage(i, j)[0]), complex(solution.impedance(i, j)[0]),
                    complex(drawn))

    def connect(self, burden: Burden, a: str, b: str = EARTH) -> Effect:
        """The run with a burden between two points that are not the same node."""
        port = self.port(a, b)
        admittance = complex(burden.admittance(self.frequency))
        voltage = port.voltage / (1 + admittance * port.impedance)
        current = admittance * voltage
        added = current * port.residual_per_ampere
        return Effect(voltage, current, (voltage * current.conjugate()).real,
                      self.residual + added, added)

    def at_order(self, order: int) -> Run:
        """The same run at another multiple of the supply's frequency."""
        return replace(self, capacitance=self.matrix, order=order)

    @cached_property
    def series(self) -> tuple[Real, Real]:
        """Resistance [ohm/m] and inductance [H/m] of the conductors with return by earth (n, n)."""
        distance = earth_return_distance(resistivity=self.earth_resistivity,
                                         frequency=self.frequency)
        resistance = np.diag(self.resistances) + earth_return_resistance(frequency=self.frequency)
        inductance = inductance_matrix(self.section, return_distance=distance)
        if self.screen is not None:
            assert isinstance(self.section.surround, Pipe)
            inductance = with_tube(inductance, radius=self.section.surround.radius,
                                   return_distance=distance)
        return resistance, inductance

    @cached_property
    def lumps(self) -> int:
        """π sections that the run is divided into."""
        omega = 2 * math.pi * self.frequency
        resistance, inductance = self.series
        series = np.asarray(resistance + 1j * omega * inductance, dtype=complex)
        shunt = np.asarray(1j * omega * self.matrix, dtype=complex)
        return sections_needed(series[None], shunt[None], length=self.length)

    @cached_property
    def _solved(self) -> tuple[Solution, tuple[int, ...]]:
        network = Network()
        sources = self.feed(network)
        self.lay(network, self.matrix[None], np.array([self.length]), self.lumps)
        for point, to, t in self.closed:
            network.burden(point, to, t.burden)
        return network.solve(self.frequency), sources

    @property
    def _solution(self) -> Solution:
        return self._solved[0]

    @property
    def _sources(self) -> tuple[int, ...]:
        return self._solved[1]

    def feed(self, network: Network, share: ArrayLike = 1.0) -> tuple[int, ...]:
        """Puts in the lines and the neutral, from the source's star point, which is earthed.

        `share` of the supply's voltage [1], one or one per case of a batch. Returns the sources.
        """
        supply = self.supply
        lines = [network.voltage_source(line, EARTH,
                                        supply.phasor(line, order=self.order) * np.asarray(share),
                                        resistance=supply.resistance, inductance=supply.inductance)
                 for line in supply.lines]
        return (*lines, network.voltage_source(NEUTRAL, EARTH, 0.0))

    def lay(self, network: Network, matrix: Real, length: Real, lumps: int) -> None:
        """Puts in the π sections from the near to the far nodes, for a batch of B cases.

        `matrix` (B, n, n) [F/m], `length` (B,) [m].
        """
        step = length[:, None, None] / lumps
        resistance, inductance = (m * step for m in self.series)
        stations = [self._end_nodes("near"),
                    *([f"{n}@{k}" for n in self.names] for k in range(1, lumps)),
                    self._end_nodes("far")]
        half = matrix * step / 2
        for near, far in pairwise(stations):
            network.series_branches(list(zip(near, far, strict=True)), resistance, inductance)
            network.capacitance_matrices(near, half)
            network.capacitance_matrices(far, half)

    def _end_nodes(self, end: str) -> list[str]:
        return [self._aliases[f"{n}@{end}"] for n in self.names]

    @cached_property
    def closed(self) -> tuple[tuple[str, str, Through], ...]:
        """The nodes that a burden at an end joins, with the burden."""
        found = []
        for end in ("near", "far"):
            for name, t in getattr(self, end).items():
                if isinstance(t, Through):
                    a = self._aliases[f"{name}@{end}"]
                    b = self._aliases.get(f"{t.to}@{end}", t.to)
                    if a == b:
                        raise Refused(f'{t.label} at "{name}@{end}"',
                                      "has both its terminals on the same node")
                    found.append((a, b, t))
        return tuple(found)

    @cached_property
    def _aliases(self) -> dict[str, str]:
        """Point to node: ends that are driven, bonded or joined share the node they meet."""
        group = {p: {p} for p in self.points}
        for end in ("near", "far"):
            for name, t in getattr(self, end).items():
                if isinstance(t, Driven | Bonded | Joined):
                    met = f"{t.other}@{end}" if isinstance(t, Joined) else word(t)
                    joined = group[f"{name}@{end}"] | group[met]
                    group.update(dict.fromkeys(joined, joined))
        order = (EARTH, NEUTRAL, *self.supply.lines, *self.points)
        return {p: min(points, key=order.index) for p, points in group.items()}
