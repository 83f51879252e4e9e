"""The one description of a figure, which every renderer draws: on paper, or live in a notebook.

A description holds numbers and words only. Colours, dashes and markers are an index into the
lists below, so that no series differs from another by colour alone.
"""

from __future__ import annotations

import math
from collections.abc import Iterable
from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import ArrayLike, NDArray

from ..errors import Refused
from ..units import show

# Okabe and Ito's set, told apart with every common form of colour blindness (common practice).
COLOURS = ("#0072B2", "#D55E00", "#009E73", "#CC79A7", "#E69F00", "#56B4E9", "#000000")
DASHES = ("solid", "dashed", "dash_dotted", "dotted")
SHAPES = ("circle", "square", "diamond", "triangle-up", "triangle-down", "cross", "plus", "star")
SHADES = ("#ffffff", "#deebf7", "#9ecae1", "#4292c6", "#08519c")  # of a field, low to high

Scale = Literal["even", "log"]
Material = Literal["metal", "earthed metal", "cover", "space", "shade", "ink"]
Floats = NDArray[np.float64]


@dataclass(frozen=True)
class Axis:
    """One axis: a quantity, its unit, its ends, and every tick with the text beside it.

    An axis without ticks and label is not drawn. `turned` puts the low end at the top.
    """

    label: str
    unit: str
    low: float
    high: float
    scale: Scale = "even"
    ticks: tuple[tuple[float, str], ...] = ()
    turned: bool = False

    def __post_init__(self) -> None:
        if not (math.isfinite(self.low) and math.isfinite(self.high) and self.low < self.high):
            raise Refused("axis", "its low end must be below its high end",
                          given=f"{self.low:g} to {self.high:g}")
        if self.scale == "log" and self.low <= 0:
            raise Refused("axis", "a log axis must begin above 0", given=f"{self.low:g}")

    @property
    def title(self) -> str:
        """What stands beside the axis: the quantity with its unit.

        >>> Axis("Run length", "m", 0, 100).title
        'Run length [m]'
        """
        return f"{self.label} [{self.unit}]" if self.label and self.unit else self.label

    def fraction(self, value: float) -> float:
        """Where `value` lies along the axis, 0 at the low end and 1 at the high end.

        >>> Axis("Impedance", "Ω", 1e3, 1e9, "log").fraction(1e6)
        0.5
        """
        if self.scale == "log":
            value = max(value, self.low * 1e-3)
            share = math.log(value / self.low) / math.log(self.high / self.low)
        else:
            share = (value - self.low) / (self.high - self.low)
        return round(share, 12)

    def value(self, fraction: float) -> float:
        """The value at a fraction of the axis; undoes `fraction`."""
        if self.scale == "log":
            return float(self.low * (self.high / self.low) ** fraction)
        return self.low + fraction * (self.high - self.low)


@dataclass(frozen=True, eq=False)
class Line:
    """A curve through (x, y), or an unlabelled hairline where `style` is None."""

    x: Floats
    y: Floats
    label: str = ""
    style: int | None = 0

    def __post_init__(self) -> None:
        _keep(self, "x", "y")


@dataclass(frozen=True, eq=False)
class Band:
    """A shaded band from `low` to `high` over x."""

    x: Floats
    low: Floats
    high: Floats
    label: str = ""
    style: int = 0

    def __post_init__(self) -> None:
        _keep(self, "x", "low", "high")


@dataclass(frozen=True, eq=False)
class Points:
    """Markers of one style, each with a text for hovering; x ranges are drawn as bars.

    `hollow` markers are outlines only.
    """

    x: Floats
    y: Floats
    label: str = ""
    style: int = 0
    texts: tuple[str, ...] = ()
    x_low: Floats | None = None
    x_high: Floats | None = None
    hollow: bool = False

    def __post_init__(self) -> None:
        _keep(self, "x", "y", "x_low", "x_high")


@dataclass(frozen=True)
class Reference:
    """A straight line across the figure at one value of one axis, with a label at its end."""

    value: float
    axis: Literal["x", "y"]
    label: str


@dataclass(frozen=True)
class Note:
    """Words at (x, y), in data units; with a target, a thin leader runs from them to it.

    Words aligned to the middle stand on (x, y); others stand beside it, half above, half below.
    """

    x: float
    y: float
    text: str
    align: Literal["left", "middle", "right"] = "left"
    target: tuple[float, float] | None = None
    style: int | None = None


@dataclass(frozen=True, eq=False)
class Area:
    """A closed outline filled as a material: the metal, a cover, earthed metal, a scale bar."""

    x: Floats
    y: Floats
    material: Material

    def __post_init__(self) -> None:
        _keep(self, "x", "y")


@dataclass(frozen=True, eq=False)
class Field:
    """Values (m, k) over y (m,) and x (k,) as shading, from `scale.low` to `scale.high`."""

    x: Floats
    y: Floats
    values: Floats
    scale: Axis

    def __post_init__(self) -> None:
        _keep(self, "x", "y", "values")


@dataclass(frozen=True, eq=False)
class Figure:
    """A whole figure, drawn in this order: field, areas, bands, references, lines, points, notes.

    Parameters
    ----------
    key : stem of its file's name; lower-case letters, digits and hyphens
    title : of the picture; the caption stands under it in a document
    alternative : what a reader who cannot see the picture must be told
    numbers : the key numbers as text
    aspect : height over width of the whole picture
    to_scale : one unit of x is as long as one unit of y
    """

    key: str
    title: str
    x: Axis
    y: Axis
    caption: str
    alternative: str
    numbers: tuple[str, ...] = ()
    field: Field | None = None
    areas: tuple[Area, ...] = ()
    bands: tuple[Band, ...] = ()
    references: tuple[Reference, ...] = ()
    lines: tuple[Line, ...] = ()
    points: tuple[Points, ...] = ()
    notes: tuple[Note, ...] = ()
    aspect: float = 0.6
    to_scale: bool = False

    def __post_init__(self) -> None:
        if not self.key or not all(c.isascii() and (c.isalnum() or c == "-") for c in self.key):
            raise Refused("figure", "its key must be letters, digits and hyphens", given=self.key)
        for words in ("title", "caption", "alternative"):
            if not getattr(self, words).strip():
                raise Refused(f'figure "{self.key}"', f"needs its {words}")


def colour(style: int) -> str:
    """Colour of a style, as #rrggbb."""
    return COLOURS[style % len(COLOURS)]


def dash(style: int) -> str:
    """Dash of a style, a word of `DASHES`."""
    return DASHES[style % len(DASHES)]


def shape(style: int) -> str:
    """Marker of a style, a word of `SHAPES`."""
    return SHAPES[style % len(SHAPES)]


def even_axis(label: str, unit: str, low: float, high: float, *, parts: int = 6) -> Axis:
    """An even axis over [low, high], widened to round ticks; about `parts` of them.

    >>> [text for _, text in even_axis("Voltage", "V", 0, 223).ticks]
    ['0', '50', '100', '150', '200', '250']
    """
    step = round_step((high - low) / parts) if high > low else 1.0
    first, last = math.floor(low / step + 1e-9), math.ceil(high / step - 1e-9)
    last = max(last, first + 1)
    ticks = tuple((i * step, f"{i * step:.10g}".replace("-", "−")) for i in range(first, last + 1))
    return Axis(label, unit, ticks[0][0], ticks[-1][0], "even", ticks)


def log_axis(label: str, unit: str, low: float, high: float) -> Axis:
    """A log axis over [low, high] with a tick at each decade within.

    Ticks carry prefixes (10 k, 1 M) unless all of them read well without, from 0.01 to 1000.

    >>> [text for _, text in log_axis("Impedance", "Ω", 1e3, 1e6).ticks]
    ['1 k', '10 k', '100 k', '1 M']
    """
    first, last = math.ceil(math.log10(low) - 1e-9), math.floor(math.log10(high) + 1e-9)
    plain = first >= -2 and last <= 3
    ticks = tuple(
        (10.0**p, f"{10.0**p:g}" if plain else show(10.0**p, "#").removesuffix("#").strip())
        for p in range(first, last + 1)
    )
    return Axis(label, unit, low, high, "log", ticks)


def round_step(least: float) -> float:
    """The smallest of 1, 2, 5, 10 … that is at least `least` (above 0).

    >>> round_step(30), round_step(0.0011)
    (50.0, 0.002)
    """
    power = 10.0 ** math.floor(math.log10(least))
    return next(float(f"{m * power:.3g}") for m in (1, 2, 5, 10) if m * power >= least * 0.999999)


def _keep(record: object, *names: str) -> None:
    """Turn array fields into float arrays that nobody can write to."""
    for name in names:
        given: ArrayLike | Iterable[float] | None = getattr(record, name)
        if given is not None:
            values = np.array(given, dtype=float)
            values.setflags(write=False)
            object.__setattr__(record, name, values)
