"""The figures of the margin hold what the study found."""

from __future__ import annotations

from itertools import pairwise

import numpy as np
import pytest

from unlanded.reference.devices import Device
from unlanded.report.investigation import Investigation
from unlanded.report.margin import margin_of, trips_of
from unlanded.report.margin_figures import (
    added_figure,
    budget_figure,
    log_figure,
    per_cent,
    trip_time_figure,
)
from unlanded.study.history import Log, history
from unlanded.study.residual import added_pieces, residual_margin
from unlanded.study.standing import resistive_leak
from unlanded.study.supply import Supply

MAINS = Supply(230.0, 50.0)


def test_bars_of_the_budget_follow_one_another_up_to_the_total(house: Investigation) -> None:
    margin = margin_of(house)
    assert margin is not None
    figure = budget_figure(margin)
    band, *bars, whole = figure.bands
    assert tuple(band.x) == pytest.approx((15.0, 30.0), rel=1e-9, abs=0)
    for a, b in pairwise(bars):
        assert b.x[0] == pytest.approx(a.x[1], rel=1e-9, abs=0)
    assert whole.x[1] == pytest.approx(1e3 * margin.expected, rel=1e-9, abs=0)
    assert figure.points[0].x_high is not None
    assert figure.points[0].x_high[0] == pytest.approx(1e3 * margin.credible[1], rel=1e-9, abs=0)


def test_trip_time_marks_lie_on_the_limit(mill: Investigation) -> None:
    margin = margin_of(mill)
    assert margin is not None
    figure = trip_time_figure(margin, trips_of(mill))
    assert [note.text for note in figure.notes] == ["coil tester: will", next(
        n.text for n in figure.notes if n.text.startswith("low-impedance"))]
    for points in figure.points:
        assert points.y[0] == pytest.approx(
            (20 / points.x[0]) ** 1.43, rel=1e-9, abs=0)  # UL 943 (seen)


def test_a_delayed_device_has_two_curves() -> None:
    margin = residual_margin(Device(0.3, "delayed"), [resistive_leak("x", 1e4, MAINS, line="L")],
                             MAINS)
    figure = trip_time_figure(margin, [])
    longest, shortest = figure.lines
    assert np.all(longest.y > shortest.y)
    # IEC 61008-1 (seen): 0.5 to 0.15 s at most, 0.13 to 0.05 s at least.
    assert (longest.y.max(), longest.y.min()) == (0.5, 0.15)
    assert (shortest.y.max(), shortest.y.min()) == (0.13, 0.05)


def test_chance_rises_with_added_pieces() -> None:
    margin = residual_margin(Device(30e-3), [
        resistive_leak("x", 230 / 2e-3, MAINS, line="L", count=6, use=0.7)], MAINS)
    counts = [0, 4, 8]
    figure = added_figure("x", [(6 + n, m) for n, m in zip(
        counts, added_pieces(margin, "x", counts), strict=True)])
    busy, now = figure.lines
    assert now.x.tolist() == [6, 10, 14]
    assert np.all(np.diff(now.y) > 0)
    assert np.all(busy.y >= now.y)


def test_a_log_is_thinned_without_losing_its_extremes_and_open_at_gaps() -> None:
    draw = np.random.default_rng(2)
    seconds = np.concatenate([np.arange(20_000) * 10.0, 400_000 + np.arange(20_000) * 10.0])
    current = draw.gamma(5.0, 1e-3, 40_000)
    found = history(Log(seconds, current, (seconds / 3600) % 24, "UTC"), limit=15e-3)
    margin = residual_margin(Device(30e-3), [resistive_leak("x", 1e5, MAINS, line="L")], MAINS)
    figure = log_figure(found, margin)
    assert len(figure.lines) == 2
    assert sum(len(line.x) for line in figure.lines) < 1000
    assert max(line.y.max() for line in figure.lines) == pytest.approx(
        1e3 * current.max(), rel=1e-12, abs=0)
    assert min(band.low.min() for band in figure.bands[1:]) == pytest.approx(
        1e3 * current.min(), rel=1e-12, abs=0)


@pytest.mark.parametrize(
    ("chance", "text"),
    [(0.0, "0 %"), (1.0, "100 %"), (0.5, "50 %"), (0.0088, "0.88 %"), (9.9e-5, "under 0.01 %"),
     (0.99999, "over 99 %")],
)
def test_chances_in_words(chance: float, text: str) -> None:
    assert per_cent(chance) == text
