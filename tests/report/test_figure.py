from __future__ import annotations

import numpy as np
import pytest

from unlanded.errors import Refused
from unlanded.report.figure import (
    Axis,
    Figure,
    Line,
    colour,
    dash,
    even_axis,
    log_axis,
    round_step,
    shape,
)


@pytest.mark.parametrize(("low", "high", "texts"), [
    (0, 223, ["0", "50", "100", "150", "200", "250"]),
    (-3, 3, ["−3", "−2", "−1", "0", "1", "2", "3"]),
    (0, 0.0012, ["0", "0.0002", "0.0004", "0.0006", "0.0008", "0.001", "0.0012"]),
    (5, 5, ["5", "6"]),
])
def test_even_ticks(low: float, high: float, texts: list[str]) -> None:
    axis = even_axis("U", "V", low, high)
    assert [text for _, text in axis.ticks] == texts
    assert axis.low <= low
    assert axis.high >= high


@pytest.mark.parametrize(("low", "high", "texts"), [
    (1e3, 1e9, ["1 k", "10 k", "100 k", "1 M", "10 M", "100 M", "1 G"]),
    (0.01, 1000, ["0.01", "0.1", "1", "10", "100", "1000"]),
    (2e-4, 0.5, ["1 m", "10 m", "100 m"]),
])
def test_log_ticks(low: float, high: float, texts: list[str]) -> None:
    assert [text for _, text in log_axis("R", "Ω", low, high).ticks] == texts


@pytest.mark.parametrize("axis", [even_axis("U", "V", -20, 230), log_axis("R", "Ω", 1e3, 1e9)])
def test_fraction_and_value_undo_each_other(axis: Axis) -> None:
    for share in (0.0, 0.3, 1.0):
        assert axis.fraction(axis.value(share)) == pytest.approx(share, rel=1e-9, abs=0)


@pytest.mark.parametrize(("low", "high", "scale", "rule"), [
    (1, 1, "even", "below its high end"),
    (0, float("inf"), "even", "below its high end"),
    (0, 1, "log", "above 0"),
])
def test_impossible_axes_are_refused(low: float, high: float, scale: str, rule: str) -> None:
    with pytest.raises(Refused, match=rule):
        Axis("U", "V", low, high, scale)  # type: ignore[arg-type]


@pytest.mark.parametrize(("least", "step"), [
    (1, 1), (1.1, 2), (2.1, 5), (5.1, 10), (0.011, 0.02), (99, 100),
])
def test_round_steps(least: float, step: float) -> None:
    assert round_step(least) == pytest.approx(step, rel=1e-12, abs=0)


def test_series_cannot_be_written_to() -> None:
    given = np.array([1.0, 2.0])
    line = Line(given, given)
    given[0] = 9
    assert line.x[0] == 1
    with pytest.raises(ValueError, match="read-only"):
        line.x[0] = 3


def test_no_series_differs_by_colour_alone() -> None:
    looks = [(colour(i), dash(i), shape(i)) for i in range(7)]
    assert len({c for c, _, _ in looks}) == 7
    assert len({s for _, _, s in looks}) == 7


@pytest.mark.parametrize("key", ["", "a b", "ä", "../a"])
def test_a_key_that_cannot_name_a_file_is_refused(key: str) -> None:
    axis = Axis("", "", 0, 1)
    with pytest.raises(Refused, match="letters, digits and hyphens"):
        Figure(key, "T", axis, axis, "C", "A")


@pytest.mark.parametrize("missing", ["title", "caption", "alternative"])
def test_a_figure_needs_its_words(missing: str) -> None:
    axis = Axis("", "", 0, 1)
    words = {"title": "T", "caption": "C", "alternative": "A"} | {missing: " "}
    with pytest.raises(Refused, match=f"needs its {missing}"):
        Figure("f", x=axis, y=axis, **words)
