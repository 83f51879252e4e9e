"""Evidence of one hypothesis: the chance of all the readings, averaged over what is unknown.

Unknowns are normal scores (d) and, where the hypothesis has one, the size of its cause as a share
of its prior, even over 0 to 1. Given the size, the scores' posterior is nearly normal: it is found
at nodes that close in on the sizes that matter. The integral is then taken over scrambled Sobol'
points, drawn from those normals, from one that believes the readings less, and from the prior, all
with the wider tails of a Student distribution; each point is weighted by what it should have been.
The prior's part keeps every weight below a bound. Eight scramblings, each seeded, tell the error.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from functools import cache

import numpy as np
from numpy.typing import NDArray

from .modes import Nodes, Problem, Real, closed_in

SCRAMBLINGS = 8
LEAST = 6  # log2 of the points of each scrambling, at first
MOST_KEPT = 10_000_000  # numbers that the points of one integral are, at most: 80 MB
_TAIL = 8.0  # degrees of freedom
_EVEN = 0.1  # share of sizes drawn evenly, for what the nodes may have missed


@dataclass(frozen=True, eq=False)
class Draws:
    """Weighted points of a posterior; `weight` (Q,) averages to the evidence.

    Parameters
    ----------
    size, score : shares (Q,) and normal scores (Q, d)
    gain : of each reading (K, Q)
    """

    size: Real
    score: Real
    weight: Real
    gain: Real


class Integral:
    """The evidence of a problem, doubled in points as often as it is asked to."""

    def __init__(self, problem: Problem) -> None:
        self._problem = problem
        self._nodes = closed_in(problem)
        self._cells = _cells(self._nodes, problem.sized)
        self._parts: list[Draws] = []
        self._level = LEAST - 1
        self.double()

    @property
    def exhausted(self) -> bool:
        """Whether twice as many points would be more than are kept."""
        each = self._problem.dimensions + len(self._parts[0].gain) + 2  # size and weight too
        return 2 * self.points * each > MOST_KEPT

    def double(self) -> None:
        """Twice as many points."""
        start = 0 if self._level < LEAST else 2**self._level
        self._level += 1
        made = [self._drawn(r, start, 2**self._level) for r in range(SCRAMBLINGS)]
        self._parts.append(self._weighed(*(np.stack(p) for p in zip(*made, strict=True))))

    @property
    def value(self) -> float:
        """The evidence."""
        return float(np.mean(self._values))

    @property
    def error(self) -> float:
        """One standard deviation of it, relative, from the scatter of the scramblings."""
        values = self._values
        mean = values.mean()
        return float(values.std(ddof=1) / math.sqrt(len(values)) / mean) if mean else 0.0

    @property
    def points(self) -> int:
        """Points used in all."""
        return SCRAMBLINGS << self._level

    @property
    def draws(self) -> Draws:
        """All points."""
        parts = self._parts
        return Draws(np.concatenate([p.size.ravel() for p in parts]),
                     np.concatenate([p.score.reshape(-1, self._problem.dimensions)
                                     for p in parts]),
                     np.concatenate([p.weight.ravel() for p in parts]),
                     np.concatenate([p.gain.reshape(len(p.gain), p.size.size) for p in parts],
                                    axis=1))

    @property
    def _values(self) -> Real:
        return np.asarray(np.concatenate([p.weight for p in self._parts], axis=1).mean(axis=1))

    def _drawn(self, scrambling: int, start: int, stop: int) -> tuple[Real, Real, Real]:
        """Sizes (q,), scores (q, d) and the density they were drawn with (q,)."""
        d = self._problem.dimensions
        even, other, z = (a[start:stop] for a in _student_points(d, scrambling, stop))
        size, density, k, share = self._cells.at(even)
        middle, scale = self._nodes.middle(k, share), self._nodes.scale[k]
        shares = self._nodes.shares
        part = np.searchsorted(np.cumsum(shares), other)
        score = self._problem.points(z)
        for p in range(len(shares)):
            mine = part == p
            score[mine] = middle[mine, p] + _turned(self._nodes.root[:, p], k[mine], z[mine])
        back = self._problem.scores(score)
        mixed = ((1 - shares.sum()) * self._problem.density(score)
                 * _student_density(back) / _normal_density(back))
        for p, weight in enumerate(shares):
            back = _turned(self._nodes.inverse[:, p], k, score - middle[:, p])
            mixed += weight * _student_density(back) / scale[:, p]
        return size, score, density * mixed

    def _weighed(self, size: Real, score: Real, density: Real) -> Draws:
        flat = score.reshape(-1, score.shape[-1])
        gain = self._problem.gain(size.ravel(), flat)
        prior = self._problem.density(flat).reshape(size.shape)
        weight = np.prod(gain, axis=0).reshape(size.shape) * prior / density
        return Draws(size, self._problem.scores(flat).reshape(score.shape), weight,
                     gain.reshape(len(gain), *size.shape))


@dataclass(frozen=True, eq=False)
class _Cells:
    """A density of the size, even within each cell between two nodes."""

    edges: Real
    heights: Real
    reached: Real

    def at(self, cube: Real) -> tuple[Real, Real, NDArray[np.intp], Real]:
        """Size, density, cell, and share of the cell, for even numbers 0 to 1 (q,)."""
        if len(self.edges) < 2:
            return cube, np.ones_like(cube), np.zeros(len(cube), dtype=np.intp), np.zeros_like(cube)
        k = np.clip(np.searchsorted(self.reached, cube, side="right") - 1, 0, len(self.heights) - 1)
        share = (cube - self.reached[k]) / (self.reached[k + 1] - self.reached[k])
        return (self.edges[k] + share * (self.edges[k + 1] - self.edges[k]), self.heights[k], k,
                np.clip(share, 0, 1))


def _cells(nodes: Nodes, sized: bool) -> _Cells:
    if not sized:
        return _Cells(nodes.size, np.ones(1), np.ones(1))
    gap = np.diff(nodes.size)
    level = np.exp(nodes.height - nodes.height.max())
    mean = (level[:-1] + level[1:]) / 2
    heights = (1 - _EVEN) * mean / (mean * gap).sum() + _EVEN
    reached = np.concatenate([[0.0], np.cumsum(heights * gap)])
    return _Cells(nodes.size, heights, reached / reached[-1])


@cache
def _student_points(d: int, scrambling: int, count: int) -> tuple[Real, Real, Real]:
    """Even numbers for the size and for the part (q,), and Student scores (q, d)."""
    from scipy.special import gammaincinv, ndtri
    from scipy.stats import qmc

    points = qmc.Sobol(d + 3, scramble=True, seed=scrambling).random(count)
    points = np.clip(points, 1e-12, 1 - 1e-12)
    stretch = np.sqrt(_TAIL / (2 * gammaincinv(_TAIL / 2, points[:, 2])))
    return points[:, 0], points[:, 1], ndtri(points[:, 3:]) * stretch[:, None]


def _student_density(z: Real) -> Real:
    """Of independent directions (q, d)."""
    from scipy.special import gammaln

    d = z.shape[1]
    constant = (gammaln((_TAIL + d) / 2) - gammaln(_TAIL / 2)
                - d / 2 * math.log(_TAIL * math.pi))
    return np.asarray(np.exp(constant - (_TAIL + d) / 2 * np.log1p((z**2).sum(axis=1) / _TAIL)))


def _normal_density(z: Real) -> Real:
    """Of independent directions (q, d)."""
    return np.asarray(np.exp(-(z**2).sum(axis=1) / 2) / (2 * math.pi) ** (z.shape[1] / 2))


def _turned(matrix: Real, k: NDArray[np.intp], z: Real) -> Real:
    """Each z (q, d) by the matrix (G, d, d) of its node k (q,)."""
    if len(matrix) == 1:
        return np.asarray(z @ matrix[0].T)
    return np.asarray(np.einsum("qij,qj->qi", matrix[k], z))
