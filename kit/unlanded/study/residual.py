"""Margin of a residual-current device: its standing current against what may and must trip it.

The chance of a trip is the mean, over the draws of the standing current, of the chance that a
device of its kind trips at that current. It is of one moment taken at random, not of a week.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, replace
from functools import lru_cache

import numpy as np

from ..errors import Refused
from ..reference.devices import Device
from ..reference.limits import STANDING_SHARE
from .run import Run
from .standing import Bank, Complex, Leak, Real, bank, drawn
from .supply import Supply

REPLICATES = 8  # independent scrambles, whose spread is the estimated error
POINTS = 1024  # of each, a power of 2
FEWER = 128  # where many margins are only compared
CREDIBLE = (2.5, 97.5)  # per cent of the draws


@dataclass(frozen=True)
class Share:
    """What one leak brings to the standing current [A].

    Parameters
    ----------
    arithmetic : all its pieces on, added as numbers
    expected : mean of its magnitude over the draws
    along : mean of its part in the direction of the total; these add up to nearly the total
    """

    name: str
    arithmetic: float
    expected: float
    along: float


@dataclass(frozen=True, eq=False)
class Margin:
    """The standing current behind a device, and how far that is from a trip.

    Parameters
    ----------
    device, supply, leaks : as given
    fundamental : draws at the supply's frequency (n,) RMS [A]
    rest : all other frequencies together, weighted (n,) [A]
    shares : of each leak, in their order
    arithmetic : every piece on and added as numbers [A]
    chance, chance_error : that it trips at a moment taken at random, and its standard error [1]
    chance_all_on : the same with every piece on
    """

    device: Device
    supply: Supply
    leaks: tuple[Leak, ...]
    fundamental: Complex
    rest: Real
    shares: tuple[Share, ...]
    arithmetic: float
    chance: float
    chance_error: float
    chance_all_on: float

    @property
    def draws(self) -> Real:
        """Residual current as the device counts it (n,) [A]."""
        return self.with_added(0j)

    @property
    def expected(self) -> float:
        """Mean of the standing current [A]."""
        return float(self.draws.mean())

    @property
    def credible(self) -> tuple[float, float]:
        """What 2.5 % of the draws stay below, and 2.5 % exceed: the worst credible [A]."""
        low, high = np.percentile(self.draws, CREDIBLE)
        return float(low), float(high)

    @property
    def recommended(self) -> float:
        """Most that should stand behind it by BS 7671 and IEC 60364-5-53 [A]; NaN for others."""
        return recommended_current(self.device)

    def to(self, limit: float) -> tuple[float, float]:
        """Margin to a limit [A]: expected, and worst credible; below 0 when it is exceeded."""
        return limit - self.expected, limit - self.credible[1]

    def with_added(self, current: complex) -> Real:
        """Draws with a phasor [A] of the supply's frequency added (n,) [A]."""
        weight = self.device.weight(self.supply.frequency)
        return np.asarray(np.hypot(weight * np.abs(self.fundamental + current), self.rest))


def recommended_current(device: Device) -> float:
    """30 % of the rated current [A] for the kinds that the rule is about, NaN for others.

    >>> round(recommended_current(Device(30e-3)) * 1e3, 9)
    9.0
    """
    ruled = device.kind in ("general", "delayed")
    return STANDING_SHARE.likely * device.rated if ruled else math.nan


def residual_margin(
    device: Device, leaks: Sequence[Leak], supply: Supply, *, seed: int = 1, points: int = POINTS
) -> Margin:
    """The margin of `device` with `leaks` behind it; the same seed gives the same numbers.

    `points`, a power of 2, are drawn in each of eight sets.

    >>> from unlanded.study.standing import resistive_leak
    >>> supply = Supply(230.0, 50.0)
    >>> damp = resistive_leak("damp insulation", 10e3, supply, line="L")
    >>> found = residual_margin(Device(30e-3), [damp], supply)
    >>> round(found.expected * 1e3, 9), round(found.chance, 4)  # (23 − 15)²… of the triangle
    (23.0, 0.6111)
    """
    if not leaks:
        raise Refused("standing current", "nothing stands behind the device")
    rows = bank(leaks, supply)
    sets = point_sets(rows.dimensions, seed=seed, points=points)
    phasors, pieces = drawn(rows, sets.reshape(-1, rows.dimensions))
    total = phasors.sum(axis=2)
    rest = _rest(rows, leaks, total, pieces, device, supply)
    found = Margin(device, supply, tuple(leaks), total[0], rest,
                   _shares(rows, leaks, phasors[0]), float(rows.arithmetic.sum()),
                   math.nan, math.nan, math.nan)
    by_set = device.band.chance(found.draws).reshape(len(sets), -1).mean(axis=1)
    busy = found if all(leak.use == 1 for leak in leaks) else None
    return replace(
        found, chance=float(by_set.mean()),
        chance_error=float(by_set.std(ddof=1) / math.sqrt(len(sets))),
        chance_all_on=float(by_set.mean()) if busy else residual_margin(
            device, [leak.all_on() for leak in leaks], supply, seed=seed, points=points).chance)


@lru_cache(maxsize=8)
def point_sets(dimensions: int, *, seed: int, points: int) -> Real:
    """Independently scrambled Sobol' points (REPLICATES, points, dimensions), not to be written to.

    They are kept: making them takes longer than all else that a margin needs.
    """
    from scipy.stats import qmc

    generator = np.random.default_rng(seed)
    power = points.bit_length() - 1
    made = np.stack([qmc.Sobol(dimensions, seed=generator).random_base2(power)
                     for _ in range(REPLICATES)])
    made.setflags(write=False)
    return made


def added_pieces(margin: Margin, leak: str, extra: Sequence[int]) -> tuple[Margin, ...]:
    """The margin with so many pieces more of the leak of that name."""
    if leak not in [known.name for known in margin.leaks]:
        raise Refused("leak", "is not behind this device", given=leak)
    return tuple(
        residual_margin(margin.device, [
            replace(known, count=known.count + more) if known.name == leak else known
            for known in margin.leaks], margin.supply, points=FEWER)
        for more in extra)


def most_pieces(margin: Margin, leak: str, limit: float, *, most: int = 1000) -> int:
    """How many pieces of a leak may stand there, the worst credible current within `limit` [A].

    The count is of all its pieces, those there now included; -1 where even none is too many, and
    `most` where that many still fit.
    """
    now = next(k.count for k in margin.leaks if k.name == leak)
    low, high = -1, most + 1
    while high - low > 1:
        middle = (low + high) // 2
        (tried,) = added_pieces(margin, leak, [middle - now])
        low, high = (middle, high) if tried.credible[1] <= limit else (low, middle)
    return low


def longest_run(run: Run, limit: float, *, others: complex = 0j) -> float:
    """Length [m] at which the run's own residual and `others` [A] together reach `limit` [A].

    The residual current is taken as proportional to length, which holds while the run is short
    against a wavelength. 0 where the others reach the limit alone, infinite where the run leaks
    nothing.
    """
    return _reach(others, run.residual / run.length, limit)


def _reach(start: complex, step: complex, limit: float) -> float:
    """The x ≥ 0 at which |start + x·step| = limit."""
    if abs(start) >= limit:
        return 0.0
    if step == 0:
        return math.inf
    along = (start * step.conjugate()).real / abs(step)
    return (math.sqrt(along**2 + limit**2 - abs(start) ** 2) - along) / abs(step)


def _rest(
    rows: Bank, leaks: Sequence[Leak], total: Complex, pieces: Real, device: Device,
    supply: Supply,
) -> Real:
    """Harmonics above the first, and what is not the supply's, as the device counts them (n,)."""
    weights = np.array([device.weight(n * supply.frequency) for n in rows.orders[1:]])
    square = ((weights[:, None] * np.abs(total[1:])) ** 2).sum(axis=0)
    for i, leak in enumerate(leaks):
        if leak.fast:
            heaviest = max(device.weight(f) for f in leak.band)
            here = rows.owner == i
            square = square + (heaviest * (pieces[:, here] @ rows.fast[here])) ** 2
    return np.asarray(np.sqrt(square))


def _shares(rows: Bank, leaks: Sequence[Leak], phasors: Complex) -> tuple[Share, ...]:
    total = phasors.sum(axis=1)
    size = np.maximum(np.abs(total), 1e-300)
    found = []
    for i, leak in enumerate(leaks):
        here = rows.owner == i
        own = phasors[:, here].sum(axis=1)
        along = (own * total.conjugate()).real / size
        found.append(Share(leak.name, float(rows.arithmetic[here].sum()),
                           float(np.abs(own).mean()), float(along.mean())))
    return tuple(found)
