"""Evidence of one hypothesis: the chance of all the readings, averaged over what is unknown.

Unknowns are normal scores (d) and, where the hypothesis has one, the size of its cause as a share
of its prior, even over 0 to 1. Given the size, the scores' posterior is nearly normal: it is found
at nodes that close in on the sizes that matter (Gauss and Newton's method, then Laplace's). The
integral is then taken over scrambled Sobol' points, drawn from that normal, from one that believes
the readings less, and from the prior, all with the wider tails of a Student distribution; each
point is weighted by what it should have been. Eight scramblings, each seeded, tell the error.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass
from functools import cache, cached_property
from typing import Protocol

import numpy as np
from numpy.typing import NDArray

from .tails import FARTHEST, density, pull, relaxed, stretched

Real = NDArray[np.float64]
Predict = Callable[[Real, Real], Real]
"""Sizes (Q,) and scores (Q, d) to what each of K readings would be (K, Q)."""

SCRAMBLINGS = 8
LEAST, MOST = 6, 13  # log2 of the points of each scrambling
_TAIL = 8.0  # degrees of freedom
_EVEN = 0.1  # share of sizes drawn evenly, for what the nodes may have missed
_SOFT = 4.0  # degrees of freedom of the misfits in the search: one that is far off hardly pulls
_STRICT = 1e4  # and of a search that lets each reading pull
_STEP = 1e-4
_LOOSE = 0.6  # curvature that a stretched coordinate is drawn with, at most
_LEAST_GAIN = 1e-300
_BELIEF = np.array([1.0, 0.1, 0.0])  # in the readings' curvature, of each part of the mixture
_OF_NODES = ("size", "score", "root", "height", "soft")
_PARTS = np.array([0.6, 0.25, 0.15])  # and its share


class Likely(Protocol):
    """What the integral needs of a likelihood."""

    def gain(self, volts: Real) -> Real:
        """Chance of each reading (K, Q), in any unit that is the same for all hypotheses."""

    def misfit(self, volts: Real) -> Real:
        """How far each is off in standard deviations (K, Q)."""


@dataclass(frozen=True, eq=False)
class Problem:
    """One hypothesis.

    Parameters
    ----------
    predict : what the readings would be
    likelihood : of the readings
    dimensions : d, number of scores
    sized : whether the size matters
    stretched : scores that stand for values with wider tails; the integral is taken over these
        values, since the readings answer to them more evenly than to the scores
    """

    predict: Predict
    likelihood: Likely
    dimensions: int
    sized: bool
    stretched: tuple[int, ...] = ()

    def scores(self, at: Real) -> Real:
        """Normal scores of points (Q, d)."""
        made = at.copy()
        made[:, self.stretched] = relaxed(at[:, self.stretched])
        return made

    def gain(self, size: Real, at: Real) -> Real:
        """Of each reading (K, Q) at points (Q, d)."""
        return self.likelihood.gain(self.predict(size, self.scores(at)))

    def density(self, at: Real) -> Real:
        """Of points (Q, d), before any reading (Q,)."""
        each = np.exp(-(at**2) / 2) / math.sqrt(2 * math.pi)
        each[:, self.stretched] = density(at[:, self.stretched])
        return np.asarray(each.prod(axis=1))

    def pull(self, at: Real) -> Real:
        """Slope of −ln density over each coordinate, at points (Q, d)."""
        made = np.ones_like(at)
        made[:, self.stretched] = pull(at[:, self.stretched])
        return made


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
        self._nodes = _closed_in(problem)
        self._cells = _cells(self._nodes, problem.sized)
        self._parts: list[Draws] = []
        self._level = LEAST - 1
        self.double()

    @property
    def exhausted(self) -> bool:
        """Whether it has as many points as it may."""
        return self._level >= MOST

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
        middle = self._nodes.middle(k, share)
        part = np.minimum(np.searchsorted(np.cumsum(_PARTS), other), len(_PARTS) - 1)
        score = np.where(_BELIEF[part] > 0, 1, 0)[:, None] * middle
        for p in range(len(_PARTS)):
            mine = part == p
            score[mine] += _turned(self._nodes.root[:, p], k[mine], z[mine])
        scale = self._nodes.scale[k]
        mixed = np.zeros(len(size))
        for p, belief in enumerate(_BELIEF):
            off = score - middle if belief else score
            back = _turned(self._nodes.inverse[:, p], k, off)
            mixed += _PARTS[p] * _student_density(back) / scale[:, p]
        return size, score, density * mixed

    def _weighed(self, size: Real, score: Real, density: Real) -> Draws:
        flat = score.reshape(-1, score.shape[-1])
        gain = self._problem.gain(size.ravel(), flat)
        prior = self._problem.density(flat).reshape(size.shape)
        weight = np.prod(gain, axis=0).reshape(size.shape) * prior / density
        return Draws(size, self._problem.scores(flat).reshape(score.shape), weight,
                     gain.reshape(len(gain), *size.shape))


@dataclass(frozen=True, eq=False)
class _Nodes:
    """Sizes (G,) in rising order, and the posterior of the scores there.

    Its mode (G, d), and for each part of the mixture a root of the covariance (G, P, d, d); the
    logarithm of what Laplace's method makes of the integral (G,), and of what it would make of
    it if misfits were forgiven (G,): that one leads to a peak from far off.
    """

    size: Real
    score: Real
    root: Real
    height: Real
    soft: Real

    @cached_property
    def inverse(self) -> Real:
        """Of each root (G, P, d, d)."""
        return np.asarray(np.linalg.inv(self.root))

    @cached_property
    def scale(self) -> Real:
        """Determinant of each root (G, P)."""
        return np.asarray(np.prod(np.diagonal(self.root, axis1=2, axis2=3), axis=2))

    def middle(self, k: NDArray[np.intp], share: Real) -> Real:
        """The mode at that share of the way from node k to the next (q, d)."""
        after = np.minimum(k + 1, len(self.size) - 1)
        blend = share[:, None]
        return np.asarray((1 - blend) * self.score[k] + blend * self.score[after])

    def higher_half(self) -> _Nodes:
        """Of nodes whose second half has the sizes of the first again, the higher at each."""
        one, two = np.split(np.arange(len(self.size)), 2)
        better = np.where(self.height[two] > self.height[one], two, one)
        return _Nodes(*(getattr(self, n)[better] for n in _OF_NODES))

    def with_more(self, other: _Nodes) -> _Nodes:
        both = [np.concatenate([getattr(self, n), getattr(other, n)]) for n in _OF_NODES]
        order = np.argsort(both[0])
        return _Nodes(*(b[order] for b in both))


def _closed_in(problem: Problem) -> _Nodes:
    """Nodes that are dense where the integral is large or its mode moves."""
    if not problem.sized:
        return _laplace(problem, np.array([0.5]), 8)
    size = (np.arange(20) + 0.5) / 20
    nodes = _laplace(problem, np.concatenate([[0.0], size, [1.0]]), 5)
    for _ in range(16):
        wanted = np.union1d(_coarse(nodes.size, nodes.height), _coarse(nodes.size, nodes.soft))
        if not len(wanted):
            break
        middle = (nodes.size[wanted] + nodes.size[wanted + 1]) / 2
        start = (nodes.score[wanted] + nodes.score[wanted + 1]) / 2
        more = _climbed(problem, middle, start, 2, _SOFT)
        nodes = nodes.with_more(_described(problem, middle, more))
    return nodes


def _coarse(size: Real, height: Real) -> NDArray[np.intp]:
    """Cells that matter and over which the integrand changes too much to be drawn straight."""
    gap = np.diff(size)
    mass = gap * np.exp(np.maximum(height[:-1], height[1:]) - height.max())
    rough = np.abs(np.diff(height)) > 0.7
    wanted = np.flatnonzero(rough & (mass > 0.02 * mass.sum()) & (gap > 1e-6))
    return np.asarray(wanted[np.argsort(mass[wanted])[-6:]])


def _laplace(problem: Problem, size: Real, steps: int) -> _Nodes:
    """Nodes at these sizes, searched from the middle of the prior.

    Of two searches, one that forgives misfits from the start and one only at its end, the higher:
    a reading that is far off may be wrong, or the unknowns may.
    """
    twice, start = np.tile(size, 2), np.zeros((2 * len(size), problem.dimensions))
    forgiving = np.repeat([_SOFT, _STRICT], len(size))[:, None]
    score = _climbed(problem, twice, start, steps, forgiving)
    return _described(problem, twice, _climbed(problem, twice, score, 2, _SOFT)).higher_half()


def _climbed(
    problem: Problem, size: Real, score: Real, steps: int, soft: float | Real
) -> Real:
    """Scores nearer to the mode (G, d)."""
    far = np.full(problem.dimensions, FARTHEST)
    far[list(problem.stretched)] = stretched(FARTHEST)
    for _ in range(steps):
        misfit, slope = _linear(problem, size, score)
        curve, push = _normal_equations(misfit, slope, soft, problem.pull(score), score)
        step = np.linalg.solve(curve, push[..., None])[..., 0]
        length = np.linalg.norm(step, axis=1, keepdims=True)
        score = np.clip(score - step * np.minimum(1.0, 2.0 / np.maximum(length, 1e-12)), -far, far)
    return score


def _described(problem: Problem, size: Real, score: Real) -> _Nodes:
    """Nodes with these modes."""
    misfit, slope = _linear(problem, size, score)
    own = problem.pull(score)
    own[:, problem.stretched] = np.minimum(own[:, problem.stretched], _LOOSE)
    curve, _ = _normal_equations(misfit, slope, _SOFT, own, score)
    plain = np.eye(score.shape[1])
    plain[problem.stretched, problem.stretched] = _LOOSE
    parts = plain + _BELIEF[:, None, None] * (curve - plain)[:, None]
    root = np.linalg.cholesky(np.linalg.inv(parts))
    gain = problem.gain(size, score)
    rest = (np.log(np.diagonal(root[:, 0], axis1=1, axis2=2)).sum(axis=1)
            + np.log(problem.density(score)))
    height = rest + np.log(np.maximum(gain, _LEAST_GAIN)).sum(axis=0)
    forgiven = rest - (_SOFT + 1) / 2 * np.log1p(misfit**2 / _SOFT).sum(axis=1)
    return _Nodes(size, score, root, height, forgiven)


def _linear(problem: Problem, size: Real, score: Real) -> tuple[Real, Real]:
    """Misfits (G, K) and their slopes (G, K, d)."""
    g, d = score.shape
    moved = np.concatenate([score[None], score[None] + _STEP * np.eye(d)[:, None]])
    volts = problem.predict(np.tile(size, d + 1), problem.scores(moved.reshape(-1, d)))
    misfit = problem.likelihood.misfit(volts).reshape(-1, d + 1, g)
    slope = (misfit[:, 1:] - misfit[:, :1]) / _STEP
    return misfit[:, 0].T, slope.transpose(2, 0, 1)


def _normal_equations(
    misfit: Real, slope: Real, soft: float | Real, pull: Real, score: Real
) -> tuple[Real, Real]:
    weighted = slope / (1 + misfit**2 / soft)[..., None]
    own = pull[:, None] * np.eye(score.shape[1])
    curve = own + np.einsum("gki,gkj->gij", weighted, slope)
    return curve, pull * score + np.einsum("gki,gk->gi", weighted, misfit)


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


def _cells(nodes: _Nodes, sized: bool) -> _Cells:
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


def _turned(matrix: Real, k: NDArray[np.intp], z: Real) -> Real:
    """Each z (q, d) by the matrix (G, d, d) of its node k (q,)."""
    if len(matrix) == 1:
        return np.asarray(z @ matrix[0].T)
    return np.asarray(np.einsum("qij,qj->qi", matrix[k], z))
