"""Which circuits to move to which device, so that the worst margin is best with the fewest moves.

On one device, the worst that single-phase circuits can do together is what all those on one line
leak: circuits on other lines can only take from it, whichever are on. So each device's load is the
greatest of its lines' sums, which a mixed-integer linear program states exactly.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from time import monotonic
from typing import Any

import numpy as np

from ..errors import Refused
from .standing import Real

ALIKE = 0.01  # of a device's limit: leakage is not known better, so margins nearer are the same


@dataclass(frozen=True)
class Circuit:
    """A circuit of a board: its line, the most that it credibly leaks [A], and where it is now.

    `device` is None for a circuit that is new; `pinned` ones stay where they are.
    """

    name: str
    line: str
    current: float
    device: str | None = None
    pinned: bool = False


@dataclass(frozen=True)
class Place:
    """A device that circuits may stand behind: what may stand there [A], and on which lines.

    `ways` is how many circuits it has room for.
    """

    name: str
    limit: float
    lines: tuple[str, ...]
    ways: int | None = None


@dataclass(frozen=True)
class Regrouping:
    """A new grouping.

    Parameters
    ----------
    device_of : of every circuit
    moves : circuits that are not where they were
    worst : least margin of any device, of its limit [1]; below 0 where one is exceeded
    worst_before : the same as it stands now, NaN where a circuit is new
    gap : by how much of a limit the worst margin might still be better [1]
    moves_gap : by how many moves it might still be done with fewer; 0 when proved fewest
    alike : margins nearer than this counted as the same [1]
    """

    device_of: dict[str, str]
    moves: tuple[str, ...]
    worst: float
    worst_before: float
    gap: float
    moves_gap: int
    alike: float

    @property
    def proved(self) -> bool:
        """Whether nothing better exists: worst margin within `alike`, then fewest moves."""
        return self.gap <= self.alike + 1e-6 and self.moves_gap == 0


def regroup(
    circuits: Sequence[Circuit],
    places: Sequence[Place],
    *,
    alike: float = ALIKE,
    seconds: float = 10.0,
) -> Regrouping:
    """The grouping with the best worst margin, and of those the one with the fewest moves.

    Margins nearer than `alike` (of a device's limit) count as the same; 0 is exact, and slow on
    a full board. `seconds` bounds the whole search; where it ends early, the gaps say what is not
    proved. Raises `Refused`: where a name is used twice, a circuit has no device on its line, or
    a pinned one is nowhere.

    >>> desks = [Circuit(str(k), "L", 3e-3, "A") for k in range(4)]
    >>> found = regroup(desks, [Place("A", 9e-3, ("L",)), Place("B", 9e-3, ("L",))])
    >>> len(found.moves), round(found.worst, 6), found.proved
    (2, 0.333333, True)
    """
    problem = _Problem(tuple(circuits), tuple(places))
    began = monotonic()
    lightest, bound = problem.lightest(alike / 2, 0.3 * seconds)
    worst = min(problem.worst(lightest), bound - alike)
    assigned, fewest = problem.fewest_moves(lightest, worst, began + seconds - monotonic())
    now = problem.now
    moves = tuple(c.name for c, new, old in zip(circuits, assigned, now, strict=True) if new != old)
    return Regrouping(
        {c.name: places[p].name for c, p in zip(circuits, assigned, strict=True)}, moves,
        problem.worst(assigned),
        math.nan if -1 in now else problem.worst(now),
        max(0.0, bound - problem.worst(assigned)), max(0, len(moves) - fewest), alike)


class _Problem:
    """Binary x[c, p] for every circuit on every place that has its line, and the heaviest load.

    A load is a line's sum behind a device, of the device's limit: 1 less the margin.
    """

    def __init__(self, circuits: tuple[Circuit, ...], places: tuple[Place, ...]) -> None:
        self._circuits, self._places = circuits, places
        names = [p.name for p in places]
        for kind, known in (("circuit", [c.name for c in circuits]), ("device", names)):
            if twice := next((n for n in known if known.count(n) > 1), None):
                raise Refused(kind, "a name may be used once", given=twice)
        for p in places:
            if not 0 < p.limit < math.inf:
                raise Refused(f'device "{p.name}"', "its limit must be above 0 A", given=p.limit)
        self.now = [names.index(c.device) if c.device in names else -1 for c in circuits]
        self._may = [self._allowed(c, now) for c, now in zip(circuits, self.now, strict=True)]
        self._pairs = [(c, p) for c, allowed in enumerate(self._may) for p in allowed]

    def _allowed(self, circuit: Circuit, now: int) -> list[int]:
        fits = [p for p, place in enumerate(self._places) if circuit.line in place.lines]
        if circuit.pinned:
            if now not in fits:
                raise Refused(f'circuit "{circuit.name}"', "is pinned to a device that is not "
                              "there or not on its line", given=circuit.device or "none")
            return [now]
        if not fits:
            raise Refused(f'circuit "{circuit.name}"', "has no device on its line",
                          given=circuit.line)
        return fits

    def worst(self, assigned: Sequence[int]) -> float:
        """Least margin of any device [1]."""
        load: dict[tuple[int, str], float] = {}
        for circuit, p in zip(self._circuits, assigned, strict=True):
            load[p, circuit.line] = load.get((p, circuit.line), 0.0) + circuit.current
        return min((1 - i / self._places[p].limit for (p, _), i in load.items()), default=1.0)

    def lightest(self, gap: float, seconds: float) -> tuple[list[int], float]:
        """The grouping with the best worst margin found, and the bound that none exceeds."""
        cost = np.append(np.zeros(len(self._pairs)), 1.0)
        found = self._solve(cost, math.inf, seconds, gap)
        if found.x is None:
            raise Refused("regrouping", "no grouping was found", given=found.message,
                          hint="give more time, more ways, or fewer pinned circuits")
        return self._assigned(found.x), 1 - float(found.mip_dual_bound)

    def fewest_moves(
        self, known: list[int], worst: float, seconds: float
    ) -> tuple[list[int], int]:
        """A grouping of that worst margin with the fewest moves, and the bound on their number."""
        cost = np.array([float(p != self.now[c]) for c, p in self._pairs] + [0.0])
        found = self._solve(cost, 1 - worst + 1e-9, seconds, 0.0)
        bound = math.ceil(float(found.mip_dual_bound or 0.0) - 1e-6)
        return (known if found.x is None else self._assigned(found.x)), bound

    def _assigned(self, x: Real) -> list[int]:
        chosen = [0] * len(self._circuits)
        for (c, p), on in zip(self._pairs, x, strict=False):
            if on > 0.5:
                chosen[c] = p
        return chosen

    def _solve(self, cost: Real, heaviest: float, seconds: float, gap: float) -> Any:
        from scipy.optimize import Bounds, LinearConstraint, milp

        count = len(self._pairs)
        rows, low, high = self._constraints()
        return milp(
            cost, integrality=np.append(np.ones(count), 0.0),
            bounds=Bounds(np.zeros(count + 1), np.append(np.ones(count), heaviest)),
            constraints=LinearConstraint(rows, low, high),
            options={"time_limit": seconds, "mip_rel_gap": gap})

    def _constraints(self) -> tuple[Real, Real, Real]:
        """One place for each circuit; each line's sum within the load of each limit; ways."""
        count = len(self._pairs)
        lines = sorted({c.line for c in self._circuits})
        once = np.zeros((len(self._circuits), count + 1))
        load = np.zeros((len(self._places), len(lines), count + 1))
        ways = np.zeros((len(self._places), count + 1))
        for k, (c, p) in enumerate(self._pairs):
            circuit, place = self._circuits[c], self._places[p]
            once[c, k] = ways[p, k] = 1.0
            load[p, lines.index(circuit.line), k] = circuit.current / place.limit
        load[:, :, -1] = -1.0
        room = np.array([math.inf if p.ways is None else p.ways for p in self._places])
        sums = load.reshape(-1, count + 1)
        high = np.concatenate([np.ones(len(once)), np.zeros(len(sums)), room])
        low = np.concatenate([np.ones(len(once)), np.full(len(sums) + len(ways), -math.inf)])
        return np.vstack([once, sums, ways]), low, high

