"""A run reduced to the conductors that nothing feeds, solved for many sets of its unknowns at once.

Every conductor that is driven, or bonded, holds its voltage whatever hangs on its neighbours, and
a run short against its own impedance has one voltage along a conductor. What is left is a small
nodal matrix over the free conductors: their capacitances, what closes their ends, and the elements
that a cause adds. The capacitances, the supply and the instruments' burdens are uncertain; each has
a coordinate, a normal score of mean 0 and standard deviation 1.
"""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from ..errors import Refused
from ..physics.network import EARTH
from ..reference.instruments import Instrument
from ..reference.records import Source, Value
from .coupling import Coupling, Real, Scores, score_of
from .ends import ENDS, Bonded, Driven, Joined, Open, Termination, Through, word
from .hypotheses import CONTACT, LOAD_ANGLE, Variant, size_at, size_range
from .observation import Action
from .readings import Pair
from .run import Run

Complex = NDArray[np.complex128]

SUPPLY_SPREAD = Value(0.03, "", Source("spread of the supply's voltage, one standard deviation",
                                       "judgement"))
NO_SUSPECT = "is fed or bonded at its ends as described: no cause is looked for on it"
_BOND = 100.0  # S: 10 mΩ, where one bonded end of a conductor is under suspicion


@dataclass(frozen=True, eq=False)
class Defect:
    """What a cause does to one free conductor: its variant, and its size [ohm] or [V] (Q,).

    `angle` of a load's impedance [rad] (Q,).
    """

    conductor: str
    variant: Variant
    size: Real
    angle: Real


@dataclass(frozen=True, eq=False)
class State:
    """The free conductors in one circumstance: (H, Q, m) over harmonics and draws.

    Parameters
    ----------
    volts : unloaded, in the middle of each conductor [V]
    impedance : between them (H, Q, m, m) [ohm]
    induced : in series along each [V]
    energised : whether the neighbours are on
    """

    volts: Complex
    impedance: Complex
    induced: Complex
    energised: bool


@dataclass(frozen=True)
class _Tie:
    """What closes one end of a free conductor: to another (`free`) or to a point that holds."""

    at: int
    end: str
    free: int | None
    point: str
    admittance: Complex
    load: bool


@dataclass(frozen=True, eq=False)
class Reduced:
    """The run as its free conductors.

    Parameters
    ----------
    run, low, high : with the covers' permittivity likely, and at the limits of its range
    suspects : free conductors that a cause is looked for on, in order
    described : False where the section is not to be relied on: each suspect's capacitance to the
        live conductors, and to the earthed ones, is then anywhere in `UNDESCRIBED`

    Raises `Refused` for a suspect that is fed.
    """

    run: Run
    low: Run
    high: Run
    suspects: tuple[str, ...]
    described: bool = True

    def __post_init__(self) -> None:
        for name in self.suspects:
            if name not in self.free:
                raise Refused(f'conductor "{name}"', NO_SUSPECT)

    @cached_property
    def free(self) -> tuple[str, ...]:
        """Conductors whose voltage is unknown, in the run's order."""
        return tuple(n for n in self.run.names
                     if (self.described and _free(self.run, n))
                     or (n in self.suspects and may_be_suspect(self.run, n)))

    @cached_property
    def orders(self) -> tuple[int, ...]:
        """Multiples of the supply's frequency at which it has a voltage."""
        return (1, *sorted(self.run.supply.harmonics))

    @cached_property
    def omega(self) -> Real:
        """Angular frequency of each order (H,) [rad/s]."""
        return 2 * math.pi * self.run.supply.frequency * np.array(self.orders, dtype=float)

    @property
    def coordinates(self) -> tuple[str, ...]:
        """Names of the unknowns of the run itself."""
        return ("supply", *self._coupling.coordinates)

    @property
    def top(self) -> float:
        """A voltage that no reading is expected to pass [V]."""
        supply = self.run.supply
        return 1.25 * supply.voltage * {1: 1.0, 2: 2.0, 3: math.sqrt(3)}[supply.phases]

    def cable_lines(self) -> tuple[str, ...]:
        """Lines of the supply that conductors of the cable bring."""
        ends = (end[n] for end in (self.run.near, self.run.far) for n in self.run.names)
        return tuple(dict.fromkeys(t.phase for t in ends if isinstance(t, Driven)))

    def live_conductors(self) -> tuple[str, ...]:
        """Conductors that hold a line's voltage."""
        return tuple(n for n, live in zip(self.run.names, self._live, strict=True) if live)

    def defect(self, name: str, variant: Variant, size: Real, angle: Real) -> Defect:
        """The defect whose size has that share (Q,) of its prior below it, and angle likewise."""
        given = size_range(variant.cause, omega=float(self.omega[0]), length=self.run.length)
        sizes = np.ones_like(size) if given is None else size_at(size, given)
        low, high = math.radians(LOAD_ANGLE.low), math.radians(LOAD_ANGLE.high)
        return Defect(name, variant, sizes, low + angle * (high - low))

    def capacitances(self, scores: Scores, name: str) -> tuple[Real, Real]:
        """Of a free conductor to the live conductors, and to earthed ones and all else (Q,) [F]."""
        each = self._coupling.at(scores)[:, self.free.index(name)]
        live = np.append(self._live, False)
        return each[:, live].sum(axis=1), each[:, ~live].sum(axis=1)

    def capacitance(self, scores: Scores) -> Real:
        """Of the free conductors to all others and to earth (Q, m, n + 1) [F]."""
        return self._coupling.at(scores)

    def solve(
        self, capacitance: Real, scores: Scores, defects: Sequence[Defect],
        actions: frozenset[Action],
    ) -> State:
        """The free conductors with these defects after these actions.

        `capacitance` is that of `capacitance(scores)`, the same after all actions.
        """
        energised = "neighbours off" not in actions
        supply = 1 + SUPPLY_SPREAD.likely * score_of(scores, "supply")
        held = (self._held * energised)[:, None] * supply[:, None]
        c = capacitance
        among = c[:, :, self._coupling.columns]
        omega = self.omega[:, None, None]
        total = c.sum(axis=2)
        y = 1j * omega[..., None] * (np.eye(len(self.free)) * total[:, None] - among)
        drawn = 1j * omega * np.einsum("qmn,hqn->hqm", self._fixed(c), held)
        induced = np.zeros_like(drawn)
        for d in defects:
            if d.variant.cause == "magnetic pick-up" and d.variant.live(actions):
                induced[0, :, self.free.index(d.conductor)] = 1j * d.size
        for tie in self._ties:
            if not (tie.end == "far" and "far end disconnected" in actions) and not (
                    tie.load and "loads off" in actions):
                self._join(y, drawn, induced, tie, supply * energised)
        for d in defects:
            if d.variant.joined(actions):
                self._add(y, drawn, induced, d, supply * d.variant.live(actions))
        impedance = 1 / y if len(self.free) == 1 else np.linalg.inv(y)
        return State(np.einsum("hqmn,hqn->hqm", impedance, drawn), impedance, induced, energised)

    def port(self, state: State, pair: Pair, scores: Scores) -> tuple[Complex, Complex]:
        """Unloaded voltage [V] and Thevenin impedance [ohm] of a pair (H, Q)."""
        (i, a), (j, b) = (self._at(state, p, scores) for p in (pair.a, pair.b))
        z = np.zeros_like(a + b)
        for k, other in ((i, j), (j, i)):
            if k is not None:
                z = z + state.impedance[:, :, k, k]
                if other is not None:
                    z = z - state.impedance[:, :, k, other]
        return a - b, z

    def admittance(self, burden_admittance: Complex, scores: Scores, tool: Instrument) -> Complex:
        """Of an instrument (H, Q), its burden anywhere within its tolerance."""
        from scipy.special import ndtr

        share = 2 * ndtr(score_of(scores, f"instrument {tool.key}")) - 1
        return np.asarray(burden_admittance[:, None] / (1 + tool.tolerance * share))

    def _at(self, state: State, point: str, scores: Scores) -> tuple[int | None, Complex]:
        name, _, end = point.rpartition("@")
        if name in self.free:
            k = self.free.index(name)
            half = 0.5 if end == "far" else -0.5
            return k, state.volts[:, :, k] + half * state.induced[:, :, k]
        supply = 1 + SUPPLY_SPREAD.likely * score_of(scores, "supply")
        return None, self._volts(point)[:, None] * supply * state.energised

    def _volts(self, point: str) -> Complex:
        """Of a point that holds its voltage (H,), as the run has it."""
        if point == EARTH:
            return np.zeros(len(self.orders), dtype=complex)
        if point not in self._known:
            runs = [self.run if n == 1 else self.run.at_order(n) for n in self.orders]
            self._known[point] = np.array([r.voltage(point) for r in runs])
        return self._known[point]

    @cached_property
    def _known(self) -> dict[str, Complex]:
        return {}

    @cached_property
    def _held(self) -> Complex:
        """Voltage of each conductor, halfway along, and of earth (H, n + 1); 0 for free ones."""
        columns = [np.zeros(len(self.orders), dtype=complex) if n in self.free else
                   (self._volts(f"{n}@near") + self._volts(f"{n}@far")) / 2
                   for n in self.run.names]
        return np.stack([*columns, np.zeros(len(self.orders), dtype=complex)], axis=1)

    @cached_property
    def _live(self) -> NDArray[np.bool_]:
        """Which conductors hold a voltage of more than a tenth of the supply's (n,)."""
        return np.asarray(np.abs(self._held[0, :-1]) > 0.1 * self.run.supply.voltage)

    @cached_property
    def _coupling(self) -> Coupling:
        return Coupling(self.run, self.low, self.high, self.free, self.suspects, self._live,
                        self.described)

    def _fixed(self, c: Real) -> Real:
        fixed = c.copy()
        fixed[:, :, self._coupling.columns] = 0.0
        return fixed

    @cached_property
    def _ties(self) -> tuple[_Tie, ...]:
        return tuple(self._found_ties())

    def _found_ties(self) -> Iterator[_Tie]:
        for end in ENDS:
            for name, t in getattr(self.run, end).items():
                if isinstance(t, Open | Driven):
                    continue
                other = word(t)
                if name in self.free:
                    yield self._tie(name, end, other, t)
                elif other in self.free:
                    yield self._tie(other, end, name, t)

    def _tie(self, name: str, end: str, other: str, t: Termination) -> _Tie:
        frequencies = self.omega / (2 * math.pi)
        y = (t.burden.admittance(frequencies) if isinstance(t, Through)
             else np.full(len(frequencies), _BOND, dtype=complex))
        free = self.free.index(other) if other in self.free else None
        point = f"{other}@{end}" if other in self.run.names else other
        return _Tie(self.free.index(name), end, free, point, y, isinstance(t, Through))

    def _join(
        self, y: Complex, drawn: Complex, induced: Complex, tie: _Tie, supply: Real
    ) -> None:
        """Add a tie; `supply` (Q,) scales the voltage of what it goes to."""
        half = 0.5 if tie.end == "far" else -0.5
        own, admittance = half * induced[:, :, tie.at], tie.admittance[:, None]
        y[:, :, tie.at, tie.at] += admittance
        if tie.free is None:
            drawn[:, :, tie.at] += admittance * (self._volts(tie.point)[:, None] * supply - own)
            return
        other = half * induced[:, :, tie.free]
        y[:, :, tie.free, tie.free] += admittance
        y[:, :, tie.at, tie.free] -= admittance
        y[:, :, tie.free, tie.at] -= admittance
        drawn[:, :, tie.at] += admittance * (other - own)
        drawn[:, :, tie.free] += admittance * (own - other)

    def _add(self, y: Complex, drawn: Complex, induced: Complex, d: Defect, supply: Real) -> None:
        """Add a defect's element to a point that holds its voltage."""
        k = self.free.index(d.conductor)
        half = {"far": 0.5, "near": -0.5, None: 0.0}[d.variant.end]
        admittance = self._element(d)
        y[:, :, k, k] += admittance
        held = self._volts(d.variant.to)[:, None] * supply
        drawn[:, :, k] += admittance * (held - half * induced[:, :, k])

    def _element(self, d: Defect) -> Complex:
        """Admittance of a defect (H, Q) [S]."""
        if d.variant.cause in ("solid connection", "magnetic pick-up"):
            return np.full((len(self.orders), 1), 1 / CONTACT.likely, dtype=complex)
        if d.variant.cause != "back-feed through a load":
            return np.asarray((1 / d.size)[None] + 0j)
        order = np.array(self.orders, dtype=float)[:, None]
        reactance = d.size * np.sin(d.angle)
        return np.asarray(1 / (d.size * np.cos(d.angle) + 1j * np.where(
            reactance > 0, reactance * order, reactance / order)))


def may_be_suspect(run: Run, name: str) -> bool:
    """Whether a cause can be looked for on a conductor: not driven, and open at one end at least.

    One that is bonded at one end and open at the other can still have a voltage induced along it.
    """
    ends = (run.near[name], run.far[name])
    return _free(run, name) or (not any(isinstance(t, Driven) for t in ends)
                                and any(isinstance(t, Open) for t in ends))


def free_conductors(run: Run) -> tuple[str, ...]:
    """Conductors that nothing feeds and nothing bonds."""
    return tuple(n for n in run.names if _free(run, n))


def _free(run: Run, name: str) -> bool:
    return not any(isinstance(end[name], Driven | Bonded) or _joined_to_held(run, end[name])
                   for end in (run.near, run.far))


def _joined_to_held(run: Run, t: Termination) -> bool:
    """Whether an end is joined straight to a conductor that is driven or bonded."""
    return isinstance(t, Joined) and any(
        isinstance(end[t.other], Driven | Bonded) for end in (run.near, run.far))


def instruments_of(tools: Sequence[Instrument]) -> tuple[str, ...]:
    """Coordinates of the instruments whose burden has a tolerance, each once."""
    return tuple(dict.fromkeys(f"instrument {t.key}" for t in tools if t.tolerance > 0))
