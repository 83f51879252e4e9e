"""How likely a display is, given the voltage across the instrument.

A display stands for an interval of voltage; an instrument errs within its accuracy statement, now
and then wider, and now and then a value is misread or taken at the wrong point. The chance of the
interval is the sum over the three. One misread value therefore weighs little against the rest.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from ..reference.records import Source, Value
from .observation import Observation

Real = NDArray[np.float64]

_JUDGED = Source("how readings on site err", "judgement")
WIDE_SHARE = Value(0.05, "", _JUDGED)  # readings whose error is that of a statement 4 times as wide
WIDENING = Value(4.0, "", _JUDGED)
MISREAD_SHARE = Value(0.05, "", _JUDGED)
FALSE_LIGHT_SHARE = Value(0.30, "", Source("non-contact detectors on neighbouring fields",
                                           "judgement"))
LOWEST_VOLTAGE = 0.01  # volts, of the reference
LEAST_CHANCE = 1e-6


def error_chance(error: ArrayLike, half_width: ArrayLike) -> Real:
    """Chance that an instrument's error [V] is below `error`, given its statement ± half_width.

    Half of it is rectangular, half normal of the same standard deviation, half_width/√3: a
    statement is a limit, but not a guaranteed one. Shapes broadcast.

    >>> float(error_chance(0.0, 1.0)), round(float(error_chance(1.0, 1.0)), 4)  # (1 + Φ(√3)) / 2
    (0.5, 0.9792)
    """
    from scipy.special import ndtr

    share = np.asarray(error) / half_width
    flat = np.clip((share + 1) / 2, 0.0, 1.0)
    return np.asarray((flat + ndtr(share * math.sqrt(3))) / 2)


def reference_chance(low: float, high: float, *, top: float) -> float:
    """Chance of the interval [low, high) V when nothing is known but a highest voltage `top`.

    Half uniform over 0 to top, half uniform in the logarithm from 10 mV to top; at least 1e-6.

    >>> round(reference_chance(50.0, 100.0, top=200.0), 3)  # (0.25 + ln 2 / ln 20000) / 2
    0.16
    """
    a, b = (min(max(v, 0.0), top) for v in (low, high))
    decades = math.log(top / LOWEST_VOLTAGE)
    steps = math.log(max(b, LOWEST_VOLTAGE) / max(a, LOWEST_VOLTAGE)) / decades
    return max(((b - a) / top + steps) / 2, LEAST_CHANCE)


@dataclass(frozen=True, eq=False)
class Likelihood:
    """Of K readings together; arrays (K, 1).

    Parameters
    ----------
    low, high : ends of each interval [V]
    half_width : of the accuracy statement [V], above 0
    reference : chance of the interval when nothing is known
    misread : share of readings that tell nothing; over `gain`, the chance that this one does
    """

    low: Real
    high: Real
    half_width: Real
    reference: Real
    misread: Real

    def gain(self, volts: Real) -> Real:
        """Chance of each display (K, Q) given the voltage across each instrument (K, Q) [V], over
        its chance when nothing is known [1]."""
        wide = WIDE_SHARE.likely
        fitting = ((1 - wide) * self._within(volts, self.half_width)
                   + wide * self._within(volts, WIDENING.likely * self.half_width))
        return np.asarray((1 - self.misread) * fitting / self.reference + self.misread)

    def _within(self, volts: Real, half_width: Real) -> Real:
        return error_chance(self.high - volts, half_width) - error_chance(
            self.low - volts, half_width)

    def misfit(self, volts: Real) -> Real:
        """How far each reading (K, Q) is off in standard deviations, 0 inside an open interval."""
        closed = np.isfinite(self.low) & np.isfinite(self.high)
        width = np.where(closed, self.high - self.low, 0.0)
        middle = np.where(closed, (self.low + self.high) / 2, np.clip(volts, self.low, self.high))
        return np.asarray((volts - middle) / np.sqrt(self.half_width**2 / 3 + width**2 / 12))


def likelihood(readings: Sequence[Observation], *, top: float) -> Likelihood:
    """Of these readings, on a run where no voltage above `top` [V] is thought of."""
    def column(values: list[float]) -> Real:
        return np.array(values)[:, None]

    low, high = column([r.low for r in readings]), column([r.high for r in readings])
    return Likelihood(
        low, high, column([_width(r) for r in readings]),
        column([reference_chance(r.low, r.high, top=top) for r in readings]),
        column([misread_share(r.instrument.kind) for r in readings]),
    )


def misread_share(kind: str) -> float:
    """Share of an instrument's readings that tell nothing, by its kind."""
    return FALSE_LIGHT_SHARE.likely if kind == "proximity" else MISREAD_SHARE.likely


def _width(reading: Observation) -> float:
    """Of the error; an instrument without a statement is taken to err by half its last digit."""
    step = reading.high - reading.low
    return max(reading.half_width, step / 2 if math.isfinite(step) else 0.0, 1e-6)
