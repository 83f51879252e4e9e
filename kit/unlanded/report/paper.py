"""Figures on paper: drawn with matplotlib to SVG and PNG, the same bytes every time."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path
from typing import Any

import matplotlib as mpl
import numpy as np
from matplotlib.axes import Axes
from matplotlib.backends.backend_agg import FigureCanvasAgg
from matplotlib.colors import LinearSegmentedColormap
from matplotlib.figure import Figure as Canvas
from matplotlib.patheffects import withStroke
from matplotlib.ticker import NullLocator

from ..errors import Refused
from .figure import SHADES, Area, Axis, Field, Figure, Note, colour, dash, shape

WIDTH = 6.3  # inches: 160 mm, the text width of the memo
DOTS_PER_INCH = 200

_DASH = {"solid": "-", "dashed": "--", "dash_dotted": "-.", "dotted": ":"}
_SHAPE = {"circle": "o", "square": "s", "diamond": "D", "triangle-up": "^", "triangle-down": "v",
          "cross": "X", "plus": "P", "star": "*"}
_SIZE = {"star": 1.7, "cross": 1.2, "plus": 1.2, "triangle-up": 1.15, "triangle-down": 1.15}
_FILL: dict[str, dict[str, Any]] = {
    "metal": {"facecolor": "#c98a5a", "edgecolor": "#5a3517", "linewidth": 0.8},
    "earthed metal": {"facecolor": "#ececec", "edgecolor": "#777777", "linewidth": 0.6,
                      "hatch": "//////"},
    "cover": {"facecolor": "none", "edgecolor": "#444444", "linewidth": 0.8},
    "space": {"facecolor": "white", "edgecolor": "#777777", "linewidth": 0.8},
    "shade": {"facecolor": "#00000012", "edgecolor": "none"},
    "ink": {"facecolor": "#222222", "edgecolor": "none"},
}
_RULES: dict[Any, Any] = {
    "svg.hashsalt": "unlanded",
    "font.family": "DejaVu Sans",
    "font.size": 8.0,
    "hatch.linewidth": 0.4,
    "hatch.color": "#777777",
    "axes.linewidth": 0.7,
    "mathtext.default": "regular",
    "text.parse_math": False,  # a conductor may well be called "$1"
    "text.usetex": False,
}
_METADATA: dict[str, dict[str, str | None]] = {
    "svg": {"Date": None, "Creator": None},
    "png": {"Software": None},
}
_HALO = [withStroke(linewidth=2.4, foreground="white")]


def draw(figure: Figure, *paths: Path) -> None:
    """Draw `figure` once and write it to each path; its ending, .svg or .png, says how."""
    for path in paths:
        if path.suffix not in (".svg", ".png"):
            raise Refused(str(path.name), "a figure is written as .svg or .png")
    with mpl.rc_context(_RULES):
        canvas = _canvas(figure)
        for path in paths:
            form = path.suffix[1:]
            canvas.savefig(path, dpi=DOTS_PER_INCH, metadata=_METADATA[form], format=form)


def _canvas(figure: Figure) -> Canvas:
    canvas = Canvas(figsize=(WIDTH, WIDTH * figure.aspect), layout="constrained")
    FigureCanvasAgg(canvas)
    axes = canvas.subplots()
    _axes(axes, figure)
    if figure.field is not None:
        _field(canvas, axes, figure.field)
    for area in figure.areas:
        _area(axes, area)
    _series(axes, figure)
    for note in figure.notes:
        _note(axes, note)
    _legend(canvas, axes)
    return canvas


def _axes(axes: Axes, figure: Figure) -> None:
    lifted = any(mark.axis == "x" for mark in figure.references)
    axes.set_title(figure.title, fontsize=9, loc="left", fontweight="bold",
                   pad=17 if lifted else 6)
    for name, axis in (("x", figure.x), ("y", figure.y)):
        _axis(axes, name, axis)
    if figure.to_scale:
        axes.set_aspect("equal", adjustable="box")
    bare = not figure.x.ticks and not figure.y.ticks
    axes.set_axisbelow(True)
    if not bare:
        axes.grid(color="#e2e2e2", linewidth=0.6)
    for side in ("top", "right", *(("left", "bottom") if bare else ())):
        axes.spines[side].set_visible(False)


def _axis(axes: Axes, name: str, axis: Axis) -> None:
    drawn = getattr(axes, f"{name}axis")
    getattr(axes, f"set_{name}scale")("log" if axis.scale == "log" else "linear")
    ends = (axis.high, axis.low) if axis.turned else (axis.low, axis.high)
    getattr(axes, f"set_{name}lim")(*ends)
    drawn.set_ticks([v for v, _ in axis.ticks], labels=[t for _, t in axis.ticks])
    drawn.set_minor_locator(NullLocator())
    drawn.set_label_text(axis.title)
    drawn.set_tick_params(length=3, width=0.6, color="#555555")


def _field(canvas: Canvas, axes: Axes, field: Field) -> None:
    shades = LinearSegmentedColormap.from_list("shades", SHADES)
    dx, dy = np.diff(field.x[:2])[0] / 2, np.diff(field.y[:2])[0] / 2
    image = axes.imshow(
        field.values, origin="lower", cmap=shades, vmin=field.scale.low, vmax=field.scale.high,
        interpolation="bilinear", aspect="auto", zorder=0,
        extent=(field.x[0] - dx, field.x[-1] + dx, field.y[0] - dy, field.y[-1] + dy),
    )
    axes.set_aspect("equal", adjustable="box")
    bar = canvas.colorbar(image, ax=axes, shrink=0.8, pad=0.02, aspect=24)
    bar.set_ticks([v for v, _ in field.scale.ticks], labels=[t for _, t in field.scale.ticks])
    bar.set_label(field.scale.title)
    bar.outline.set_linewidth(0.5)


def _area(axes: Axes, area: Area) -> None:
    layer = {"cover": 2.0, "metal": 3.0, "ink": 3.0}.get(area.material, 0.5)
    axes.fill(area.x, area.y, zorder=layer, **_FILL[area.material])


def _series(axes: Axes, figure: Figure) -> None:
    for band in figure.bands:
        axes.fill_between(band.x, band.low, band.high, color=colour(band.style), alpha=0.18,
                          linewidth=0, label=band.label or None, zorder=1)
    for mark in figure.references:
        _reference(axes, mark.value, mark.axis, mark.label)
    for line in figure.lines:
        if line.style is None:
            axes.plot(line.x, line.y, color="#33333399", linewidth=0.5, zorder=1.5)
        else:
            axes.plot(line.x, line.y, color=colour(line.style), linestyle=_DASH[dash(line.style)],
                      linewidth=1.5, label=line.label or None, zorder=2.5)
    for points in figure.points:
        paint = colour(points.style)
        if points.x_low is not None and points.x_high is not None:
            axes.hlines(points.y, points.x_low, points.x_high, color=paint, linewidth=1.6,
                        alpha=0.55, zorder=3)
        form = shape(points.style)
        face, edge = ("white", paint) if points.hollow else (paint, "white")
        axes.plot(points.x, points.y, linestyle="none", marker=_SHAPE[form], color=paint,
                  markersize=5.0 * _SIZE.get(form, 1.0), markerfacecolor=face,
                  markeredgecolor=edge, markeredgewidth=1.0 if points.hollow else 0.5,
                  label=points.label or None, zorder=4)


def _reference(axes: Axes, value: float, axis: str, label: str) -> None:
    ink: dict[str, Any] = {"color": "#444444", "linewidth": 0.9, "zorder": 2,
                           "linestyle": (0, (6, 2, 1, 2))}
    words: dict[str, Any] = {
        "fontsize": 7.5, "color": "#222222", "path_effects": _HALO, "zorder": 6,
    }
    if axis == "x":
        axes.axvline(value, **ink)
        axes.annotate(label, (value, 1), (0, 3), xycoords=("data", "axes fraction"),
                      textcoords="offset points", ha="center", **words)
    else:
        axes.axhline(value, **ink)
        axes.annotate(label, (1, value), (-3, 3), xycoords=("axes fraction", "data"),
                      textcoords="offset points", ha="right", **words)


def _note(axes: Axes, note: Note) -> None:
    ink = colour(note.style) if note.style is not None else "#222222"
    if note.target is not None:
        axes.plot(*zip((note.x, note.y), note.target, strict=True), color="#666666",
                  linewidth=0.6, zorder=3.5, clip_on=False)
        axes.plot(*note.target, marker="o", markersize=1.8, color="#222222", zorder=3.6)
    align = {"left": "left", "middle": "center", "right": "right"}[note.align]
    pad = {"left": 2, "middle": 0, "right": -2}[note.align]
    axes.annotate(note.text, (note.x, note.y), (pad, 0), textcoords="offset points", ha=align,
                  va="bottom" if note.align == "middle" else "center", color=ink, fontsize=7.5,
                  path_effects=_HALO, zorder=6, annotation_clip=False)


def _legend(canvas: Canvas, axes: Axes) -> None:
    handles, labels = axes.get_legend_handles_labels()
    if not labels:
        return
    canvas.legend(handles, labels, loc="outside lower center", ncols=_columns(labels),
                  frameon=False, fontsize=7.5, handlelength=2.6, columnspacing=1.4)


def _columns(labels: Sequence[str]) -> int:
    """As many columns as the longest label leaves room for on the picture's width."""
    return max(1, min(len(labels), int(105 / (max(map(len, labels)) + 8))))
