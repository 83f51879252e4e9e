"""Readings as intervals of voltage."""

from __future__ import annotations

import math

import pytest

from example_causes import FAR, seen
from unlanded.errors import Refused
from unlanded.reference.instruments import INSTRUMENTS
from unlanded.study.observation import observe


def test_the_last_digit_written_is_the_resolution() -> None:
    coarse, fine = seen("digital-10M", "37 V"), seen("digital-10M", "37.0 V")
    assert (coarse.low, coarse.high) == (36.5, 37.5)
    assert fine.high - fine.low == pytest.approx(0.1, rel=1e-9, abs=0)


def test_a_prefix_moves_the_last_digit() -> None:
    seen_mv = seen("digital-10M", "105.2 mV")
    assert seen_mv.high - seen_mv.low == pytest.approx(1e-4, rel=1e-6, abs=0)


def test_a_displayed_zero_is_an_interval_that_begins_nowhere() -> None:
    zero = seen("digital-10M", "0.0 V")
    assert zero.low == -math.inf
    assert zero.high == pytest.approx(0.05, rel=1e-9, abs=0)
    assert zero.value == 0.0


def test_over_range_and_lamps_are_open_intervals() -> None:
    assert (seen("digital-10M", "OL").low, seen("digital-10M", "OL").high) == (1000.0, math.inf)
    assert seen("coil-tester", "lit").low == 90.0
    assert seen("coil-tester", "not lit").high == 90.0


def test_a_scale_is_read_no_finer_than_its_division_allows() -> None:
    scale = seen("moving-coil", "105 V")
    assert scale.high - scale.low == pytest.approx(2.5, rel=1e-9, abs=0)
    assert scale.burden.resistance == 9e3 * 250.0


@pytest.mark.parametrize(("tool", "text"), [
    ("digital-10M", "lit"), ("coil-tester", "12 V"), ("body", "1 V"),
])
def test_what_an_instrument_cannot_show_is_refused(tool: str, text: str) -> None:
    with pytest.raises(Refused, match="cannot show this"):
        seen(tool, text)


def test_negative_readings_unknown_actions_and_no_resistance_are_refused() -> None:
    with pytest.raises(Refused, match="at least 0 V"):
        seen("digital-10M", "-3 V")
    with pytest.raises(Refused, match='did you mean "loads off"'):
        observe(INSTRUMENTS["digital-10M"], FAR, "3 V",
                actions=frozenset({"load off"}))  # type: ignore[arg-type]
    with pytest.raises(Refused, match="above 0 Ω"):
        seen("digital-10M", "3 V", resistor=0.0)
