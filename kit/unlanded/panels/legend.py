"""A legend as part of a figure's description, in the corner where it covers least.

bqplot's own legend takes 16 pixels a letter and covers what is under it.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace
from typing import TypeAlias

import numpy as np

from ..report.figure import Axis, Figure, Line, Note, Points

LETTER, ROW, SWATCH, EDGE = 0.0122, 0.062, 0.055, 0.025  # as fractions of the axes of a live figure
Corner: TypeAlias = tuple[float, float]
"""Left end and top of the legend, as fractions of the axes."""


def with_legend(figure: Figure) -> Figure:
    """The figure with a swatch and a name for each curve and kind of mark, where there are several.

    One alone is told by the caption.
    """
    lines = [x for x in figure.lines if x.label and x.style is not None]
    points = [x for x in figure.points if x.label]
    names = [x.label for x in lines] + [x.label for x in points]
    if len(names) < 2:
        return figure
    row = ROW * max(1.0, 0.6 / figure.aspect)
    left, top = _corner(figure, SWATCH + 0.015 + LETTER * max(map(len, names)), row * len(names))
    rows = [top - row * (k + 0.5) for k in range(len(names))]
    ends = [_value(figure.x, left), _value(figure.x, left + SWATCH)]
    middle = _value(figure.x, left + SWATCH / 2)
    heights = [_value(figure.y, row) for row in rows]
    swatches = [replace(x, x=np.array(ends), y=np.full(2, at), label="")
                for x, at in zip(lines, heights, strict=False)]
    marks = [replace(x, x=np.array([middle]), y=np.array([at]), label="", texts=(), x_low=None,
                     x_high=None) for x, at in zip(points, heights[len(lines):], strict=True)]
    styles = [x.style for x in lines] + [x.style for x in points]
    words = [Note(_value(figure.x, left + SWATCH + 0.015), at, name, style=style)
             for style, name, at in zip(styles, names, heights, strict=True)]
    return replace(figure, lines=(*figure.lines, *swatches), points=(*figure.points, *marks),
                   notes=(*figure.notes, *words))


def _corner(figure: Figure, width: float, height: float) -> Corner:
    """Where a legend of that size has the fewest points of curves and marks under it."""
    right, bottom = max(EDGE, 1 - EDGE - width), EDGE + height
    tried: list[Corner] = [(left, top) for top in (1 - EDGE, bottom, 0.5 + height / 2)
                           for left in (EDGE, right, 0.5 - width / 2)]
    spots = np.array(list(_spots(figure)) or [(2.0, 2.0)])

    def crowd(corner: Corner) -> int:
        left, top = corner
        inside = ((spots[:, 0] > left - EDGE) & (spots[:, 0] < left + width + EDGE)
                  & (spots[:, 1] > top - height - EDGE) & (spots[:, 1] < top + EDGE))
        return int(inside.sum())

    return min(tried, key=crowd)


def _spots(figure: Figure) -> Iterator[tuple[float, float]]:
    drawn: list[Line | Points] = [*figure.lines, *figure.points]
    for x in drawn:
        some = np.unique(np.linspace(0, len(x.x) - 1, min(40, len(x.x))).astype(int))
        for across, along in zip(x.x[some], x.y[some], strict=True):
            if np.isfinite(along):
                yield figure.x.fraction(float(across)), _up(figure.y, float(along))
    for note in figure.notes:
        for step in range(0, len(note.text), 4):
            way = -1 if note.align == "right" else 1
            yield figure.x.fraction(note.x) + way * LETTER * step, _up(figure.y, note.y)


def _up(axis: Axis, value: float) -> float:
    """How far up the picture a value lies, 0 to 1."""
    share = axis.fraction(value)
    return 1 - share if axis.turned else share


def _value(axis: Axis, share: float) -> float:
    """The value that lies so far up or along the picture."""
    return axis.value(1 - share if axis.turned else share)
