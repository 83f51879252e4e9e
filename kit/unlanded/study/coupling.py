"""The capacitances of the conductors that nothing feeds, and how far they may lie from computed.

The covers' permittivity, the geometry, what the section does not show, and what the description
has wrong for all of them together each have a coordinate, a normal score of mean 0 and standard
deviation 1. Descriptions are now and then far off, so that scores are stretched outward.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from ..reference.records import Source, Value
from .ends import SCREEN
from .hypotheses import size_at
from .run import Run
from .tails import stretched

Real = NDArray[np.float64]
Scores = Mapping[str, Real]
"""Normal scores (Q,) by coordinate; a coordinate that is not there is 0."""

_JUDGED = Source("spread of what a case describes", "judgement")
GEOMETRY_SPREAD = Value(0.15, "", _JUDGED)  # of each capacitance's logarithm, at a score of 1
DESCRIPTION_SPREAD = Value(0.12, "", _JUDGED)  # of them all together: type of cable, length
LIMIT_SCORE = Value(2.0, "", _JUDGED)  # standard deviations at which the permittivity's limits lie
STRETCHED = ("description",)  # coordinates whose scores are stretched outward
OPEN_SURROUND = Value(5e-12, "F/m", Source("a conductor of a cable in the open to floor, wall and "
                                           "metalwork around it", "judgement"))
OPEN_SPREAD = Value(0.75, "", _JUDGED)  # one standard deviation of its logarithm
UNDESCRIBED = Value(100e-12, "F/m", Source("two cores of building or control cable, section not "
                                           "described", "common practice"), 20e-12, 300e-12)


@dataclass(frozen=True, eq=False)
class Coupling:
    """Capacitances of the free conductors of a run to everything.

    Parameters
    ----------
    run, low, high : with the covers' permittivity likely, and at the limits of its range
    free : conductors whose voltage is unknown, m of the section's n
    suspects : those whose capacitances have coordinates of their own
    live : which conductors hold a line's voltage (n,)
    described : False where the section is not to be relied on: each suspect's capacitance to the
        live conductors, and to the earthed ones, is then anywhere in `UNDESCRIBED`
    """

    run: Run
    low: Run
    high: Run
    free: tuple[str, ...]
    suspects: tuple[str, ...]
    live: NDArray[np.bool_]
    described: bool

    @property
    def coordinates(self) -> tuple[str, ...]:
        """Names of its unknowns."""
        each = tuple(f"{what} {name}" for name in self.suspects for what in ("live", "earth"))
        screen = (SCREEN,) if SCREEN in self.free else ()
        return ("permittivity", "description", *screen, *each) if self.described else each

    @cached_property
    def columns(self) -> list[int]:
        """Of the free conductors among all."""
        return [self.run.names.index(n) for n in self.free]

    def at(self, scores: Scores) -> Real:
        """Of the free conductors to all others and to earth (Q, m, n + 1) [F]."""
        if not self.described:
            return self._assumed(scores)
        low, likely, high = self._partial
        z = score_of(scores, "permittivity")[:, None, None] / LIMIT_SCORE.likely
        log = likely + np.where(z > 0, z * (high - likely), z * (likely - low))
        c = np.exp(log)
        c[:, :, -1] += self._open * self.run.length
        if SCREEN in self.free:
            lies = score_of(scores, SCREEN)  # on earthed metal, or in the open
            c[:, self.free.index(SCREEN), -1] *= np.exp(OPEN_SPREAD.likely * lies)
        common = stretched(score_of(scores, "description"))
        c *= np.exp(DESCRIPTION_SPREAD.likely * common)[:, None, None]
        live = np.append(self.live, False)
        for k, name in enumerate(self.free):
            for what, columns in (("live", live), ("earth", ~live)):
                if f"{what} {name}" in scores:
                    spread = GEOMETRY_SPREAD.likely if what == "live" else self._earth_spread[k]
                    c[:, k, columns] *= np.exp(spread * scores[f"{what} {name}"])[:, None]
        # Two free conductors have one capacitance between them.
        among = c[:, :, self.columns]
        c[:, :, self.columns] = np.sqrt(among * among.swapaxes(1, 2))
        return np.asarray(c)

    @cached_property
    def _partial(self) -> Real:
        """Logarithms of the capacitances of the free conductors to all, low, likely and high.

        (3, m, n + 1) [ln F]; the last column is to earth.
        """
        made = []
        for run in (self.low, self.run, self.high):
            c = run.matrix[self.columns] * self.run.length
            direct = -c
            direct[range(len(c)), self.columns] = 0.0
            made.append(np.column_stack([direct, np.maximum(c.sum(axis=1), 0.0)]))
        return np.log(np.maximum(made, 1e-21))

    @property
    def _open(self) -> float:
        """What a conductor has to surroundings that the section does not show [F/m]."""
        return OPEN_SURROUND.likely if self.run.section.surround is None else 0.0

    @cached_property
    def _earth_spread(self) -> Real:
        """One standard deviation of the logarithm of each free conductor's, to all not live (m,).

        The computed part and what surroundings that the section does not show add vary apart.
        """
        shown = np.exp(self._partial[1])[:, ~np.append(self.live, False)].sum(axis=1)
        hidden = self._open * self.run.length
        return np.asarray(np.hypot(GEOMETRY_SPREAD.likely * shown, OPEN_SPREAD.likely * hidden)
                          / (shown + hidden))

    def _assumed(self, scores: Scores) -> Real:
        count = max(int(self.live.sum()), 1)
        c = np.zeros((len(score_of(scores, "supply")), len(self.free), len(self.live) + 1))
        for k, name in enumerate(self.free):
            live, earth = (
                self.run.length * _spread(score_of(scores, f"{what} {name}"), UNDESCRIBED)
                for what in ("live", "earth"))
            c[:, k, :-1] = np.where(self.live, live[:, None] / count, 0.0)
            c[:, k, -1] = earth
        return c


def score_of(scores: Scores, name: str) -> Real:
    """Of a coordinate (Q,), 0 where it has none."""
    some = next(iter(scores.values()))
    return scores.get(name, np.zeros_like(some))


def _spread(score: Real, given: Value) -> Real:
    """The value at a normal score, spread evenly over the logarithm of its range."""
    from scipy.special import ndtr

    return size_at(ndtr(score), given)
