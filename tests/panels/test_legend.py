"""The legend of a live figure: every name once, within the picture, where little is under it."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from unlanded.panels.legend import with_legend
from unlanded.report.figure import Axis, Figure, Line, Points, even_axis, log_axis

RISING = np.linspace(0.0, 10.0, 40)


def figure(*lines: Line, points: tuple[Points, ...] = (), y: Axis | None = None) -> Figure:
    return Figure("test", "Title", even_axis("x", "m", 0.0, 10.0),
                  y or even_axis("y", "V", 0.0, 10.0), "Caption.", "Alternative.", lines=lines,
                  points=points)


def test_one_name_needs_no_legend() -> None:
    alone = figure(Line(RISING, RISING, "one"))
    assert with_legend(alone) is alone


def test_every_name_once_and_no_curve_changed() -> None:
    shown = figure(Line(RISING, RISING, "one", 0), Line(RISING, RISING / 2, "two", 1),
                   points=(Points(np.array([1.0]), np.array([1.0]), "marks", 2),))
    made = with_legend(shown)
    assert [n.text for n in made.notes] == ["one", "two", "marks"]
    assert made.lines[:2] == shown.lines
    assert [x.style for x in made.lines[2:]] == [0, 1]
    assert [p.style for p in made.points] == [2, 2]


@pytest.mark.parametrize("turned", [False, True])
def test_stands_away_from_the_curves(turned: bool) -> None:
    y = replace(even_axis("y", "V", 0.0, 10.0), turned=turned)
    heights = 10 - RISING if turned else RISING  # a curve that rises on the picture
    made = with_legend(figure(Line(RISING, heights, "one", 0), Line(RISING, heights, "two", 1),
                              y=y))
    for note in made.notes:
        up = 1 - y.fraction(note.y) if turned else y.fraction(note.y)
        assert up > made.x.fraction(note.x) + 0.1 or up < made.x.fraction(note.x) - 0.3


def test_within_the_picture_on_log_axes() -> None:
    x = np.geomspace(1.0, 1e6, 50)
    shown = replace(figure(Line(x, x, "a long name of a curve", 0), Line(x, x / 2, "two", 1)),
                    x=log_axis("x", "Ω", 1.0, 1e6), y=log_axis("y", "V", 0.1, 1e6))
    for note in with_legend(shown).notes:
        assert 1.0 <= note.x <= 1e6
        assert 0.1 <= note.y <= 1e6
