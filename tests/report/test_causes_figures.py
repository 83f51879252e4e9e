"""Pictures of the causes: what they hold, and that it is what the study found."""

from __future__ import annotations

import numpy as np
import pytest

from unlanded.report.causes import explanation_of, prospects_of
from unlanded.report.causes_figures import (
    next_figure,
    odds_figure,
    predicted,
    predicted_figure,
    shown_causes,
    told_figure,
)
from unlanded.report.investigation import Investigation
from unlanded.study.causes import Explanation
from unlanded.study.hypotheses import CAUSES


@pytest.fixture(scope="module")
def found(quay: Investigation) -> Explanation:
    made = explanation_of(quay)
    assert made is not None
    return made


def test_odds_are_bars_with_what_was_thought_before(found: Explanation) -> None:
    figure = odds_figure(found, "black", key="odds-1")
    odds = found.odds("black")
    assert [float(b.x[1]) for b in figure.bands] == [100 * odds[c] for c in CAUSES]
    assert float(figure.points[0].x.sum()) == pytest.approx(100.0, rel=1e-9, abs=0)


def test_every_reading_has_a_mark_for_every_cause_left(found: Explanation) -> None:
    figure = told_figure(found, "black", key="told-1")
    assert len(figure.points) == len(shown_causes(found, "black"))
    assert all(len(p.x) == len(found.readings) for p in figure.points)
    np.testing.assert_array_equal(figure.points[0].x, 0.0)  # the likeliest over itself


def test_readings_lie_within_what_the_fitting_cause_predicts(found: Explanation) -> None:
    figure = predicted_figure(found, "black", key="predicted-1")
    assert figure is not None
    assert figure.points[-1].label == "read"
    for k, reading in enumerate(found.readings):
        band = predicted(found, "black", "capacitive coupling", k)
        assert band is not None
        # From the other reading alone the band is wide; what was read is inside it.
        assert band[0] < reading.value < band[2]
    assert predicted(found, "black", "none of these", 0) is None
    # Somebody may suspect a conductor that nothing was read on.
    assert predicted_figure(found, "grey", key="predicted-2") is None


def test_next_measurements_are_bars_the_longest_first(quay: Investigation) -> None:
    figure = next_figure(prospects_of(quay))
    lengths = [float(b.x[1]) for b in figure.bands]
    assert lengths == sorted(lengths, reverse=True)
    assert figure.alternative.startswith("Bars: ")
