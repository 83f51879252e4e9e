"""The expected readings as the memo and the terminal give them."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from typing import Any

import numpy as np

from ..reference.instruments import Instrument
from ..study.banded import length_band, loading_band, voltage_band
from ..study.ends import Open, Through
from ..study.readings import Pair, ReadingSheet, loading_curve, ports_along, voltages_across
from ..units import FOOT, show
from .figure import Figure, even_axis
from .figures import length_figure, loading_figure, sheet_figure, sheet_marks
from .investigation import Investigation
from .memo import Block, Paragraph, Part
from .sheet_lines import SheetLine, sheet_lines
from .tables import Column, Table
from .words import point_words, tool_words

INSTRUMENTS = 6  # columns of readings that a page holds
LINES = 16  # of a table in the text; longer ones keep the pairs with earth, the annex the rest
ANNEX = 40  # of an annex; longer ones are only in sheet.csv
BANDED = 13  # lengths of the shaded band
UNFED = 8  # of the summary's table
CHARTED = 10  # lines on the chart
NEGLIGIBLE = 1e-6  # amperes: less is said to be less

_HOW_TO_READ = (
    "Each reading is as the instrument would round it; in brackets the range it may lie in over "
    "what is not known of the inputs, the tolerance of the instrument's own impedance and its "
    "accuracy, where the ends differ from it. Pairs that every instrument reads alike, to within "
    "2 % or its accuracy, share a line; those that an instrument pulls down come first. “OL” is "
    "over range; “not lit” says only that the voltage is below the indicator's threshold."
)


def expected_finding(investigation: Investigation) -> list[Block]:
    """What to expect on the conductors that nothing feeds, in sentences with numbers."""
    main = main_line(investigation)
    if main is None:
        return [Paragraph("No instrument changes the voltage on any pair: all of them show nearly "
                          "the same, and no pair is fed only through the capacitance of the run.")]
    found: list[Block] = [Paragraph(_line_sentences(main))]
    others = [line for line in investigation.lines if line.pulled and line.to_earth]
    if len(others) > 1:
        found.append(_unfed_table(others, investigation))
    if words := [w for end in ("near", "far") for w in _load_sentences(investigation, end)]:
        found.append(Paragraph(" ".join(words)))
    return [*found, Paragraph(_residual_sentences(investigation))]


def expected_part(investigation: Investigation) -> Part:
    """The expected readings, and the pictures of the line that matters most."""
    lines, rest = _shared_out(investigation)
    blocks: list[Block] = [Paragraph(f"{_HOW_TO_READ} {_rest_words(rest)}"),
                           *_tables(lines, investigation.instruments, "", "")]
    charted = [line for line in lines if line.pulled][:CHARTED]
    if charted:
        names = [line.name for line in charted]
        if len(set(names)) < len(names):
            names = [line.place for line in charted]
        blocks.append(sheet_figure(investigation.sheet, [line.first.pair for line in charted],
                                   names=names))
    if main := main_line(investigation):
        blocks.append(_loading(investigation, main))
        if _meters(investigation):
            blocks.append(_length(investigation, main))
    return Part("Expected readings", tuple(blocks))


def annex_part(investigation: Investigation) -> Part | None:
    """The lines that the text has no room for; None where there are none, or too many."""
    _, lines = _shared_out(investigation)
    if not 0 < len(lines) <= ANNEX:
        return None
    return Part("Annex: readings on the other pairs",
                _tables(lines, investigation.instruments, "annex-", ", pairs without earth"))


def main_line(investigation: Investigation) -> SheetLine | None:
    """The line that the memo is about; None where no instrument pulls a pair down.

    That is where a reading was taken, else the highest unloaded voltage that an instrument pulls
    down to less than half; pairs with earth go before others.
    """
    pulled = [line for line in investigation.lines if line.pulled]
    for taken in investigation.case.content.readings:
        for line in pulled:
            if any({taken.a, taken.b} == {p.a, p.b} for p in line.pairs):
                return line
    return max(pulled, default=None, key=lambda line: (
        min(abs(r.voltage) for r in line.rows) < 0.5 * abs(line.first.unloaded),
        line.to_earth, abs(line.first.unloaded)))


def sheet_tables(sheet: ReadingSheet) -> tuple[Table, ...]:
    """The whole sheet, every pair by itself, end by end."""
    lines = sheet_lines(sheet, merged=False)
    ends = dict.fromkeys(line.end for line in lines)
    return tuple(
        table for end in ends
        for table in _tables([line for line in lines if line.end == end], sheet.instruments,
                             f"{end.replace(' ', '-')}-", f", {end}"))


def sheet_results(investigation: Investigation) -> list[Mapping[str, Any]]:
    """The sheet's rows for results.json; each key names its unit."""
    return [
        {
            "pair": [r.pair.a, r.pair.b],
            "instrument": r.instrument.key,
            "reading": r.reading.text,
            "lowest_reading": r.low.text,
            "highest_reading": r.high.text,
            "unloaded_V": r.unloaded,
            "voltage_V": r.voltage,
            "current_A": r.current,
            "residual_added_A": r.residual_added,
            "source_impedance_ohm": r.source_impedance,
            "source_capacitance_F": r.source_capacitance,
            "loading_error": r.loading_error,
            "remark": r.remark,
        }
        for r in investigation.sheet.rows
    ]


def _shared_out(investigation: Investigation) -> tuple[list[SheetLine], list[SheetLine]]:
    """The lines of the text, and the rest."""
    lines = list(investigation.lines)
    if len(lines) <= LINES:
        return lines, []
    return [x for x in lines if x.to_earth], [x for x in lines if not x.to_earth]


def _rest_words(rest: Sequence[SheetLine]) -> str:
    if not rest:
        return "Every pair by itself is in sheet.csv."
    annex = "are in the annex" if len(rest) <= ANNEX else "would fill many pages"
    return (f"The tables have the pairs with earth; {len(rest)} more lines {annex}. Every pair by "
            "itself is in sheet.csv.")


def _line_sentences(line: SheetLine) -> str:
    row = line.first
    behind = (f"a capacitance of {show(row.source_capacitance, 'F')}"
              if not math.isnan(row.source_capacitance)
              else f"an impedance of {show(abs(row.source_impedance), 'Ω')}")
    said = [f"With no instrument connected, {line.place}, carries {show(abs(row.unloaded), 'V')} "
            f"behind {behind}, which can drive {show(line.short_circuit, 'A')} through a short "
            "circuit."]
    rows = sorted((r for r in line.rows if r.pair == row.pair and abs(r.current) > 0),
                  key=lambda r: abs(r.voltage))
    if len(rows) > 1:
        most, least = rows[-1].instrument, rows[0].instrument
        said.append(f"If all is as described, the {tool_words(most.name)} shows "
                    f"{line.reading(most, 'V')}, and the {tool_words(least.name)} "
                    f"{line.reading(least, 'V')}.")
    if len(rows) > 1 and not math.isnan(row.source_capacitance):
        said.append("Both together are what capacitive coupling looks like; a reading that stays "
                    "up on the instrument of low impedance is not explained by it.")
    return " ".join(said)


def _unfed_table(lines: Sequence[SheetLine], investigation: Investigation) -> Table:
    tools = _meters(investigation)
    ends = dict.fromkeys((*tools[:1], *tools[-1:]))
    return Table(
        "unfed", "Conductors that nothing feeds, to earth.",
        (Column("Pair"), Column("Unloaded", "", "right"), Column("Can drive", "", "right"),
         *(Column(t.name, "V", "right") for t in ends)),
        tuple((f"{line.name}, {line.end}", show(abs(line.first.unloaded), "V"),
               show(line.short_circuit, "A"), *(line.reading(t) for t in ends))
              for line in lines[:UNFED]),
        "Can drive: the current through a short circuit."
        + (f" {len(lines) - UNFED} more are among the expected readings."
           if len(lines) > UNFED else ""))


def _meters(investigation: Investigation) -> list[Instrument]:
    """The instruments that show a number of volts, highest impedance first."""
    frequency = investigation.run.frequency
    return sorted((t for t in investigation.instruments if t.kind in ("digital", "analogue")),
                  key=lambda t: abs(complex(t.ranges[-1].burden.admittance(frequency))))


def _load_sentences(investigation: Investigation, end: str) -> list[str]:
    """The voltage across each load on a conductor that nothing feeds."""
    run = investigation.run
    idle = (Open, Through)
    found = []
    for name, t in getattr(run, end).items():
        if not (isinstance(t, Through) and isinstance(run.near[name], idle)
                and isinstance(run.far[name], idle)):
            continue
        to = f"{t.to}@{end}" if t.to in run.names else t.to
        low, high = voltage_band(investigation.uncertain, Pair(f"{name}@{end}", to))
        found.append(f"The {t.label}, from {name} to {point_words(t.to)}, has "
                     f"{show(abs(run.voltage(f'{name}@{end}', to)), 'V')} ({show(low, 'V')} to "
                     f"{show(high, 'V')}) across it, although nothing feeds it.")
    return found


def _residual_sentences(investigation: Investigation) -> str:
    said = (f"The run by itself sends {show(abs(investigation.run.residual), 'A')} back by earth, "
            "which a residual-current device in front of it sees.")
    line = max(investigation.lines, key=lambda x: x.residual_added)
    worst = max(line.rows, key=lambda r: abs(r.residual_added))
    return (f"{said} The most that a measurement adds to that is "
            f"{show(line.residual_added, 'A')}, by the {tool_words(worst.instrument.name)} on "
            f"{line.name}.")


def _tables(
    lines: Sequence[SheetLine], tools: Sequence[Instrument], key: str, what: str
) -> tuple[Table, ...]:
    """What every instrument shows, in tables as wide as a page, and what stands behind it."""
    count = math.ceil(len(tools) / INSTRUMENTS)
    size = math.ceil(len(tools) / count)
    parts = [tools[i:i + size] for i in range(0, len(tools), size)]
    numbered = [f", {i} of {count}" if count > 1 else "" for i in range(1, count + 1)]
    return (*(_readings(lines, part, f"{key}readings{f'-{i}' if count > 1 else ''}",
                        f"Expected readings{what}{number}.")
              for i, (part, number) in enumerate(zip(parts, numbered, strict=True), 1)),
            _behind(lines, f"{key}behind", f"What stands behind each pair{what}."))


def _readings(
    lines: Sequence[SheetLine], tools: Sequence[Instrument], key: str, caption: str
) -> Table:
    units = {t.key: "V" if t.kind in ("digital", "analogue") else "" for t in tools}
    return Table(
        key, caption,
        (Column("Pair"),
         *(Column(t.name, units[t.key], "right" if units[t.key] else "left") for t in tools)),
        tuple((f"{line.name}\n{line.end}", *(line.reading(t).replace(" (", "\n(") for t in tools))
              for line in lines))


def _behind(lines: Sequence[SheetLine], key: str, caption: str) -> Table:
    rows = tuple(
        (f"{line.name}\n{line.end}", show(abs(line.first.unloaded), "V"),
         show(abs(line.first.source_impedance), "Ω"), _amperes(line.short_circuit),
         _amperes(line.residual_added), line.first.remark)
        for line in lines
    )
    return Table(
        key, caption,
        (Column("Pair"), Column("Unloaded", "", "right"),
         Column("Source", "", "right"), Column("Can drive", "", "right"),
         Column("Adds to residual", "", "right"), Column("Remark")), rows,
        "Source: the impedance behind the pair. Can drive: the current through a short circuit at "
        "the pair. Adds to residual: the most that an instrument on one of the pairs adds.")


def _amperes(value: float) -> str:
    if not math.isfinite(value):
        return "–"
    return show(value, "A") if value >= NEGLIGIBLE or not value else f"< {show(NEGLIGIBLE, 'A')}"


def _loading(investigation: Investigation, line: SheetLine) -> Figure:
    pair, ohms = line.first.pair, np.geomspace(1e3, 1e9, 121)
    return loading_figure(pair, ohms, loading_curve(investigation.run, pair, ohms),
                          sheet_marks(investigation.sheet, pair),
                          loading_band(investigation.uncertain, pair, ohms))


def _length(investigation: Investigation, line: SheetLine) -> Figure:
    run, pair = investigation.run, line.first.pair
    unit = FOOT if investigation.customary else 1.0
    longest = unit * even_axis("", "", 0.0, 1.8 * run.length / unit).high
    lengths = longest * np.linspace(0.1, 1.0, 60) ** 2  # closest where the curves are steepest
    ports = ports_along(run, pair, lengths)
    curves = {t.name: voltages_across(t, ports, frequency=run.frequency)
              for t in _meters(investigation)[:4]}
    few = np.linspace(lengths[0], lengths[-1], BANDED)
    low, high = length_band(investigation.uncertain, pair, _meters(investigation)[0], few)
    return length_figure(pair, lengths, curves, length=run.length,
                         band=(np.interp(lengths, few, low), np.interp(lengths, few, high)),
                         customary=investigation.customary)
