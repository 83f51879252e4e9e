"""Figures of the readings, as descriptions made from study results by pure functions."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import ArrayLike

from ..errors import Refused, listed
from ..units import FOOT, show, show_length
from .cross_section import section_figure
from .figure import (
    Axis,
    Band,
    Figure,
    Floats,
    Line,
    Note,
    Points,
    Reference,
    even_axis,
    log_axis,
)
from .labels import Flag, flags
from .words import cut, pair_words

if TYPE_CHECKING:
    from ..study.readings import Pair, ReadingSheet, SheetRow

__all__ = ["InstrumentMark", "length_figure", "loading_figure", "section_figure", "sheet_figure",
           "sheet_marks"]

FLOOR = 0.01  # volts: the sheet's chart shows less than this as this
RANGE = "over what is not known of the inputs"
ROWS = 16  # pairs on one chart; more would not be read on one page


@dataclass(frozen=True)
class InstrumentMark:
    """An instrument on a loading curve: what it is, its impedance [ohm] and the voltage [V]."""

    name: str
    impedance: float
    voltage: float
    reading: str


def sheet_marks(sheet: ReadingSheet, pair: Pair) -> tuple[InstrumentMark, ...]:
    """The instruments of `sheet` on `pair` that draw a current, lowest impedance first."""
    rows = [r for r in sheet.rows if r.pair == pair and abs(r.current) > 0 < abs(r.voltage)]
    marks = (
        InstrumentMark(r.instrument.name, abs(r.voltage / r.current), abs(r.voltage),
                       r.reading.text)
        for r in rows
    )
    return tuple(sorted(marks, key=lambda m: m.impedance))


def loading_figure(
    pair: Pair,
    impedances: ArrayLike,
    voltages: ArrayLike,
    marks: Sequence[InstrumentMark],
    band: tuple[ArrayLike, ArrayLike] | None = None,
) -> Figure:
    """The voltage on `pair` against the impedance of what is connected there.

    Parameters
    ----------
    impedances : (k,) [ohm], rising, above 0; 1 kΩ to 1 GΩ is usual
    voltages : (k,) RMS [V]; a complex phasor counts by its magnitude
    marks : the instruments to mark and label
    band : lowest and highest voltages (k,) [V] over the spread of the inputs
    """
    ohms, volts = np.asarray(impedances, dtype=float), np.abs(np.asarray(voltages))
    low, high = (np.abs(np.asarray(edge)) for edge in band) if band else (volts, volts)
    x = log_axis("Impedance of the instrument", "Ω", float(ohms[0]), float(ohms[-1]))
    shown = [m for m in marks if x.low <= m.impedance <= x.high]
    top = max(float(np.max(high)), *(m.voltage for m in shown), 1e-3)
    y = even_axis("Voltage, RMS", "V", 0.0, top)
    where = pair_words(pair.a, pair.b)
    labels = [f"{cut(m.name, 34)}: {m.reading}" for m in shown]
    return Figure(
        key="loading",
        title=f"Reading against instrument impedance: {where}",
        x=x,
        y=y,
        caption=f"Voltage on {where}, against the impedance of the instrument, taken as a "
        f"resistance. {_band_words(band)}Marks: the instruments, each at its own impedance with "
        "its capacitance and inductance, with what it shows.",
        alternative=f"Curve rising from {show(volts[0], 'V')} at {show(x.low, 'Ω')} to "
        f"{show(volts[-1], 'V')} at {show(x.high, 'Ω')}. "
        f"Instruments: {listed(labels) or 'none'}.",
        numbers=tuple(labels),
        bands=(Band(ohms, low, high, RANGE, 0),) if band else (),
        lines=(Line(ohms, volts, "expected", 0),),
        points=_marked(shown),
        notes=_flagged(shown, labels, (x, y), (ohms, volts)),
    )


def _marked(marks: Sequence[InstrumentMark]) -> tuple[Points, ...]:
    return tuple(
        Points(np.array([m.impedance]), np.array([m.voltage]), style=i + 1,
               texts=(f"{m.name}: {m.reading}",))
        for i, m in enumerate(marks)
    )


def _flagged(
    marks: Sequence[InstrumentMark],
    labels: Sequence[str],
    axes: tuple[Axis, Axis],
    curve: tuple[Floats, Floats],
) -> tuple[Note, ...]:
    x, y = axes
    spots = [(x.fraction(m.impedance), y.fraction(m.voltage)) for m in marks]
    across = [x.fraction(v) for v in curve[0]]
    up = [y.fraction(v) for v in curve[1]]
    found = flags(spots, labels, lambda at: float(np.interp(at, across, up)))
    return tuple(_flag_note(f, text, axes) for f, text in zip(found, labels, strict=True))


def _flag_note(flag: Flag, text: str, axes: tuple[Axis, Axis]) -> Note:
    x, y = axes
    return Note(x.value(flag.x), y.value(flag.height), text,
                "right" if flag.leftward else "left", (x.value(flag.x), y.value(flag.y)))


def length_figure(
    pair: Pair,
    lengths: ArrayLike,
    curves: Mapping[str, ArrayLike],
    *,
    length: float,
    band: tuple[ArrayLike, ArrayLike] | None = None,
    customary: bool = False,
) -> Figure:
    """The voltage on `pair` against the length of the run, one curve for each instrument.

    Parameters
    ----------
    lengths : (k,) [m], rising
    curves : instrument's name -> (k,) RMS [V]; complex phasors count by their magnitude
    length : of the run as it is [m]
    band : lowest and highest voltages (k,) [V] of the first curve
    customary : lengths in feet
    """
    if not curves:
        raise Refused("length figure", "needs at least one instrument")
    unit, size = ("ft", FOOT) if customary else ("m", 1.0)
    along = np.asarray(lengths, dtype=float) / size
    volts = {name: np.abs(np.asarray(v)) for name, v in curves.items()}
    edges = tuple(np.abs(np.asarray(edge)) for edge in band) if band else ()
    top = max(float(np.max(v)) for v in (*volts.values(), *edges))
    here = show_length(length, customary=customary)
    at = [f"{name} {show(float(np.interp(length / size, along, v)), 'V')}"
          for name, v in volts.items()]
    where = pair_words(pair.a, pair.b)
    first = next(iter(volts))
    end = show_length(float(along[-1]) * size, customary=customary)
    return Figure(
        key="length",
        title=f"Reading against run length: {where}",
        x=even_axis("Run length", unit, 0.0, float(along[-1])),
        y=even_axis("Voltage, RMS", "V", 0.0, max(top, 1e-3)),
        caption=f"Voltage on {where}, against the length of the run, on each instrument. "
        f"{_band_words(band, f', for {first}')}The run as it is: {here}. A step is a "
        "change of the instrument's range.",
        alternative=f"Curves of voltage over run lengths up to {end}. At {here}: {listed(at)}.",
        numbers=tuple(at),
        bands=(Band(along, edges[0], edges[1], f"{RANGE}, {first}", 0),) if band else (),
        references=(Reference(length / size, "x", f"this run, {here}"),),
        lines=tuple(Line(along, v, name, i) for i, (name, v) in enumerate(volts.items())),
    )


def _band_words(band: object, whose: str = "") -> str:
    return f"Shaded: {RANGE}{whose}. " if band else ""


def sheet_figure(
    sheet: ReadingSheet,
    pairs: Sequence[Pair] | None = None,
    *,
    names: Sequence[str] | None = None,
    key: str = "sheet",
) -> Figure:
    """The reading sheet as a chart: a row for each pair, a marker for each instrument.

    The voltage across each instrument, on a log scale from 10 mV or above; bars run from its
    lowest to its highest reading; hollow markers are indicators that do not light. `pairs`
    chooses the rows, at most 16; all of the sheet's without it. `names` are the words beside
    them, the pairs' own without.
    """
    chosen = tuple(sheet.pairs if pairs is None else pairs)
    if not 0 < len(chosen) <= ROWS:
        raise Refused("sheet figure", f"takes 1 to {ROWS} pairs", given=len(chosen))
    rows = [r for r in sheet.rows if r.pair in chosen]
    x = _sheet_scale(rows)
    height = {p: float(i) for i, p in enumerate(chosen)}
    words = dict(zip(chosen, names or [pair_words(p.a, p.b) for p in chosen], strict=True))
    labels = [cut(w, 44) for w in words.values()]
    ticks = tuple(zip(height.values(), labels, strict=True))
    numbers = tuple(f"{words[r.pair]}, {r.instrument.name}: {r.reading.text}" for r in rows)
    return Figure(
        key=key,
        title="Expected readings",
        x=x,
        y=Axis("", "", -0.6, len(chosen) - 0.4, "even", ticks, turned=True),
        caption="The voltage across each instrument at each pair, RMS, on a log scale. Bars: "
        "lowest to highest reading. Hollow: an indicator that does not light.",
        alternative="Chart of the reading sheet, a row for each pair and a marker for each "
        f"instrument. {'; '.join(numbers)}.",
        numbers=numbers,
        points=tuple(p for i, tool in enumerate(sheet.instruments)
                     for p in _row_points([r for r in rows if r.instrument == tool], i,
                                          len(sheet.instruments), height)),
        aspect=min(1.25, 0.22 + 0.062 * len(chosen) + 0.01 * len(sheet.instruments)),
    )


def _sheet_scale(rows: Sequence[SheetRow]) -> Axis:
    """From the decade below the lowest voltage, 10 mV at least, to above the highest."""
    volts = [edge for r in rows for edge in (*_ends(r), abs(r.voltage))]
    lowest = max(FLOOR, 10.0 ** math.floor(math.log10(max(min(volts), FLOOR)) + 1e-9))
    lowest = min(lowest, 0.1)
    axis = log_axis("Voltage, RMS", "V", lowest * 0.8, max(1.3 * max(volts), 1.0))
    floored = f"≤ {lowest:g}" if min(abs(r.voltage) for r in rows) < lowest else f"{lowest:g}"
    return replace(axis, ticks=((lowest, floored), *axis.ticks[1:]))


def _row_points(
    rows: Sequence[SheetRow], style: int, count: int, height: Mapping[Pair, float]
) -> list[Points]:
    """One instrument's markers, set off a little from its row so that equal ones stay apart."""
    offset = 0.66 * (style / (count - 1) - 0.5) if count > 1 else 0.0
    made: list[Points] = []
    for hollow in (False, True):
        group = [r for r in rows if r.reading.text.startswith("not ") == hollow]
        if not group:
            continue
        low, high = np.transpose([_ends(r) for r in group])
        made.append(Points(
            np.array([max(abs(r.voltage), FLOOR) for r in group]),
            np.array([height[r.pair] + offset for r in group]),
            rows[0].instrument.name if not made else "", style,
            tuple(f"{r.instrument.name}: {r.reading.text}" for r in group), low, high, hollow))
    return made


def _ends(row: SheetRow) -> tuple[float, float]:
    """The row's range of readings, floored; its voltage alone where a reading is no number."""
    ends = [e.value if _finite(e.value) else abs(row.voltage) for e in (row.low, row.high)]
    return max(min(ends), FLOOR), max(*ends, FLOOR)


def _finite(value: float | None) -> bool:
    return value is not None and bool(np.isfinite(value))
