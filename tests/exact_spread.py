"""Exact distributions of worked examples, by quadrature and convolution, without draws."""

from __future__ import annotations

import itertools
import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from functools import cached_property, reduce

import numpy as np
from scipy import optimize, signal, special, stats
from scipy.interpolate import PchipInterpolator

Cumulative = Callable[[np.ndarray], np.ndarray]


@dataclass(frozen=True, eq=False)
class Exact:
    """A distribution by its cumulative chance at points `y` that leave next to nothing outside."""

    y: np.ndarray
    chance: np.ndarray

    @classmethod
    def of(cls, cumulative: Cumulative, low: float, high: float) -> Exact:
        y = np.linspace(low, high, 4001)
        return cls(y, cumulative(y))

    def moment(self, order: int, about: float = 0.0) -> float:
        middle = (self.y[1:] + self.y[:-1]) / 2 - about
        return float(np.diff(self.chance) @ middle**order)

    @property
    def mean(self) -> float:
        return self.moment(1)

    @property
    def deviation(self) -> float:
        return math.sqrt(self.moment(2, self.mean))

    def deviation_scatter(self, trials: float) -> float:
        """Standard error of the standard deviation of so many random trials."""
        excess = self.moment(4, self.mean) / self.deviation**4 - 1
        return self.deviation * math.sqrt(excess / (4 * trials))

    @staticmethod
    def share_scatter(p: float, trials: float) -> float:
        """Standard error of the share of so many random trials that lie within two fixed ends.

        Over the density there it is that of a width.
        """
        return math.sqrt(p * (1 - p) / trials)

    @cached_property
    def _between(self) -> PchipInterpolator:
        return PchipInterpolator(self.y, self.chance)

    def share(self, low: float, high: float) -> float:
        """What lies between two values."""
        return float(self._between(high) - self._between(low))

    def density(self, at: float) -> float:
        return float(self._between(at, 1))

    def shortest(self, p: float) -> tuple[float, float]:
        """Ends of the shortest interval that holds the share `p`."""
        kept = np.concatenate([[True], np.diff(self.chance) > 1e-13])
        quantile = PchipInterpolator(self.chance[kept], self.y[kept])
        found = optimize.minimize_scalar(
            lambda q: quantile(q + p) - quantile(q), method="bounded",
            bounds=(self.chance[0], 1 - p - 1e-9), options={"xatol": 1e-10})
        return float(quantile(found.x)), float(quantile(found.x + p))


def rectangles(halves: Sequence[float]) -> Cumulative:
    """Sum of rectangles about 0: Σ ± (y ± a₁ ± a₂ …)₊ⁿ / (n! 2ⁿ Π a), over all signs."""
    n = len(halves)

    def cumulative(y: np.ndarray) -> np.ndarray:
        total = sum(
            math.prod(signs) * np.maximum(y + np.dot(signs, halves), 0.0) ** n
            for signs in itertools.product((1, -1), repeat=n))
        return np.asarray(total / (math.factorial(n) * 2**n * math.prod(halves)))

    return cumulative


def mass(y: np.ndarray) -> np.ndarray:
    """JCGM 101, 9.3 [mg]: a normal about the buoyancy, averaged over the rectangles by Gauss."""
    x, w = np.polynomial.legendre.leggauss(16)
    few, v = np.polynomial.legendre.leggauss(4)
    apart = 1e5 * (1 / (8000 + 1000 * x[:, None]) - 1 / (8000 + 50 * few))
    shift = (0.1 * x[:, None, None] * apart).ravel()
    chance = (w[:, None, None] * w[:, None] * v).ravel() / 8
    scale = math.hypot(0.050, 0.020)
    return np.asarray(special.ndtr((y[:, None] - 1.234 - shift) / scale) @ chance)


def squares(x1: float, r: float) -> Cumulative:
    """JCGM 101, 9.4 [1e-6]: X₁² + X₂² in polar form, on axes along which they do not correlate.

    Without correlation it is scipy's noncentral χ² of two degrees of freedom.
    """
    along, across = 5e-3 * math.sqrt(1 + r), 5e-3 * math.sqrt(1 - r)
    middle = x1 / math.sqrt(2)
    angle, weight = np.polynomial.legendre.leggauss(400)
    sine, cosine = np.sin(angle * math.pi / 2), np.cos(angle * math.pi / 2)

    def cumulative(y: np.ndarray) -> np.ndarray:
        if r == 0:
            return np.asarray(stats.ncx2.cdf(1e-6 * y / along**2, 2, (x1 / along) ** 2))
        x, end = np.sqrt(1e-6 * y[:, None]) * sine, np.sqrt(1e-6 * y[:, None]) * cosine
        within = special.ndtr((end - middle) / along) - special.ndtr((-end - middle) / along)
        return np.asarray(stats.norm.pdf(x, middle, across) * end * within @ weight * math.pi / 2)

    return cumulative


def curved_trapezoid(x: np.ndarray, half: float, inexact: float) -> np.ndarray:
    """Cumulative chance of a rectangle whose half-width is itself uniform in ± `inexact`."""
    least, most = half - inexact, half + inexact
    size = np.clip(np.abs(x), 1e-300, most)
    flat = 0.5 - size * math.log(most / least) / (4 * inexact)
    curved = (most - size - size * np.log(most / size)) / (4 * inexact)
    beyond = np.where(size < least, flat, curved)
    return np.where(x < 0, beyond, 1 - beyond)


def gauge_block() -> Exact:
    """JCGM 101, 9.5 [nm] about 838: the terms of the sum on one grid, convolved.

    The two products are averaged over the factor that is not left in the cumulative chance.
    """
    edges = np.arange(-600.05, 600.1, 0.1)
    length, x, w = 50e6, *np.polynomial.legendre.leggauss(16)
    hermite, v = np.polynomial.hermite_e.hermegauss(60)
    cyclic = 0.5 * np.cos((np.arange(60) + 0.5) * math.pi / 60)
    warmer = (-0.1 + 0.2 * hermite[:, None] + cyclic).ravel()
    chance = np.repeat(v / v.sum() / 60, 60)
    terms = [stats.t(18, 0, 25).cdf(edges), stats.t(24, 0, 6).cdf(edges),
             stats.t(5, 0, 4).cdf(edges), stats.t(8, 0, 7).cdf(edges)]
    terms.append(sum(p * curved_trapezoid(edges / (length * abs(t)), 1e-6, 0.1e-6)
                     for t, p in zip(warmer, chance, strict=True)))
    terms.append(sum(p / 2 * curved_trapezoid(edges / (length * a), 0.050, 0.025)
                     for a, p in zip(11.5e-6 + 2e-6 * x, w, strict=True)))
    density = reduce(lambda a, b: signal.fftconvolve(a, b, mode="same"), map(np.diff, terms))
    return Exact(edges + 838, np.concatenate([[0.0], np.cumsum(density)]))
