"""A log of residual or protective-conductor current: how high, how long, which steps, and when."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from ..errors import Refused
from .standing import Real

PERCENTILES = (1, 5, 25, 50, 75, 95, 99)
GAP = 5.0  # median intervals: a longer one is a gap, over which nothing is known
SETTLED = 5  # samples on each side of a step, whose medians are compared


@dataclass(frozen=True, eq=False)
class Log:
    """Samples in order of time.

    Parameters
    ----------
    seconds : of each, since 1970-01-01 UTC (n,), rising
    current : RMS (n,) [A]; infinite where the instrument was over its range
    hours : hour of the day of each on the site's clock (n,), 0 to below 24
    zone : whose clock that is, in words
    """

    seconds: Real
    current: Real
    hours: Real
    zone: str

    def __post_init__(self) -> None:
        if len(self.seconds) < 2 or not np.all(np.diff(self.seconds) > 0):
            raise Refused("log", "needs at least two samples, in rising order of time",
                          given=f"{len(self.seconds)} samples")


@dataclass(frozen=True)
class Step:
    """A load that seems to have been switched.

    Parameters
    ----------
    seconds : when, since 1970-01-01 UTC
    hour : of the day, on the site's clock
    size : of the change [A], above 0 when the current rose
    """

    seconds: float
    hour: float
    size: float


@dataclass(frozen=True, eq=False)
class History:
    """What a log says.

    Parameters
    ----------
    log : as given
    percentiles : of the time that was recorded, by per cent [A]
    recorded, above : time recorded, and of it above `limit` [s]
    limit : the device's non-operating current [A]
    longest_above : longest stretch without a sample below it [s]
    gaps : stretches with nothing recorded, and their sum is `missing` [s]
    over_range : samples over the instrument's range; they count as above
    steps : in order of time
    above_by_hour : time above, by hour of the day (24,) [s]
    steps_by_hour : how many steps, by hour of the day (24,)
    """

    log: Log
    percentiles: dict[int, float]
    recorded: float
    above: float
    limit: float
    longest_above: float
    gaps: int
    missing: float
    over_range: int
    steps: tuple[Step, ...]
    above_by_hour: Real
    steps_by_hour: NDArray[np.int64]


def history(log: Log, *, limit: float, step: float | None = None) -> History:
    """Read a log against a limit [A].

    Each sample stands until the next, but not over a gap. `step` is the least change [A] that
    counts as a switching; where it is None, ten times the usual scatter between samples, and at
    least 2 % of the limit.
    """
    interval = np.diff(log.seconds)
    usual = float(np.median(interval))
    is_gap = interval > GAP * usual
    held = np.append(np.where(is_gap, usual, interval), usual)
    high = log.current > limit
    found = _steps(log, _least_step(log, limit) if step is None else step)
    hour = log.hours.astype(int) % 24
    return History(
        log, _percentiles(log.current, held), float(held.sum()), float(held[high].sum()), limit,
        _longest(high, held, is_gap), int(is_gap.sum()), float((interval - usual)[is_gap].sum()),
        int(np.isinf(log.current).sum()), found,
        np.asarray(np.bincount(hour, weights=held * high, minlength=24), dtype=float),
        np.bincount([int(s.hour) for s in found], minlength=24))


def _percentiles(current: Real, held: Real) -> dict[int, float]:
    order = np.argsort(current, kind="stable")
    share = 100 * np.cumsum(held[order]) / held.sum()
    at = np.minimum(np.searchsorted(share, PERCENTILES), len(order) - 1)
    return {p: float(current[order[i]]) for p, i in zip(PERCENTILES, at, strict=True)}


def _longest(high: NDArray[np.bool_], held: Real, is_gap: NDArray[np.bool_]) -> float:
    """The longest time of samples that are all high, with no gap between them."""
    starts = np.flatnonzero(np.append(True, (high[1:] != high[:-1]) | is_gap))
    times = np.add.reduceat(held, starts)
    return float(times[high[starts]].max(initial=0.0))


def _least_step(log: Log, limit: float) -> float:
    change = np.abs(np.diff(log.current[np.isfinite(log.current)]))
    scatter = float(np.median(change)) if len(change) else 0.0
    return max(10 * scatter, 0.02 * limit)


def _steps(log: Log, least: float) -> tuple[Step, ...]:
    """Where the median of the next samples differs from that of the last, and most just there."""
    n = SETTLED
    if len(log.current) < 2 * n or not math.isfinite(least):
        return ()
    top = log.current[np.isfinite(log.current)].max(initial=0.0)
    level = np.median(np.lib.stride_tricks.sliding_window_view(
        np.minimum(log.current, top), n), axis=1)
    change = np.zeros(len(log.current))
    change[n:len(level)] = level[n:] - level[:-n]
    # The median changes over most of a window; the step is where the samples themselves jump.
    jump = np.abs(np.diff(np.minimum(log.current, top), prepend=log.current[0]))
    found: list[Step] = []
    for start, end in (*_stretches(change > least), *_stretches(change < -least)):
        at = start + int(np.argmax(jump[start:end]))
        most = start + int(np.argmax(np.abs(change[start:end])))
        found.append(Step(float(log.seconds[at]), float(log.hours[at]), float(change[most])))
    return tuple(sorted(found, key=lambda s: s.seconds))


def _stretches(holds: NDArray[np.bool_]) -> list[tuple[int, int]]:
    edges = np.flatnonzero(np.diff(holds.astype(np.int8), prepend=0, append=0))
    return [(int(a), int(b)) for a, b in edges.reshape(-1, 2)]
