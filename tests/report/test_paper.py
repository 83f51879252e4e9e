from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import matplotlib.image
import numpy as np
import pytest

from unlanded.errors import Refused
from unlanded.physics.section import Conductor, Plane, Section
from unlanded.report.cross_section import section_figure
from unlanded.report.figure import (
    Axis,
    Figure,
    Line,
    Note,
    Points,
    Reference,
    even_axis,
)
from unlanded.report.folder import Contents
from unlanded.report.paper import draw

PLAIN = Figure(
    "plain", "A title with $1$ & <b>", even_axis("Time", "s", 0, 1), even_axis("U", "V", 0, 10),
    "Caption.", "Alternative.",
    lines=(Line(np.array([0, 1.0]), np.array([0, 10.0]), "rising"),),
    points=(Points(np.array([0.5]), np.array([5.0]), "hollow ones", 1, hollow=True),),
    references=(Reference(0.5, "x", "half way"), Reference(5.0, "y", "half up")),
    notes=(Note(0.2, 8.0, "look here", target=(0.5, 5.0)),),
)


def ink(path: Path) -> float:
    """Share of the picture that is not white."""
    return float((matplotlib.image.imread(path)[..., :3].min(axis=2) < 0.95).mean())


def test_every_figure_of_the_memo_is_drawn(folder: Path, contents: Contents) -> None:
    for figure in contents.memo.figures:
        svg = (folder / "figures" / f"{figure.key}.svg").read_text(encoding="utf-8")
        labels = [*(x.label for x in (*figure.lines, *figure.points, *figure.bands)),
                  figure.title, figure.x.title, figure.y.title]
        assert [w for w in labels if w and f"<!-- {w} -->" not in svg] == []
        png = folder / "figures" / f"{figure.key}.png"
        assert 0.01 < ink(png) < 0.9
        height, width = matplotlib.image.imread(png).shape[:2]
        assert height / width == pytest.approx(figure.aspect, rel=0.01, abs=0)
        assert width == 1260  # 6.3 in at 200 dots per inch


def test_a_picture_is_the_same_bytes_every_time(tmp_path: Path) -> None:
    paths = [tmp_path / f"{i}.{form}" for i in range(2) for form in ("svg", "png")]
    draw(PLAIN, *paths[:2])
    draw(PLAIN, *paths[2:])
    assert paths[0].read_bytes() == paths[2].read_bytes()
    assert paths[1].read_bytes() == paths[3].read_bytes()


def test_text_is_never_taken_for_mathematics(tmp_path: Path) -> None:
    draw(PLAIN, tmp_path / "p.svg")
    svg = (tmp_path / "p.svg").read_text(encoding="utf-8")
    assert "A title with $1$ " in svg
    for words in ("rising", "hollow ones", "Time [s]", "U [V]"):
        assert f"<!-- {words} -->" in svg


def test_notes_and_references_are_drawn(tmp_path: Path) -> None:
    for name, figure in (("with", PLAIN), ("no-notes", replace(PLAIN, notes=())),
                         ("neither", replace(PLAIN, notes=(), references=()))):
        draw(figure, tmp_path / f"{name}.png")
    all_of_it, no_notes, neither = (ink(tmp_path / f"{n}.png")
                                    for n in ("with", "no-notes", "neither"))
    assert neither < 0.99 * no_notes
    assert no_notes < 0.99 * all_of_it


def test_a_field_is_shaded_where_the_conductor_is(tmp_path: Path) -> None:
    one = Section((Conductor("hot", 0, 0.003, 1e-3),), Plane(0.0))
    figure = section_figure(one, [230.0])
    draw(figure, tmp_path / "s.png")
    assert ink(tmp_path / "s.png") > 0.3


def test_an_axis_without_ticks_is_not_drawn(tmp_path: Path) -> None:
    bare = Figure("bare", "T", Axis("", "", 0, 1), Axis("", "", 0, 1), "C", "A")
    draw(bare, tmp_path / "b.svg")
    assert "xtick" not in (tmp_path / "b.svg").read_text(encoding="utf-8")


def test_other_endings_are_refused(tmp_path: Path) -> None:
    with pytest.raises(Refused, match=r"as \.svg or \.png"):
        draw(PLAIN, tmp_path / "p.pdf")
    assert list(tmp_path.iterdir()) == []
