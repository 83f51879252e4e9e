"""How sure: what is known of the inputs, carried through to the results.

Propagation of distributions after JCGM 101:2008 (GUM Supplement 1) with scrambled Sobol' points
in place of pseudo-random numbers. Batches of independent scrambles are drawn until the ends of
every coverage interval are stable to a stated fraction of its width (7.9 of it); only sums are
kept, so memory is that of one batch. Which input matters most: Sobol' indices, from scipy.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass
from typing import Any, Literal, Protocol, TypeAlias

import numpy as np
from numpy.typing import ArrayLike, NDArray

from ..errors import Mistake, Refused

Real = NDArray[np.float64]
Model: TypeAlias = Callable[[Real], Real]
"""From values of the inputs (B, d) to results (B, k)."""
Interval = Literal["symmetric", "shortest"]

COVERAGE = 0.95
STABLE = 0.05  # of an interval's width
LEAST_BATCHES = 4
KEPT = 1024
_EDGE = 1e-6  # of each tail: no draws beyond, for a distribution without limits has none


class Distribution(Protocol):
    """Anything with quantiles, such as a frozen distribution of scipy.stats."""

    def ppf(self, q: Any) -> Any:
        """Value below which the share q lies."""


@dataclass(frozen=True, eq=False)
class Input:
    """Something that is not known exactly: what a reader calls it, and how it is distributed."""

    name: str
    distribution: Distribution


def uniform(low: float, high: float) -> Distribution:
    """Anywhere from `low` to `high`, as likely here as there.

    >>> float(uniform(2.0, 4.0).ppf(0.5))
    3.0
    """
    from scipy.stats import uniform as flat

    _require_rising(low, high)
    return flat(low, high - low)  # type: ignore[no-any-return]


def triangular(low: float, likely: float, high: float) -> Distribution:
    """From `low` to `high`, most likely at `likely`.

    >>> round(float(triangular(3.5, 4.8, 6.5).ppf((4.8 - 3.5) / 3.0)), 12)
    4.8
    """
    from scipy.stats import triang

    _require_rising(low, high)
    if not low <= likely <= high:
        raise Refused("triangular", "low, likely and high must be in rising order",
                      given=f"{low:g}, {likely:g}, {high:g}")
    return triang((likely - low) / (high - low), low, high - low)  # type: ignore[no-any-return]


def within(value: float, share: float) -> Distribution:
    """Anywhere in `value` ± `share` of it, such as 0.1 for 10 %: a maker's tolerance."""
    if not 0 < share < 1:
        raise Refused("tolerance", "must be above 0 and below 1", given=f"{share:g}")
    return uniform(value - abs(value) * share, value + abs(value) * share)


def limits(distribution: Distribution) -> tuple[float, float]:
    """The lowest and highest value that is ever drawn."""
    low, high = distribution.ppf(np.array([_EDGE, 1 - _EDGE]))
    return float(low), float(high)


def quasi_random(inputs: Sequence[Input], count: int, *, seed: int = 1) -> Real:
    """Values of the inputs (count, d) that fill their ranges evenly; `count` a power of 2."""
    _refuse(inputs, COVERAGE, STABLE, count)
    return next(_batches(inputs, count, None, seed))


def _require_rising(low: float, high: float) -> None:
    if not (low < high and math.isfinite(high - low)):
        raise Refused("limits", "low must be below high", given=f"{low:g} to {high:g}")


@dataclass(frozen=True, eq=False)
class Spread:
    """What is known of k results.

    Parameters
    ----------
    mean, deviation : and standard deviation (k,)
    low, high : ends of the coverage interval (k,)
    error : of those ends, two standard errors over the batches (k,)
    coverage : share of the draws that the interval holds [1]
    draws : how many were made
    stable : whether `error` is within the fraction asked for, in every result
    sample : results of the first draws (M, k), at most 1024 or one batch, for a picture
    """

    mean: Real
    deviation: Real
    low: Real
    high: Real
    error: Real
    coverage: float
    draws: int
    stable: bool
    sample: Real


def propagate(
    model: Model,
    inputs: Sequence[Input],
    *,
    coverage: float = COVERAGE,
    interval: Interval = "symmetric",
    stable: float = STABLE,
    batch: int = 1024,
    most: int = 65_536,
    correlation: ArrayLike | None = None,
    seed: int = 1,
) -> Spread:
    """The spread of the model's results over what the inputs may be.

    Parameters
    ----------
    model : vectorised, from (B, d) to (B, k)
    inputs : d of them, at least one
    coverage : share of the draws within each interval [1], above 0 and below 1
    interval : as much below as above, or the shortest; JCGM 101, 5.3
    stable : fraction of the interval's width to which its ends must be known, above 0
    batch : draws of one scramble, a power of 2
    most : draws in all; `Spread.stable` is false where they did not suffice
    correlation : of the inputs' normal scores (d, d); independent when None
    seed : of the scrambles; the same seed gives the same result

    Raises `Refused`. Source: JCGM 101:2008, 7.9.

    The sum of two uniform inputs has mean 1 and ends at 1 ± (1 − √0.05):

    >>> pair = [Input("a", uniform(0, 1)), Input("b", uniform(0, 1))]
    >>> ends = propagate(lambda x: x.sum(axis=1, keepdims=True), pair, stable=0.002)
    >>> round(float(ends.mean[0]), 3), round(float(ends.high[0]), 2)
    (1.0, 1.78)
    """
    _refuse(inputs, coverage, stable, batch)
    tally: list[tuple[Real, ...]] = []
    kept: list[Real] = []
    settled = False
    for values in _batches(inputs, batch, correlation, seed):
        results = np.asarray(model(values), dtype=float)
        if not kept or (len(kept) + 1) * batch <= KEPT:
            kept.append(results)
        tally.append((results.mean(axis=0), (results**2).mean(axis=0),
                      *coverage_interval(results, coverage, interval)))
        if len(tally) >= LEAST_BATCHES:
            low, high, error = _ends(tally)
            settled = bool(np.all(error <= stable * (high - low) + 1e-12 * np.abs(high)))
        if settled or (len(tally) + 1) * batch > max(most, LEAST_BATCHES * batch):
            break
    low, high, error = _ends(tally)
    mean = np.mean([t[0] for t in tally], axis=0)
    # A batch's own variance, and that of the batches' means.
    square = np.mean([t[1] for t in tally], axis=0)
    deviation = np.sqrt(np.maximum(square - mean**2, 0.0))
    return Spread(mean, deviation, low, high, error, coverage, len(tally) * batch, settled,
                  np.concatenate(kept))


def coverage_interval(
    results: Real, coverage: float = COVERAGE, interval: Interval = "symmetric"
) -> tuple[Real, Real]:
    """Ends (k,) of the interval that holds the share `coverage` of the draws (B, k).

    Source: JCGM 101:2008, 7.7.

    >>> coverage_interval(np.arange(100.0)[:, None], 0.9)
    (array([4.5]), array([94.5]))
    """
    if interval == "symmetric":
        tail = (1 - coverage) / 2
        low, high = np.quantile(results, [tail, 1 - tail], axis=0, method="hazen")
        return low, high
    ranked = np.sort(results, axis=0)
    held = round(coverage * len(ranked))
    widths = ranked[held:] - ranked[:-held]
    start = widths.argmin(axis=0)
    columns = np.arange(ranked.shape[1])
    return ranked[start, columns], ranked[start + held, columns]


def _ends(tally: Sequence[tuple[Real, ...]]) -> tuple[Real, Real, Real]:
    """Ends of the intervals over the batches, and the error of the worse one."""
    ends = np.array([t[2:] for t in tally])
    scatter = ends.std(axis=0, ddof=1) if len(tally) > 1 else np.full(ends.shape[1:], np.inf)
    low, high = ends.mean(axis=0)
    return low, high, 2 * scatter.max(axis=0) / math.sqrt(len(tally))


def _batches(
    inputs: Sequence[Input], batch: int, correlation: ArrayLike | None, seed: int
) -> Iterator[Real]:
    from scipy.stats import qmc

    root = None if correlation is None else _root(correlation, len(inputs))
    seeds = np.random.default_rng(seed)
    while True:
        points = qmc.Sobol(len(inputs), seed=seeds.spawn(1)[0]).random_base2(batch.bit_length() - 1)
        yield _valued(inputs, points, root)


def _valued(inputs: Sequence[Input], points: Real, root: Real | None) -> Real:
    """Values of the inputs (B, d) at points of the unit cube, correlated through normal scores."""
    if root is not None:
        from scipy.special import ndtr, ndtri

        points = ndtr(ndtri(np.clip(points, _EDGE, 1 - _EDGE)) @ root.T)
    points = np.clip(points, _EDGE, 1 - _EDGE)
    return np.column_stack([i.distribution.ppf(points[:, k]) for k, i in enumerate(inputs)])


def _root(correlation: ArrayLike, size: int) -> Real:
    matrix = np.asarray(correlation, dtype=float)
    try:
        if matrix.shape != (size, size) or np.any(np.diag(matrix) != 1):
            raise np.linalg.LinAlgError
        return np.linalg.cholesky(matrix)
    except np.linalg.LinAlgError:
        raise Refused("correlation", f"must be a positive definite matrix of {size} × {size} with "
                      "1 on its diagonal", given=matrix.shape) from None


def _refuse(inputs: Sequence[Input], coverage: float, stable: float, batch: int) -> None:
    mistakes = []
    if not inputs:
        mistakes.append(Mistake("spread", "needs at least one input that is not known exactly"))
    if not 0 < coverage < 1:
        mistakes.append(Mistake("coverage", "must be above 0 and below 1", f"{coverage:g}"))
    if not stable > 0:
        mistakes.append(Mistake("stable", "must be above 0", f"{stable:g}"))
    if batch < 2 or batch & (batch - 1):
        mistakes.append(Mistake("batch", "must be a power of 2", str(batch)))
    if mistakes:
        raise Refused.all_of(mistakes)


@dataclass(frozen=True, eq=False)
class Sensitivity:
    """Shares of each result's variance, (k, d) [1], of inputs called `names`.

    `first` is what vanishes when that input alone becomes known, `total` what stays when all
    others are known.
    """

    names: tuple[str, ...]
    first: Real
    total: Real

    def ranked(self, result: int = 0) -> tuple[tuple[str, float, float], ...]:
        """(name, first, total) of one result, the input to pin down first at the top."""
        rows = zip(self.names, self.first[result], self.total[result], strict=True)
        return tuple(sorted(((n, float(f), float(t)) for n, f, t in rows), key=lambda r: -r[2]))


def sensitivity(
    model: Model, inputs: Sequence[Input], *, points: int = 1024, seed: int = 1
) -> Sensitivity:
    """First-order and total indices of every result for every (independent) input.

    Parameters
    ----------
    model : vectorised, from (B, d) to (B, k)
    points : of each of the two samples, a power of 2; the model is asked (d + 2) × points times

    A result that does not vary has indices of 0. Raises `Refused`. Source: Saltelli et al.,
    Computer Physics Communications 181 (2010) 259; the first and total estimators named there.
    """
    from scipy.stats import qmc, sobol_indices

    _refuse(inputs, COVERAGE, STABLE, points)
    d = len(inputs)
    generator = np.random.default_rng(seed)
    both = qmc.Sobol(2 * d, seed=generator).random_base2(points.bit_length() - 1)
    a, b = (_valued(inputs, half, None) for half in (both[:, :d], both[:, d:]))
    mixed = np.repeat(a[None], d, axis=0)
    for k in range(d):
        mixed[k, :, k] = b[:, k]
    found = [np.asarray(model(x), dtype=float).T for x in (a, b, mixed.reshape(-1, d))]
    varies = np.ptp(found[0], axis=1) > 1e-12 * np.abs(found[0]).max(axis=1)
    first, total = np.zeros((2, len(varies), d))
    if varies.any():
        f_a, f_b, f_ab = (f[varies] for f in found)
        indices = sobol_indices(
            func={"f_A": f_a, "f_B": f_b,
                  "f_AB": f_ab.reshape(len(f_a), d, points).swapaxes(0, 1)}, n=points)
        first[varies], total[varies] = indices.first_order, indices.total_order
    return Sensitivity(tuple(i.name for i in inputs), first, total)
