"""Where the posterior of one hypothesis lies: its modes at given sizes, and how wide it is there.

Gauss and Newton's method, then Laplace's. Two searches are made, one that forgives misfits and one
that hardly does: a reading that is far off may be wrong, or the unknowns may be far from where
they were thought to be, and often both are possible. Where an unknown has wide tails, two more
hold it far out on either side: the other unknowns that fit there do not lie straight on from the
modes.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass
from functools import cached_property
from typing import Protocol

import numpy as np
from numpy.typing import NDArray

from .tails import FARTHEST, density, pull, relaxed, stretched

Real = NDArray[np.float64]
Predict = Callable[[Real, Real], Real]
"""Sizes (Q,) and scores (Q, d) to what each of K readings would be (K, Q)."""

_MODES, _HELD, _LESS = 0.27, 0.1, 0.18  # shares of a mixture of draws; the prior has the rest

_BELIEF = 0.1  # of the readings' curvature, in the third part
_SOFT = 4.0  # degrees of freedom of the misfits in a search: one that is far off hardly pulls
_STRICT = 1e4  # and of a search that lets each reading pull
_STEP = 1e-4
_LOOSE = 0.6  # curvature that a stretched coordinate is drawn with, at most
_OUT = 3.0  # where a stretched coordinate is held, and so many times as firmly as the prior:
_HOLD = 30.0
_WIDE = 0.3  # curvature that it is then drawn with
_LEAST_GAIN = 1e-300


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

    @property
    def held(self) -> Real:
        """Where the stretched coordinates are held in each search; NaN where they are free (M,)."""
        return np.array([np.nan, np.nan, -_OUT, _OUT] if self.stretched else [np.nan, np.nan])

    def scores(self, at: Real) -> Real:
        """Normal scores of points (Q, d)."""
        made = at.copy()
        made[:, self.stretched] = relaxed(at[:, self.stretched])
        return made

    def points(self, scores: Real) -> Real:
        """Points (Q, d) of normal scores."""
        made = scores.copy()
        made[:, self.stretched] = stretched(scores[:, self.stretched])
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
class Nodes:
    """Sizes (G,) in rising order, and the posterior of the scores there.

    Parameters
    ----------
    size : (G,)
    score : of each search (G, M, d); the first two are modes
    root : of the covariance, for each part of the mixture but the prior (G, P, d, d)
    height : logarithm of what Laplace's method makes of the integral (G,)
    misfit : of the readings at the modes (G, 2, K)
    rest : the part of `height` that is not the readings', of each mode (G, 2)

    The parts of the mixture are the searches, then the first with less belief in the readings,
    then the prior.
    """

    size: Real
    score: Real
    root: Real
    height: Real
    misfit: Real
    rest: Real

    @property
    def shares(self) -> Real:
        """Of the mixture, each part but the prior (P,)."""
        held = self.score.shape[1] - 2
        return np.array([_MODES] * 2 + [_HELD] * held + [_LESS])

    @property
    def soft(self) -> Real:
        """What `height` would be if misfits were forgiven (G,): it leads to a peak from far off."""
        return np.asarray((self.rest - _forgiven(self.misfit)).max(axis=1))

    @property
    def passed(self) -> Real:
        """The highest that `soft` may be between one node and the next (G − 1,).

        As misfits change evenly: a sharp peak between two nodes that are alike is seen in signs
        that turn.
        """
        left, change = self.misfit[:-1], np.diff(self.misfit, axis=0)
        length = np.maximum((change**2).sum(axis=2), 1e-30)
        share = np.clip(-(left * change).sum(axis=2) / length, 0.0, 1.0)
        rest = np.maximum(self.rest[:-1], self.rest[1:])
        return np.asarray((rest - _forgiven(left + share[..., None] * change)).max(axis=1))

    @cached_property
    def inverse(self) -> Real:
        """Of each root (G, P, d, d)."""
        return np.asarray(np.linalg.inv(self.root))

    @cached_property
    def scale(self) -> Real:
        """Determinant of each root (G, P)."""
        return np.asarray(np.prod(np.diagonal(self.root, axis1=2, axis2=3), axis=2))

    def middle(self, k: NDArray[np.intp], share: Real) -> Real:
        """Of each part but the prior, that share of the way from node k to the next (q, P, d)."""
        after = np.minimum(k + 1, len(self.size) - 1)
        blend = share[:, None, None]
        modes = (1 - blend) * self.score[k] + blend * self.score[after]
        return np.concatenate([modes, modes[:, :1]], axis=1)

    def with_more(self, other: Nodes) -> Nodes:
        """Both, in order."""
        both = [np.concatenate([getattr(self, n), getattr(other, n)])
                for n in ("size", "score", "root", "height", "misfit", "rest")]
        order = np.argsort(both[0])
        return Nodes(*(b[order] for b in both))


def closed_in(problem: Problem) -> Nodes:
    """Nodes that are dense where the integral is large or its mode moves."""
    if not problem.sized:
        return _searched(problem, np.array([0.5]), 8)
    size = (np.arange(20) + 0.5) / 20
    nodes = _searched(problem, np.concatenate([[0.0], size, [1.0]]), 5)
    for _ in range(16):
        highest = np.maximum(nodes.height[:-1], nodes.height[1:])
        wanted = np.union1d(_coarse(nodes.size, nodes.height, highest),
                            _coarse(nodes.size, nodes.soft, nodes.passed))
        if not len(wanted):
            break
        middle = (nodes.size[wanted] + nodes.size[wanted + 1]) / 2
        start = (nodes.score[wanted] + nodes.score[wanted + 1]) / 2
        nodes = nodes.with_more(_described(problem, middle,
                                           _climbed(problem, middle, start, 2)))
    return nodes


def _coarse(size: Real, height: Real, highest: Real) -> NDArray[np.intp]:
    """Cells that matter and over which the integrand changes too much to be drawn straight.

    `highest` is what the height may come to within each.
    """
    gap = np.diff(size)
    mass = gap * np.exp(highest - highest.max())
    rough = highest - np.minimum(height[:-1], height[1:]) > 0.7
    wanted = np.flatnonzero(rough & (mass > 0.02 * mass.sum()) & (gap > 1e-6))
    return np.asarray(wanted[np.argsort(mass[wanted])[-6:]])


def _searched(problem: Problem, size: Real, steps: int) -> Nodes:
    """Nodes at these sizes, both searches from the middle of the prior."""
    start = np.zeros((len(size), len(problem.held), problem.dimensions))
    return _described(problem, size, _climbed(problem, size, start, steps))


def _climbed(problem: Problem, size: Real, score: Real, steps: int) -> Real:
    """The scores of each size, nearer to what is searched for (G, M, d)."""
    sizes, at = np.repeat(size, len(problem.held)), score.reshape(-1, score.shape[-1])
    forgiving = _forgiving(problem, size)
    out = np.tile(problem.held, len(size))[:, None]
    firm = np.where(np.isnan(out), 0.0, _HOLD)
    out = np.nan_to_num(out)
    far = np.full(problem.dimensions, FARTHEST)
    far[list(problem.stretched)] = stretched(FARTHEST)
    for _ in range(steps):
        misfit, slope = _linear(problem, sizes, at)
        own = problem.pull(at)
        push = own * at + np.einsum("gki,gk->gi", _weighted(misfit, slope, forgiving), misfit)
        push[:, problem.stretched] += firm * (at[:, problem.stretched] - out)
        own[:, problem.stretched] += firm
        curve = _curve(misfit, slope, forgiving, own)
        step = np.linalg.solve(curve, push[..., None])[..., 0]
        length = np.linalg.norm(step, axis=1, keepdims=True)
        at = np.clip(at - step * np.minimum(1.0, 2.0 / np.maximum(length, 1e-12)), -far, far)
    return at.reshape(score.shape)


def _forgiving(problem: Problem, size: Real) -> Real:
    """Degrees of freedom of the misfits in the searches at each size (M G, 1)."""
    held = len(problem.held) - 2
    return np.tile((_SOFT, _STRICT, *(_SOFT,) * held), len(size))[:, None]


def _described(problem: Problem, size: Real, score: Real) -> Nodes:
    """Nodes with these modes."""
    count = len(problem.held)
    sizes, at = np.repeat(size, count), score.reshape(-1, score.shape[-1])
    misfit, slope = _linear(problem, sizes, at)
    own = problem.pull(at)
    free = np.tile(np.isnan(problem.held), len(size))[:, None]
    own[:, problem.stretched] = np.where(
        free, np.minimum(own[:, problem.stretched], _LOOSE), _WIDE)
    curve = _curve(misfit, slope, _forgiving(problem, size), own).reshape(*score.shape, -1)
    plain = np.eye(score.shape[-1])
    plain[problem.stretched, problem.stretched] = _LOOSE
    less = plain + _BELIEF * (curve[:, 0] - plain)
    parts = np.concatenate([curve, less[:, None]], axis=1)
    root = np.linalg.cholesky(np.linalg.inv(parts))
    rest = (np.log(np.diagonal(root[:, :2], axis1=2, axis2=3)).sum(axis=2)
            + np.log(problem.density(at)).reshape(-1, count)[:, :2])
    gain = np.log(np.maximum(problem.gain(sizes, at), _LEAST_GAIN)).sum(axis=0)
    return Nodes(size, score, root, (rest + gain.reshape(-1, count)[:, :2]).max(axis=1),
                 misfit.reshape(*score.shape[:2], -1)[:, :2], rest)


def _forgiven(misfit: Real) -> Real:
    """−ln chance of misfits (…, K) with wide tails, summed over the readings (…)."""
    return np.asarray((_SOFT + 1) / 2 * np.log1p(misfit**2 / _SOFT).sum(axis=-1))


def _linear(problem: Problem, size: Real, score: Real) -> tuple[Real, Real]:
    """Misfits (G, K) and their slopes (G, K, d)."""
    g, d = score.shape
    moved = np.concatenate([score[None], score[None] + _STEP * np.eye(d)[:, None]])
    volts = problem.predict(np.tile(size, d + 1), problem.scores(moved.reshape(-1, d)))
    misfit = problem.likelihood.misfit(volts).reshape(-1, d + 1, g)
    slope = (misfit[:, 1:] - misfit[:, :1]) / _STEP
    return misfit[:, 0].T, slope.transpose(2, 0, 1)


def _weighted(misfit: Real, slope: Real, soft: Real) -> Real:
    return np.asarray(slope / (1 + misfit**2 / soft)[..., None])


def _curve(misfit: Real, slope: Real, soft: Real, own: Real) -> Real:
    """Curvature of −ln posterior (G, d, d), `own` that of the prior (G, d)."""
    return np.asarray(own[:, None] * np.eye(own.shape[1]) + np.einsum(
        "gki,gkj->gij", _weighted(misfit, slope, soft), slope))
