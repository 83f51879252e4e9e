"""The reading sheet shortened for a reader: pairs that no instrument tells apart on one line."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass

from ..errors import listed
from ..physics.network import EARTH
from ..reference.instruments import Instrument, Shown
from ..study.readings import STIFF, Pair, ReadingSheet, SheetRow
from .words import pair_words, point_words


@dataclass(frozen=True)
class SheetLine:
    """Pairs with one conductor in common, and the sheet's rows of the first and of the others.

    Parameters
    ----------
    pairs : at least one
    rows : of all of them, pair by pair
    """

    pairs: tuple[Pair, ...]
    rows: tuple[SheetRow, ...]

    @property
    def first(self) -> SheetRow:
        """The row that speaks for the line."""
        return self.rows[0]

    @property
    def name(self) -> str:
        """The pairs in words, without their ends: "black to earth or blue"."""
        pairs = [_bases(p) for p in self.pairs]
        common = next((c for c in pairs[0] if all(c in p for p in pairs)), pairs[0][0])
        others = dict.fromkeys(next((x for x in p if x != common), common) for p in pairs)
        return f"{common} to {listed(list(others), 'or')}"

    @property
    def end(self) -> str:
        """"near end", "far end", "both ends" where it makes no difference, "between the ends"."""
        ends = {p.rpartition("@")[2] for pair in self.pairs for p in (pair.a, pair.b) if "@" in p}
        across = any(len({p.rpartition("@")[2] for p in (q.a, q.b) if "@" in p}) > 1
                     for q in self.pairs)
        return ("between the ends" if across else "both ends" if len(ends) != 1
                else f"{ends.pop()} end")

    @property
    def place(self) -> str:
        """The pairs and their end in words, for a title or a sentence."""
        if len(self.pairs) == 1:
            return pair_words(self.pairs[0].a, self.pairs[0].b)
        return f"{self.name}, {self.end.replace('both ends', 'either end')}"

    @property
    def to_earth(self) -> bool:
        """Whether one of the pairs is with earth."""
        return any(EARTH in (p.a, p.b) for p in self.pairs)

    @property
    def pulled(self) -> bool:
        """Whether an instrument changes the voltage that it is to measure."""
        return any(abs(r.voltage) < (1 - STIFF) * abs(r.unloaded) for r in self.rows)

    @property
    def residual_added(self) -> float:
        """The most that an instrument on any of the pairs adds to the residual current [A]."""
        return max(abs(r.residual_added) for r in self.rows)

    @property
    def short_circuit(self) -> float:
        """Current that the pair drives through no resistance [A]; NaN on a pair at one potential.

        It is infinite from a source without impedance.
        """
        volts, ohms = abs(self.first.unloaded), abs(self.first.source_impedance)
        return math.nan if not volts else volts / ohms if ohms else math.inf

    def on(self, tool: Instrument) -> tuple[SheetRow, ...]:
        """The rows of one instrument; none where it cannot be used."""
        return tuple(r for r in self.rows if r.instrument.key == tool.key)

    def reading(self, tool: Instrument, unit: str = "") -> str:
        """What the instrument shows with its band, a number's unit as asked: "0.9 (0.3 … 1.6)"."""
        rows = self.on(tool)
        if not rows:
            return "–"
        return shown_words(rows[0].reading, [r.low for r in rows], [r.high for r in rows], unit)


def sheet_lines(sheet: ReadingSheet, *, merged: bool = True) -> tuple[SheetLine, ...]:
    """The sheet's lines, those first that an instrument pulls down; each pair alone if not merged.

    Pairs are merged where they have a conductor in common and every instrument reads them alike,
    to within its own accuracy or 2 %.
    """
    rows: dict[Pair, list[SheetRow]] = {}
    for row in sheet.rows:
        rows.setdefault(row.pair, []).append(row)
    found: list[list[Pair]] = []
    for pair in rows:
        homes = (line for line in found if merged and _belongs(pair, line, rows))
        if (home := next(homes, None)) is None:
            found.append([pair])
        else:
            home.append(pair)
    lines = (SheetLine(tuple(ps), tuple(r for p in ps for r in rows[p])) for ps in found)
    return tuple(sorted(lines, key=lambda line: not line.pulled))


def shown_words(
    reading: Shown, lows: Sequence[Shown], highs: Sequence[Shown], unit: str = ""
) -> str:
    """A reading and its band in brackets, the band with as many digits as its width deserves.

    >>> a, b, c = (Shown(f"{v:.3f} V", v, 0.1) for v in (101.139, 96.329, 104.717))
    >>> shown_words(a, [b], [c]).replace("\\u00a0", " ")
    '101.139 (96.3 … 104.7)'
    """
    low, high = min(lows, key=_order), max(highs, key=_order)
    if not all(math.isfinite(s.value) for s in (reading, low, high)):
        return _either(reading.text, low.text, high.text)
    decimals = len(reading.text.removesuffix(" V").partition(".")[2])
    if (width := high.value - low.value) > 0:
        decimals = max(0, min(decimals, 1 - math.floor(math.log10(width) + 1e-9)))
    text = reading.text.removesuffix(" V") + (f" {unit}" if unit else "")
    ends = f"{low.value:.{decimals}f} … {high.value:.{decimals}f}{f' {unit}' if unit else ''}"
    return text if low.text == high.text else f"{text} ({ends.replace(' ', chr(0xA0))})"


def _either(reading: str, low: str, high: str) -> str:
    """Words of a lamp, over range, or another quantity."""
    lamp = {"lit", "not lit"}
    other = next((t for t in (low, high) if t != reading), None)
    if other is None:
        return reading
    if {reading, low, high} <= lamp:
        return f"{reading} (or {other})"
    return f"{reading} ({low} … {high})"


def _order(shown: Shown) -> tuple[float, str]:
    """By value; words by what less voltage shows: "lit" comes before "not lit" as text."""
    return (shown.value if not math.isnan(shown.value) else 0.0, "" if "not" in shown.text else "x")


def _bases(pair: Pair) -> tuple[str, str]:
    a, b = (p.rpartition("@")[0] if "@" in p else point_words(p) for p in (pair.a, pair.b))
    return a, b


def _belongs(
    pair: Pair, line: Sequence[Pair], rows: Mapping[Pair, Sequence[SheetRow]]
) -> bool:
    common = set(_bases(pair)).intersection(*map(_bases, line))
    if not common:
        return False
    first = {r.instrument.key: r for r in rows[line[0]]}
    return all(_alike(r, first[r.instrument.key]) for r in rows[pair]
               if r.instrument.key in first)


def _alike(a: SheetRow, b: SheetRow) -> bool:
    if a.instrument.kind == "body":
        currents = abs(a.current), abs(b.current)
        return abs(currents[0] - currents[1]) <= STIFF * max(currents)
    values = a.reading.value, b.reading.value
    if all(map(math.isfinite, values)):
        allowed = max(a.reading.half_width, b.reading.half_width, STIFF * max(values))
        return abs(values[0] - values[1]) <= allowed
    return (a.reading.text, a.low.text, a.high.text) == (b.reading.text, b.low.text, b.high.text)
