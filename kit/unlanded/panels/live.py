"""Figures live in a notebook: the same description that paper draws, as a bqplot figure.

A live figure is made once. `update` puts a new description's numbers into the marks that are
already on the screen, and makes new marks only where the description has others than before.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import bqplot as bq
import ipywidgets as w
import numpy as np

from ..report.figure import (
    SHADES,
    Area,
    Axis,
    Band,
    Field,
    Figure,
    Floats,
    Line,
    Note,
    Points,
    Reference,
    colour,
    dash,
    shape,
)
from ..units import show
from .legend import with_legend
from .look import caption_html

_FILL = {"metal": "#c98a5a", "earthed metal": "#d9d9d9", "cover": "none", "space": "#ffffff",
         "shade": "#eeeeee", "ink": "#222222"}
_EDGE = {"metal": "#5a3517", "cover": "#444444"}
_SHAPE = {"star": "ellipse", "plus": "rectangle"}  # no star; a plus is too thin to be dragged
_GRID = "#e2e2e2"
_MARGIN = {"top": 56, "bottom": 52, "left": 66, "right": 14}
_NARROW = {"top": 40, "bottom": 8, "left": 8, "right": 8}
HOVERED = 60  # points of a curve whose numbers show under the pointer
PAPER = "unlanded-paper"
WIDEST, NARROWEST, LOWEST = 640, 440, 260  # pixels
LETTER = 6.4  # pixels, mean width of one in the words beside an axis


class LiveFigure:
    """A figure on the screen with its caption; `view` is both, `widget` the picture alone.

    Parameters
    ----------
    figure : the description to begin with
    height : of the picture on the screen [px]; as the figure's own shape has it when 0

    `held` is an element that is being dragged, and is not updated meanwhile.
    """

    def __init__(self, figure: Figure, *, height: int = 0) -> None:
        self.figure, self._height = figure, height
        self._x, self._y = _scale(figure.x), _scale(figure.y)
        self._axes = (_axis(figure.x, self._x, "bottom"), _axis(figure.y, self._y, "left"))
        bare = not (figure.x.ticks or figure.y.ticks)
        self._marks: dict[tuple[str, int], Any] = {}
        self._drawn: dict[tuple[str, int], Any] = {}
        self.held: tuple[str, int] | None = None
        self.widget = bq.Figure(
            axes=[] if bare else list(self._axes), animation_duration=0, padding_x=0.0,
            padding_y=0.0, display_toolbar=False, background_style={"fill": "white"},
            layout={"width": "100%", "min_width": f"{NARROWEST}px"},
        )
        self.widget.add_class(PAPER)
        self.caption = w.HTML()
        self.view = w.VBox([self.widget, self.caption], layout={
            "width": "100%", "max_width": f"{WIDEST}px"})
        self.update(figure)

    def update(self, figure: Figure) -> None:
        """Show another description of the same question."""
        moved = (self.figure.x, self.figure.y) != (figure.x, figure.y)
        self.figure = figure
        _set_axis(self._axes[0], self._x, figure.x)
        _set_axis(self._axes[1], self._y, figure.y)
        self.widget.title = figure.title
        caption = caption_html(figure)
        if self.caption.value != caption:
            self.caption.value = caption
        self._shape(figure)
        wanted = dict(_elements(with_legend(figure)))
        if self.held in wanted and self.held in self._drawn:
            wanted[self.held] = self._drawn[self.held]  # under the pointer: not to be moved
        for key, element in wanted.items():
            alike = _equal(element, self._drawn.get(key))
            if not alike or (moved and key[0] in _ON_AXES):
                self._mark(key, element)
        for key, mark in self._marks.items():
            # One that is taken out and put back is drawn anew, and drops out of the pointer's hand.
            if mark.visible != (key in wanted):
                mark.visible = key in wanted
        self._drawn = wanted
        if len(self.widget.marks) < len(self._marks):
            in_order = sorted(self._marks, key=lambda key: (_ORDER.index(key[0]), key[1]))
            self.widget.marks = [self._marks[key] for key in in_order]

    def _shape(self, figure: Figure) -> None:
        """Size and margins: words beside an axis need room, and a section keeps its proportions."""
        height = self._height or max(LOWEST, round(WIDEST * min(figure.aspect, 0.8)))
        layout, margin = self.widget.layout, dict(_MARGIN)
        if figure.to_scale:
            margin = dict(_NARROW)
            self.view.layout.width = "auto"
            layout.width = f"{_width_to_scale(figure, height)}px"
        elif not figure.y.label:
            margin["left"] = 20 + round(LETTER * max(len(text) for _, text in figure.y.ticks))
        if layout.height != f"{height}px":
            layout.height = f"{height}px"
        if self.widget.fig_margin != margin:
            self.widget.fig_margin = margin

    def mark(self, kind: str, number: int = 0) -> Any:
        """The bqplot mark that shows an element, such as ("points", 0), for dragging it."""
        return self._marks[kind, number]

    def _mark(self, key: tuple[str, int], element: Any) -> None:
        """Put the numbers of an element into its mark, which is made where there is none yet."""
        traits = _TRAITS[key[0]](element, self.figure)
        mark = self._marks.get(key)
        if mark is None:
            scales = {"x": self._x, "y": self._y}
            if "color" in traits:
                low, high = element.scale.low, element.scale.high
                scales["color"] = bq.ColorScale(colors=list(SHADES), min=low, max=high)
            if "names" in traits:
                traits["tooltip"] = bq.Tooltip(fields=["name"], show_labels=False)
            self._marks[key] = _MARKS[key[0]](scales=scales, **traits)
            return
        with mark.hold_sync():
            for name, value in traits.items():
                setattr(mark, name, value)


def side_by_side(*figures: LiveFigure) -> w.HBox:
    """The figures in a row, or one under the other where the page is too narrow for that."""
    for figure in figures:
        figure.view.layout.flex = f"1 1 {NARROWEST}px"
    return w.HBox([figure.view for figure in figures], layout={"flex_flow": "wrap"})


def _width_to_scale(figure: Figure, height: int) -> int:
    """Width of the whole picture at which a unit of x is as long as one of y [px]."""
    across = (figure.x.high - figure.x.low) / (figure.y.high - figure.y.low)
    tall = height - _NARROW["top"] - _NARROW["bottom"]
    return round(tall * across) + _NARROW["left"] + _NARROW["right"]


def _equal(element: Any, other: Any) -> bool:
    """Whether two elements of a figure are alike, numbers and words."""
    if type(element) is not type(other):
        return False
    if isinstance(element, tuple):
        return bool(element == other)
    return all(np.array_equal(value, getattr(other, name)) for name, value in
               vars(element).items())


def _elements(figure: Figure) -> Any:
    """(kind, number) of everything on the figure, in the order in which it is drawn."""
    if figure.field is not None:
        yield ("field", 0), figure.field
    for kind in ("areas", "bands", "references", "lines"):
        for number, element in enumerate(getattr(figure, kind)):
            yield (kind, number), element
    for number, mark in enumerate(figure.references):
        yield ("mark labels", number), mark
    for number, band in enumerate(figure.bands):
        if band.label and len(band.x) == 2:
            yield ("band labels", number), band
    for number, line in enumerate(figure.lines):
        if line.style is not None and len(line.x) > 2:
            yield ("hover", number), line
    # Under the marks, or it would take the pointer from one that can be dragged.
    if pointing := tuple(n for n in figure.notes if n.target is not None):
        yield ("leaders", 0), pointing
    for number, points in enumerate(figure.points):
        if points.x_low is not None:
            yield ("bars", number), points
        yield ("points", number), points
    for number, note in enumerate(figure.notes):
        yield ("notes", number), note


def _field(field: Field, _: Figure) -> dict[str, Any]:
    return {"x": field.x, "y": field.y, "color": field.values}


def _area(area: Area, _: Figure) -> dict[str, Any]:
    fill = _FILL[area.material]
    return {"x": area.x, "y": area.y, "fill": "none" if fill == "none" else "inside",
            "fill_colors": ["white" if fill == "none" else fill],
            "colors": [_EDGE.get(area.material, "#777777")], "close_path": True,
            "stroke_width": 1.0}


def _band(band: Band, _: Figure) -> dict[str, Any]:
    paint = colour(band.style)
    return {"x": np.array([band.x, band.x]), "y": np.array([band.low, band.high]),
            "fill": "between", "fill_colors": [paint], "fill_opacities": [0.18, 0.18],
            "colors": [paint], "opacities": [0.0, 0.0]}


def _reference(mark: Reference, figure: Figure) -> dict[str, Any]:
    across = figure.y if mark.axis == "x" else figure.x
    ends, level = np.array([across.low, across.high]), np.full(2, mark.value)
    x, y = (level, ends) if mark.axis == "x" else (ends, level)
    return {"x": x, "y": y, "colors": ["#444444"], "stroke_width": 1.0,
            "line_style": "dash_dotted"}


def _mark_label(mark: Reference, figure: Figure) -> dict[str, Any]:
    """Above the picture for an upright line; on the line, at its end, for one across."""
    upright = mark.axis == "x"
    x, y = (mark.value, _top(figure.y)) if upright else (figure.x.high, mark.value)
    share = figure.x.fraction(mark.value)
    beside = "start" if share < 0.15 else "end" if share > 0.85 else "middle"
    return {**_words(x, y, mark.label, "#222222"), "align": beside if upright else "end",
            "x_offset": 0 if upright else -4, "y_offset": -8 if upright else -7}


def _band_label(band: Band, figure: Figure) -> dict[str, Any]:
    """Just within the upper edge of a block."""
    edge = float(np.min(band.low) if figure.y.turned else np.max(band.high))
    return {**_words(float(np.mean(band.x)), edge, band.label, colour(band.style)),
            "align": "middle", "y_offset": 11}


def _words(x: float, y: float, text: str, ink: str) -> dict[str, Any]:
    return {"x": np.array([x]), "y": np.array([y]), "text": np.array([text]), "colors": [ink],
            "default_size": 11, "font_weight": "normal", "apply_clip": False}


def _top(axis: Axis) -> float:
    return axis.low if axis.turned else axis.high


def _line(line: Line, _: Figure) -> dict[str, Any]:
    hairline = line.style is None
    return {"x": line.x, "y": line.y, "stroke_width": 0.6 if hairline else 2.0,
            "colors": ["#777777" if line.style is None else colour(line.style)],
            "line_style": "solid" if line.style is None else dash(line.style)}


def _hover(line: Line, figure: Figure) -> dict[str, Any]:
    """Unseen points along a curve, whose numbers show under the pointer."""
    some = np.unique(np.linspace(0, len(line.x) - 1, min(HOVERED, len(line.x))).astype(int))
    x, y = line.x[some], line.y[some]
    name = f"{line.label}: " if line.label else ""
    texts = [f"{name}{_said(a, figure.x)}, {_said(b, figure.y)}" for a, b in zip(x, y, strict=True)]
    return {"x": x, "y": y, "names": np.array(texts), "display_names": False, "marker": "circle",
            "default_size": 90, "opacities": [0.0]}


def _said(value: float, axis: Axis) -> str:
    return show(float(value), axis.unit) if axis.unit else f"{value:.4g}"


def _points(points: Points, _: Figure) -> dict[str, Any]:
    paint, kind = colour(points.style), shape(points.style)
    named = {"names": np.array(points.texts)} if points.texts else {}
    return {"x": points.x, "y": points.y, "marker": _SHAPE.get(kind, kind),
            "default_size": 80,
            "colors": [paint], "stroke": paint, "fill": not points.hollow,
            "display_names": False,  **named}


def _bars(points: Points, _: Figure) -> dict[str, Any]:
    assert points.x_low is not None
    assert points.x_high is not None
    ends = np.array([points.x_low, points.y, points.x_high, points.y]).T
    return {**_strokes(ends), "colors": [colour(points.style)], "stroke_width": 2.0,
            "opacities": [0.6]}


def _leaders(notes: tuple[Note, ...], _: Figure) -> dict[str, Any]:
    """From the words of each note to what they point at."""
    ends = np.array([(n.x, n.y, *n.target) for n in notes if n.target is not None])
    return {**_strokes(ends), "colors": ["#777777"], "stroke_width": 0.8}


def _strokes(ends: Floats) -> dict[str, Any]:
    """Straight strokes (k, 4) from x, y to x, y as one path, broken by gaps.

    It must not end in a gap: bqplot puts the path's label at its last point.
    """
    gap = np.full(len(ends), np.nan)
    x, y = (np.column_stack([ends[:, i], ends[:, i + 2], gap]).ravel()[:-1] for i in (0, 1))
    return {"x": x, "y": y}


def _note(note: Note, _: Figure) -> dict[str, Any]:
    align = {"left": "start", "middle": "middle", "right": "end"}[note.align]
    ink = "#222222" if note.style is None else colour(note.style)
    return {**_words(note.x, note.y, note.text, ink), "align": align}


_TRAITS: dict[str, Callable[[Any, Figure], dict[str, Any]]] = {
    "field": _field, "areas": _area, "bands": _band, "references": _reference, "lines": _line,
    "mark labels": _mark_label, "band labels": _band_label, "hover": _hover, "points": _points,
    "bars": _bars, "leaders": _leaders, "notes": _note,
}
_ORDER = ("field", "areas", "bands", "references", "lines", "mark labels", "band labels", "hover",
          "leaders", "bars", "points", "notes")
"""From the lowest to the uppermost."""

_ON_AXES = ("references", "mark labels", "band labels", "hover")
"""What depends on the axes of its figure, besides on itself."""

_MARKS: dict[str, Any] = {
    "field": bq.HeatMap, "areas": bq.Lines, "bands": bq.Lines, "references": bq.Lines,
    "lines": bq.Lines, "hover": bq.Scatter, "points": bq.Scatter, "bars": bq.Lines,
    "leaders": bq.Lines, "notes": bq.Label, "mark labels": bq.Label, "band labels": bq.Label,
}


def _scale(axis: Axis) -> Any:
    kind = bq.LogScale if axis.scale == "log" else bq.LinearScale
    return kind(min=axis.low, max=axis.high, reverse=axis.turned)


def _axis(axis: Axis, scale: Any, side: str) -> Any:
    return bq.Axis(scale=scale, side=side, grid_color=_GRID, grid_lines="solid",
                   label_offset="38px" if side == "bottom" else "48px",
                   tick_style={"font-size": "12px"}, **_ticks(axis))


def _ticks(axis: Axis) -> dict[str, Any]:
    values = np.array([v for v, _ in axis.ticks])
    # "~s" would turn 0.01 into 10m; on axes without prefixes numbers are written out.
    prefixed = axis.scale == "log" and any(" " in text for _, text in axis.ticks)
    return {"label": axis.title, "tick_values": values,
            "tick_format": "~s" if prefixed else "~g",
            "tick_labels": {_as_key(v): text for v, text in axis.ticks}}


def _as_key(value: float) -> str:
    """A number as the browser spells it when it looks for the words of a tick."""
    return repr(float(value)).removesuffix(".0")


def _set_axis(drawn: Any, scale: Any, axis: Axis) -> None:
    if (scale.min, scale.max) != (axis.low, axis.high):
        with scale.hold_sync():
            scale.min, scale.max = axis.low, axis.high
    traits = _ticks(axis)
    if not np.array_equal(drawn.tick_values, traits["tick_values"]) or drawn.label != axis.title:
        with drawn.hold_sync():
            for name, value in traits.items():
                setattr(drawn, name, value)
