"""Preferred values against the series of IEC 60063 (from memory)."""

from __future__ import annotations

import math

import pytest

from unlanded.errors import Refused
from unlanded.reference.preferred import POWER_RATINGS, SERIES, preferred, rating


@pytest.mark.parametrize(("series", "values"), [
    ("E6", "1 1.5 2.2 3.3 4.7 6.8"),
    ("E12", "1 1.2 1.5 1.8 2.2 2.7 3.3 3.9 4.7 5.6 6.8 8.2"),
    ("E48", "1 1.05 1.1 1.15 1.21 1.27 1.33 1.4 1.47 1.54 1.62 1.69 1.78 1.87 1.96 2.05 2.15 2.26 "
            "2.37 2.49 2.61 2.74 2.87 3.01 3.16 3.32 3.48 3.65 3.83 4.02 4.22 4.42 4.64 4.87 5.11 "
            "5.36 5.62 5.9 6.19 6.49 6.81 7.15 7.5 7.87 8.25 8.66 9.09 9.53"),
])
def test_series_as_printed(series: str, values: str) -> None:
    assert SERIES[series] == tuple(float(v) for v in values.split())


def test_numbers_of_values_and_the_exception() -> None:
    assert {k: len(v) for k, v in SERIES.items()} == {
        "E6": 6, "E12": 12, "E24": 24, "E48": 48, "E96": 96, "E192": 192}
    assert 9.20 in SERIES["E192"]
    assert 9.19 not in SERIES["E192"]
    assert set(SERIES["E48"]) < set(SERIES["E96"]) < set(SERIES["E192"])


@pytest.mark.parametrize("value", [1.0, 4.7e3, 9.99e5, 8.2e-9, 1e-6])
def test_neighbours_enclose_the_value(value: float) -> None:
    low, high = preferred(value), preferred(value, down=False)
    assert low <= value * (1 + 1e-9)
    assert high >= value * (1 - 1e-9)
    assert high / low < 1.26


def test_exact_values_stay() -> None:
    assert preferred(4700.0) == preferred(4700.0, down=False) == 4700.0
    assert preferred(9.5, down=False) == 10.0


def test_ratings() -> None:
    assert rating(0.25) == 0.25
    assert rating(0.2501) == 0.5
    assert math.isinf(rating(1.01 * POWER_RATINGS[-1]))


@pytest.mark.parametrize("value", [0.0, -1.0, math.inf])
def test_refusals(value: float) -> None:
    with pytest.raises(Refused, match="above 0"):
        preferred(value)
