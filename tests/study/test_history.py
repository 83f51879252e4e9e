"""Logs made by hand, whose times, steps and hours are known."""

from __future__ import annotations

import math

import numpy as np
import pytest

from unlanded.errors import Refused
from unlanded.study.history import Log, history

LIMIT = 15e-3


def log(current, *, seconds=None, hours=None):
    current = np.asarray(current, dtype=float)
    seconds = np.arange(len(current)) * 60.0 if seconds is None else np.asarray(seconds)
    hours = (seconds / 3600) % 24 if hours is None else np.asarray(hours)
    return Log(seconds, current, hours, "UTC")


def test_time_above_and_its_longest_stretch():
    current = np.full(100, 8e-3)
    current[10:14] = 20e-3
    current[50:57] = 16e-3
    found = history(log(current), limit=LIMIT)
    assert found.recorded == pytest.approx(6000, rel=1e-12, abs=0)
    assert found.above == pytest.approx(11 * 60, rel=1e-12, abs=0)
    assert found.longest_above == pytest.approx(7 * 60, rel=1e-12, abs=0)


def test_percentiles_of_time_are_numpys_on_even_samples():
    draw = np.random.default_rng(3)
    current = draw.gamma(4.0, 2e-3, 999)
    found = history(log(current), limit=LIMIT).percentiles
    for per_cent, value in found.items():
        assert value == pytest.approx(
            np.percentile(current, per_cent, method="inverted_cdf"), rel=1e-12, abs=0)


def test_a_sample_stands_until_the_next():
    # 10 min at 20 mA, then 30 min at 5 mA, of which a sample each minute.
    seconds = np.concatenate([[0.0], 600 + np.arange(31) * 300.0])
    current = np.concatenate([[20e-3], np.full(31, 5e-3)])
    found = history(log(current, seconds=seconds), limit=LIMIT)
    assert found.above == pytest.approx(600, rel=1e-12, abs=0)


def test_a_gap_is_not_filled():
    seconds = np.concatenate([np.arange(50) * 60.0, 86400 + np.arange(50) * 60.0])
    found = history(log(np.full(100, 20e-3), seconds=seconds), limit=LIMIT)
    assert found.gaps == 1
    assert found.recorded == pytest.approx(6000, rel=1e-12, abs=0)
    assert found.missing == pytest.approx(86400 - 50 * 60, rel=1e-12, abs=0)
    assert found.longest_above == pytest.approx(3000, rel=1e-12, abs=0)


@pytest.mark.parametrize("noise", [0.0, 20e-6])
def test_steps_are_found_where_and_as_large_as_they_are(noise):
    draw = np.random.default_rng(5)
    current = np.full(600, 6e-3) + noise * draw.standard_normal(600)
    current[100:] += 3e-3
    current[250:] -= 2e-3
    current[400:] += 1e-3
    steps = history(log(current), limit=LIMIT).steps
    assert [s.seconds / 60 for s in steps] == [100, 250, 400]
    for step, size in zip(steps, (3e-3, -2e-3, 1e-3), strict=True):
        assert step.size == pytest.approx(size, rel=1e-9 if noise == 0 else 0.05, abs=0)


def test_a_single_spike_is_no_switching():
    current = np.full(100, 6e-3)
    current[40] = 14e-3
    assert history(log(current), limit=LIMIT).steps == ()


def test_over_range_counts_as_above():
    current = np.full(100, 6e-3)
    current[30:33] = math.inf
    found = history(log(current), limit=LIMIT)
    assert found.over_range == 3
    assert found.above == pytest.approx(180, rel=1e-12, abs=0)
    assert found.percentiles[50] == pytest.approx(6e-3, rel=1e-12, abs=0)


def test_hours_in_which_it_clusters():
    seconds = np.arange(0, 86400 * 3, 300.0)
    hours = (seconds / 3600) % 24
    current = np.where((hours >= 9) & (hours < 10), 18e-3, 6e-3)
    found = history(log(current, seconds=seconds), limit=LIMIT)
    assert np.flatnonzero(found.above_by_hour).tolist() == [9]
    assert found.above_by_hour[9] == pytest.approx(3 * 3600, rel=1e-12, abs=0)
    assert np.flatnonzero(found.steps_by_hour).tolist() == [9, 10]
    assert found.steps_by_hour[[9, 10]].tolist() == [3, 3]


def test_refuses_less_than_two_samples_or_disorder():
    with pytest.raises(Refused, match="at least two samples"):
        log([1e-3])
    with pytest.raises(Refused, match="rising order"):
        log([1e-3, 1e-3], seconds=[60.0, 60.0])
