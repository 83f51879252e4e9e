"""Live figures hold the numbers of their description, and are updated in place."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from numpy.testing import assert_allclose

from unlanded.panels.live import LiveFigure
from unlanded.report.figure import (
    Area,
    Band,
    Figure,
    Line,
    Note,
    Points,
    Reference,
    even_axis,
    log_axis,
)


def figure(scale: float = 1.0, high: float = 100.0) -> Figure:
    x = np.geomspace(1.0, 1000.0, 50)
    return Figure(
        "test", "Title", log_axis("Impedance", "Ω", 1.0, 1e3), even_axis("Voltage", "V", 0.0, high),
        "Caption.", "Alternative.", lines=(Line(x, scale * x / 20, "one", 0),
                                           Line(x, scale * x / 40, "two", 1)),
        bands=(Band(x, x / 30, x / 15, "", 0),),
        points=(Points(np.array([10.0]), np.array([scale]), "mark", 2, ("mark: 1 V",)),),
        references=(Reference(100.0, "x", "here"),), notes=(Note(10.0, 50.0, "word"),))


def test_marks_hold_the_description_s_numbers() -> None:
    shown = figure()
    live = LiveFigure(shown)
    for k, line in enumerate(shown.lines):
        assert_allclose(live.mark("lines", k).x, line.x, rtol=0)
        assert_allclose(live.mark("lines", k).y, line.y, rtol=0)
    assert_allclose(live.mark("points").x, [10.0], rtol=0)
    assert_allclose(live.mark("bands").y, [shown.bands[0].low, shown.bands[0].high], rtol=0)
    assert_allclose(live.mark("references").x, [100.0, 100.0], rtol=0)
    assert list(live.mark("points").names) == ["mark: 1 V"]
    assert list(live.mark("notes").text) == ["word"]


def test_update_keeps_the_marks_that_are_on_the_screen() -> None:
    live = LiveFigure(figure())
    marks = list(live.widget.marks)
    live.update(figure(2.0))
    assert list(live.widget.marks) == marks
    assert_allclose(live.mark("lines", 1).y, figure(2.0).lines[1].y, rtol=0)
    assert_allclose(live.mark("points").y, [2.0], rtol=0)


def test_what_is_alike_sends_nothing() -> None:
    live = LiveFigure(figure())
    sent = []
    for mark in live.widget.marks:
        mark.observe(sent.append, ["x", "y", "names"])
    live.update(figure())
    assert sent == []


def test_reference_follows_its_axis() -> None:
    live = LiveFigure(figure())
    live.update(figure(high=400.0))
    assert_allclose(live.mark("references").y, [0.0, 400.0], rtol=0)
    assert live.mark("lines").scales["y"].max == 400.0


def test_elements_that_come_and_go() -> None:
    live = LiveFigure(figure())
    marks = list(live.widget.marks)
    live.update(replace(figure(), bands=(), points=()))
    assert not live.mark("bands").visible
    assert not live.mark("points").visible
    live.update(figure(2.0))
    assert live.mark("bands").visible
    assert_allclose(live.mark("points").y, [2.0], rtol=0)
    assert list(live.widget.marks) == marks


def test_marks_that_are_new_come_in_their_place() -> None:
    live = LiveFigure(replace(figure(), bands=(), points=()))
    live.update(figure())
    shown = list(live.widget.marks)
    assert shown.index(live.mark("bands")) < shown.index(live.mark("lines", 0))
    assert shown.index(live.mark("lines", 1)) < shown.index(live.mark("points"))
    assert shown.index(live.mark("points")) < shown.index(live.mark("notes"))


def test_mark_under_the_pointer_is_left_alone() -> None:
    live = LiveFigure(figure())
    live.held = ("points", 0)
    live.update(figure(2.0))
    assert_allclose(live.mark("points").y, [1.0], rtol=0)
    live.held = None
    live.update(figure(2.0))
    assert_allclose(live.mark("points").y, [2.0], rtol=0)


def test_log_axis_has_a_tick_at_each_decade_and_its_words() -> None:
    axis = LiveFigure(figure()).widget.axes[0]
    assert_allclose(axis.tick_values, [1.0, 10.0, 100.0, 1000.0], rtol=0)
    assert axis.tick_labels["1000"] == "1000"


def test_series_differ_by_more_than_colour() -> None:
    live = LiveFigure(figure())
    one, two = live.mark("lines", 0), live.mark("lines", 1)
    assert (one.line_style, one.colors) != (two.line_style, two.colors)
    assert one.line_style != two.line_style


def test_hovering_a_curve_shows_its_numbers() -> None:
    names = list(LiveFigure(figure()).mark("hover", 0).names)
    assert names[0] == "one: 1 Ω, 50 mV"
    assert names[-1] == "one: 1 kΩ, 50 V"


def test_a_section_keeps_its_proportions() -> None:
    square = Area(np.array([0.0, 1.0, 1.0, 0.0]), np.array([0.0, 0.0, 1.0, 1.0]), "metal")
    drawn = replace(figure(), areas=(square,), to_scale=True, x=even_axis("", "mm", 0.0, 20.0),
                    y=even_axis("", "mm", 0.0, 10.0), lines=(), bands=(), points=(),
                    references=(), notes=())
    widget = LiveFigure(drawn, height=400).widget
    width = float(widget.layout.width.removesuffix("px"))
    margin = widget.fig_margin
    assert (width - margin["left"] - margin["right"]) / (
        400 - margin["top"] - margin["bottom"]) == pytest.approx(2.0, rel=0.01, abs=0)


def test_caption_and_what_a_reader_who_cannot_see_is_told() -> None:
    live = LiveFigure(figure())
    assert "Caption." in live.caption.value
    assert "Alternative." in live.caption.value
