"""Preferred values of resistors and capacitors, and the ratings they are sold in."""

from __future__ import annotations

import math
from collections.abc import Mapping
from typing import Literal

from ..errors import Refused
from .records import Source

Series = Literal["E6", "E12", "E24", "E48", "E96", "E192"]

IEC_60063 = Source("IEC 60063, preferred number series", "from memory")

# E24 and below were fixed before the rule of rounding and do not follow it.
_E24 = (1.0, 1.1, 1.2, 1.3, 1.5, 1.6, 1.8, 2.0, 2.2, 2.4, 2.7, 3.0,
        3.3, 3.6, 3.9, 4.3, 4.7, 5.1, 5.6, 6.2, 6.8, 7.5, 8.2, 9.1)
# The one value of E192 that the standard prints other than its own rounding, 9.19.
_EXCEPTION = {9.19: 9.20}

RATINGS_SOURCE = Source("ratings that wire-wound and film resistors are sold in; used at half",
                        "common practice")
POWER_RATINGS = (0.25, 0.5, 1.0, 2.0, 3.0, 5.0, 7.0, 10.0, 15.0, 25.0, 50.0, 100.0, 200.0)  # W
DERATING = 0.5  # of the rating: a resistor in a closed panel
VOLTAGE_RATINGS = (50.0, 100.0, 200.0, 250.0, 350.0, 500.0, 750.0, 1000.0, 1500.0, 2500.0)  # V


def _rounded(count: int) -> tuple[float, ...]:
    values = (round(10 ** (k / count), 2) for k in range(count))
    return tuple(_EXCEPTION.get(v, v) for v in values)


SERIES: Mapping[str, tuple[float, ...]] = {
    "E6": _E24[::4], "E12": _E24[::2], "E24": _E24,
    **{f"E{count}": _rounded(count) for count in (48, 96, 192)},
}


def preferred(value: float, series: Series = "E12", *, down: bool = True) -> float:
    """The preferred value next to `value`: the largest not above it, or the smallest not below.

    Source: IEC 60063.

    >>> preferred(10.8e3), preferred(10.8e3, down=False), preferred(10.8e3, "E96")
    (10000.0, 12000.0, 10700.0)
    """
    if not (value > 0 and math.isfinite(value)):
        raise Refused("preferred value", "is of a number above 0", given=f"{value:g}")
    decade = math.floor(math.log10(value))
    steps = [float(f"{m * 10.0**p:.4g}") for p in (decade - 1, decade, decade + 1)
             for m in SERIES[series]]
    slack = 1e-9 * value
    return (max(s for s in steps if s <= value + slack) if down
            else min(s for s in steps if s >= value - slack))


def rating(need: float, ratings: tuple[float, ...] = POWER_RATINGS) -> float:
    """The smallest rating that is at least `need`; infinite where none is.

    >>> rating(8.2), rating(325.0, VOLTAGE_RATINGS)
    (10.0, 350.0)
    """
    return next((r for r in ratings if r >= need), math.inf)
