"""The margin and the log of a case, as the study has them."""

from __future__ import annotations

import pytest

from case_text import PAIR, SITES
from unlanded.case.build import build_run
from unlanded.case.loading import load_case, read_case
from unlanded.case.standing import THE_RUN, case_history, case_leaks, case_margin
from unlanded.errors import Refused


@pytest.fixture(scope="module")
def house():
    case = load_case(SITES / "heron-house.toml")
    return case, [build_run(case, limit) for limit in ("likely", "low", "high")]


def test_the_run_comes_first_then_what_the_case_lists(house):
    case, runs = house
    names = [leak.name for leak in case_leaks(case, *runs)]
    assert names == [THE_RUN, *(entry.name for entry in case.content.standing)]


def test_the_demo_trips_now_and_then_but_seldom(house):
    case, runs = house
    margin = case_margin(case, *runs)
    assert margin.recommended < margin.expected < margin.device.non_operating < margin.credible[1]
    assert 1e-4 < margin.chance < 0.05


def test_the_demo_log_says_what_was_put_into_it(house):
    case, runs = house
    found, intake = case_history(case, case_margin(case, *runs))
    assert (intake.bad_rows, intake.repeated, intake.disordered) == (1, 1, 1)
    assert "low batt" in str(intake.bad[0])
    assert (found.gaps, found.over_range) == (1, 1)
    assert found.above_by_hour[:9].sum() == 0  # the desks are empty at night
    assert len(found.steps) > 10


def test_a_case_without_a_device_or_log():
    case = read_case(PAIR)
    runs = [build_run(case)] * 3
    with pytest.raises(Refused, match="has no residual-current device"):
        case_margin(case, *runs)
    with_device = read_case(PAIR + '[device]\nrated = "30 mA"\n')
    assert case_history(with_device, case_margin(with_device, *runs)) is None
