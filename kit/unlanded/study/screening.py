"""The margin of many devices at once: each circuit's leak drawn, then summed behind its device."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from ..reference.devices import Device
from .residual import CREDIBLE, recommended_current
from .standing import Bank, Complex, Real, drawn

POINTS = 256  # draws of each device
ROWS = 8000  # circuits at once, which bounds the memory
SOBOL = 4000  # columns of quasi-random points; circuits beyond get plain random ones
COLUMNS = 4  # that one circuit needs


@dataclass(frozen=True, eq=False)
class Screened:
    """Devices as arrays, in the order given (devices,).

    Parameters
    ----------
    expected, worst : mean and 97.5 % of the draws [A]
    chance : of a trip at a moment taken at random [1]
    non_operating, recommended : limits [A]; NaN where no share is recommended
    """

    expected: Real
    worst: Real
    chance: Real
    non_operating: Real
    recommended: Real

    @property
    def ranking(self) -> NDArray[np.int64]:
        """Devices from the most to the least pressing: by chance, then by what margin is left."""
        left = (self.non_operating - self.worst) / self.non_operating
        return np.lexsort((left, -self.chance))


def screen(
    devices: Sequence[Device],
    circuits: Bank,
    fixed: Complex,
    *,
    seed: int = 1,
    progress: Callable[[int], object] = lambda _: None,
) -> Screened:
    """Margins of `devices`.

    Parameters
    ----------
    circuits : rows with something to draw, `owner` the number of their device, rising
    fixed : phasor of all that is certain behind each device (devices,) [A]
    progress : told how many devices are done since it was last told
    """
    count = len(devices)
    expected, worst, chance = np.abs(fixed), np.abs(fixed), np.zeros(count)
    points = _points(circuits, seed)
    for first, last in _chunks(circuits.owner, count):
        rows = slice(*np.searchsorted(circuits.owner, [first, last]))
        total = fixed[first:last] + _sums(_part(circuits, rows), first, last, points)
        size = np.abs(total)
        expected[first:last] = size.mean(axis=0)
        worst[first:last] = np.percentile(size, CREDIBLE[1], axis=0)
        for k in range(first, last):
            chance[k] = devices[k].band.chance(size[:, k - first]).mean()
        progress(last - first)
    return Screened(expected, worst, chance, np.array([d.non_operating for d in devices]),
                    np.array([recommended_current(d) for d in devices]))


def ranks(owner: NDArray[np.int64]) -> NDArray[np.int64]:
    """Place of each row among those of its owner, from 0; owners rise.

    >>> ranks(np.array([0, 0, 2, 2, 2]))
    array([0, 1, 0, 1, 2])
    """
    first = np.searchsorted(owner, owner)
    return np.asarray(np.arange(len(owner)) - first)


def _chunks(owner: NDArray[np.int64], count: int) -> Iterator[tuple[int, int]]:
    """Devices first to last whose circuits together are few enough, one device at least."""
    ends = np.searchsorted(owner, np.arange(count), side="right")
    first = 0
    while first < count:
        start = ends[first - 1] if first else 0
        last = max(first + 1, int(np.searchsorted(ends, start + ROWS, side="right")))
        yield first, min(last, count)
        first = last


def _part(circuits: Bank, rows: slice) -> Bank:
    return replace(
        circuits, phasors=circuits.phasors[:, rows], fast=circuits.fast[rows],
        low=circuits.low[rows], high=circuits.high[rows], free_angle=circuits.free_angle[rows],
        free_line=circuits.free_line[rows], count=circuits.count[rows], use=circuits.use[rows],
        columns=circuits.columns[rows], owner=circuits.owner[rows])


def _sums(part: Bank, first: int, last: int, points: Real) -> Complex:
    """Phasors behind devices first to last (POINTS, devices) [A]."""
    total = np.zeros((len(points), last - first), dtype=complex)
    if len(part.owner):
        phasors, _ = drawn(part, points)
        starts = np.flatnonzero(np.diff(part.owner, prepend=-1))
        total[:, part.owner[starts] - first] = np.add.reduceat(phasors[0], starts, axis=1)
    return total


def _points(circuits: Bank, seed: int) -> Real:
    """Points shared by all devices: each of a device's circuits has columns of its own."""
    from scipy.stats import qmc

    generator = np.random.default_rng(seed)
    quasi = min(circuits.dimensions, SOBOL)
    power = int(math.log2(POINTS))
    points = qmc.Sobol(quasi, seed=generator).random_base2(power)
    plain = generator.random((POINTS, circuits.dimensions - quasi))
    return np.hstack([points, plain])
