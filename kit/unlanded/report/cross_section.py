"""The section drawn to scale: metal, covers, surround, and the potential around them."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from ..errors import listed
from ..physics.potential import potential_map
from ..physics.section import Conductor, Pipe, Plane, Section
from ..study.ends import SCREEN
from ..study.run import Run
from ..units import show
from .figure import Area, Axis, Field, Figure, Floats, Line, Material, Note, even_axis, round_step
from .words import cut, screen_words

DETAIL = 150  # points of the field across the shorter side of its window
ROW = 0.075  # height of a row of words over the window's height
LETTER = 0.0112  # width of a letter over the picture's width
NAME = 20  # letters of a name that fit beside the window
_MM = 1e3
_WALL = 0.07  # drawn thickness of a pipe over its radius


@dataclass(frozen=True)
class _Window:
    """The part of the plane that is shown [mm]."""

    left: float
    right: float
    bottom: float
    top: float

    @property
    def width(self) -> float:
        return self.right - self.left

    @property
    def height(self) -> float:
        return self.top - self.bottom

    @property
    def wide(self) -> bool:
        return self.width > 1.7 * self.height


def section_figure(
    section: Section, voltages: ArrayLike, *, title: str = "Section", customary: bool = False,
    detail: int = DETAIL, screen: tuple[str, complex] | None = None,
) -> Figure:
    """`section` to scale with the potential round it, shaded, with equipotentials.

    Parameters
    ----------
    section : as the physics takes it [m]
    voltages : (n,) of its conductors, RMS [V], complex or real
    title : of the picture
    customary : sizes in inches
    detail : points of the field across the shorter side of its window
    screen : how the surround is earthed, where it is a screen, and its voltage [V]

    The magnitude of the potential is shown. Equipotentials stand at the ticks of its scale
    and half-way between them.
    """
    volts = np.atleast_1d(np.asarray(voltages, dtype=complex))
    earthed, wall = screen or ("", 0.0)
    window = _window(section)
    field = _field(section, volts, wall, window, detail)
    said = [f"{c.name} {_volts(abs(v), field.scale.high)}"
            for c, v in zip(section.conductors, volts, strict=True)]
    labels = [f"{cut(c.name, NAME)}  {_volts(abs(v), field.scale.high)}"
              for c, v in zip(section.conductors, volts, strict=True)]
    x, y = _axes(window, max(map(len, labels)))
    notes = _names(list(zip(section.conductors, labels, strict=True)), window, x)
    bar, bar_note = _scale_bar(window, customary)
    surround = _surround_words(section, customary)
    if screen:
        surround = (f"{surround.replace('an earthed metal surround', 'a screen')}, {earthed}, at "
                    f"{_volts(abs(wall), field.scale.high)}")
    step = (field.scale.ticks[1][0] - field.scale.ticks[0][0]) / 2
    return Figure(
        key="section",
        title=title,
        x=x,
        y=y,
        caption=_caption(section, surround, step),
        alternative=f"Section drawn to scale, {surround}, with the potential around it. "
        f"Conductors: {listed(said)}.",
        numbers=tuple(said),
        field=field,
        areas=(*_surround(section, window), *_conductors(section), bar),
        lines=_equipotentials(field, step, _within_wall(section, field.x / _MM, field.y / _MM)),
        notes=(*notes, bar_note),
        aspect=min(0.62, max(0.36, (y.high - y.low) / (x.high - x.low) * 0.86 + 0.05)),
        to_scale=True,
    )


def run_section(
    run: Run, *, title: str = "Section", customary: bool = False, detail: int = DETAIL
) -> Figure:
    """The section of a run with the unloaded voltages at its far end."""
    volts = [run.voltage(f"{name}@far") for name in run.section.names]
    screen = (screen_words(run), run.voltage(f"{SCREEN}@far")) if run.screen else None
    return section_figure(run.section, volts, title=title, customary=customary, detail=detail,
                          screen=screen)


def _volts(value: float, top: float) -> str:
    """A voltage in words; below a ten-thousandth of the scale it is a rounding of 0 V."""
    return show(value if value >= 1e-4 * top else 0.0, "V")


def _window(section: Section) -> _Window:
    if isinstance(section.surround, Pipe):
        pipe = section.surround
        reach = 1.14 * pipe.radius * _MM
        x, y = pipe.x * _MM, pipe.y * _MM
        return _Window(x - reach, x + reach, y - reach, y + reach)
    cs = section.conductors
    left, right = min(c.x - c.outer for c in cs), max(c.x + c.outer for c in cs)
    bottom, top = min(c.y - c.outer for c in cs), max(c.y + c.outer for c in cs)
    if isinstance(section.surround, Plane):
        bottom = section.surround.y
    # Far-apart thin wires need room for their field; a bundle needs half its size.
    room = max(0.5 * min(right - left, top - bottom), 0.25 * max(right - left, top - bottom))
    below = 0.3 * room if isinstance(section.surround, Plane) else room
    return _Window(*(_MM * v for v in (left - room, right + room, bottom - below, top + room)))


def _field(
    section: Section, volts: NDArray[np.complex128], wall: complex, window: _Window, detail: int
) -> Field:
    step = min(window.width, window.height) / detail
    x = np.linspace(window.left, window.right, max(2, round(window.width / step)))
    y = np.linspace(window.bottom, window.top, max(2, round(window.height / step)))
    values = np.abs(potential_map(section, volts - wall, x / _MM, y / _MM)
                    + wall * _within_wall(section, x / _MM, y / _MM))
    top = float(np.max(np.abs([*volts, wall])))
    scale = even_axis("Potential, RMS", "V", 0.0, top if top > 0 else 1.0, parts=5)
    return Field(x, y, values, scale)


def _within_wall(section: Section, x: Floats, y: Floats) -> NDArray[np.bool_]:
    """Which points of the grid (m, k) lie within a pipe, up to the middle of its drawn wall."""
    pipe = section.surround
    if not isinstance(pipe, Pipe):
        return np.ones((len(y), len(x)), dtype=bool)
    return np.asarray(np.hypot(x - pipe.x, y[:, None] - pipe.y) < (1 + _WALL / 2) * pipe.radius)


def _equipotentials(
    field: Field, step: float, shown: NDArray[np.bool_]
) -> tuple[Line, ...]:
    from contourpy import contour_generator

    values = np.ma.masked_array(field.values, ~shown)
    contours: Any = contour_generator(field.x, field.y, values)
    count = math.floor(field.scale.high / step + 1e-9)
    return tuple(
        Line(path[:, 0], path[:, 1], style=None)
        for i in range(1, count + 1)
        for path in contours.lines(i * step)
        if len(path) > 2
    )


def _conductors(section: Section) -> list[Area]:
    covers = [_disc(c.x, c.y, c.outer, "cover") for c in section.conductors if c.outer > c.radius]
    return covers + [_disc(c.x, c.y, c.radius, "metal") for c in section.conductors]


def _circle(x: float, y: float, radius: float) -> tuple[Floats, Floats]:
    turn = np.linspace(0, 2 * np.pi, 97)
    return _MM * (x + radius * np.cos(turn)), _MM * (y + radius * np.sin(turn))


def _disc(x: float, y: float, radius: float, material: Material) -> Area:
    return Area(*_circle(x, y, radius), material)


def _surround(section: Section, window: _Window) -> list[Area]:
    wall = section.surround
    if isinstance(wall, Pipe):
        inner, outer = (_circle(wall.x, wall.y, wall.radius * k) for k in (1.0, 1 + _WALL))
        ring = [np.concatenate([o, i[::-1]]) for o, i in zip(outer, inner, strict=True)]
        return [Area(ring[0], ring[1], "earthed metal")]
    if isinstance(wall, Plane):
        left, right, bottom, top = window.left, window.right, window.bottom, wall.y * _MM
        return [Area(np.array([left, right, right, left]),
                     np.array([bottom, bottom, top, top]), "earthed metal")]
    return []


def _axes(window: _Window, letters: int) -> tuple[Axis, Axis]:
    """Axes that leave room for names of so many letters beside the window, unless it is wide."""
    x = Axis("", "mm", window.left, window.right)
    below = window.bottom - 0.13 * (window.width / 2 if window.wide else window.height)
    y = Axis("", "mm", below, window.top)
    if window.wide:
        return x, y
    share = LETTER * letters
    side = max(0.3 * window.height, 0.06 * window.height + share * window.width / (1 - 2 * share))
    return replace(x, low=window.left - side, high=window.right + side), y


def _names(pairs: list[tuple[Conductor, str]], window: _Window, x: Axis) -> list[Note]:
    if window.wide:
        return _above(pairs, window, x)
    half = (len(pairs) + 1) // 2
    by_side = sorted(pairs, key=lambda p: p[0].x)
    left, right = by_side[:half], by_side[half:]
    return _column(left, window, leftward=True) + _column(right, window, leftward=False)


def _column(pairs: list[tuple[Conductor, str]], window: _Window, *, leftward: bool) -> list[Note]:
    """Names in a column beside the window, in the conductors' own order, a row apart at least."""
    pairs = sorted(pairs, key=lambda p: p[0].y)
    row = min(ROW * window.height, window.height / max(1, len(pairs)))
    heights: list[float] = []
    for c, _ in pairs:
        heights.append(max(c.y * _MM, heights[-1] + row if heights else window.bottom + row / 2))
    for i in range(len(heights) - 1, -1, -1):
        ceiling = heights[i + 1] - row if i + 1 < len(heights) else window.top - row / 2
        heights[i] = min(heights[i], ceiling)
    edge = window.left - 0.02 * window.height if leftward else window.right + 0.02 * window.height
    return [Note(edge, height, text, "right" if leftward else "left", (c.x * _MM, c.y * _MM))
            for height, (c, text) in zip(heights, pairs, strict=True)]


def _above(pairs: list[tuple[Conductor, str]], window: _Window, x: Axis) -> list[Note]:
    """Names in rows above the conductors, each row free of overlaps."""
    ends: list[float] = []
    notes = []
    for c, text in sorted(pairs, key=lambda p: -p[0].x):
        half = LETTER * len(text) / 2 * (x.high - x.low)
        centre = min(max(c.x * _MM, x.low + half), x.high - half)
        row = next((i for i, end in enumerate(ends) if centre + half < end), len(ends))
        ends[row:row + 1] = [centre - half]
        height = window.top - (row + 0.95) * ROW * window.width / 2
        notes.append(Note(centre, height, text, "middle", (c.x * _MM, c.y * _MM)))
    return notes


def _scale_bar(window: _Window, customary: bool) -> tuple[Area, Note]:
    size = window.width / 2 if window.wide else window.height
    unit = 25.4 if customary else 1.0
    units = round_step(0.15 * min(window.width, window.height) / unit)
    length = units * unit
    left, top = window.left, window.bottom - 0.045 * size
    thick = 0.012 * size
    bar = Area(np.array([left, left + length, left + length, left]),
               np.array([top - thick, top - thick, top, top]), "ink")
    words = f"{units:.10g} in" if customary else show(length / _MM, "m")
    return bar, Note(left + length + 0.01 * size, top - thick / 2, words)


def _surround_words(section: Section, customary: bool) -> str:
    if isinstance(section.surround, Pipe):
        inside = 2 * section.surround.radius
        size = f"{inside / 0.0254:.3g} in" if customary else f"{inside * _MM:.4g} mm"
        return f"in an earthed metal surround of {size} inside"
    if isinstance(section.surround, Plane):
        return "over an earthed surface"
    return "in open air"


def _caption(section: Section, surround: str, step: float) -> str:
    pipe = " The wall's thickness is not to scale." if isinstance(section.surround, Pipe) else ""
    return (f"The section to scale, {surround}. Shading: potential, RMS; "
            f"a line every {show(step, 'V')}. Beside each conductor its computed voltage.{pipe}")
