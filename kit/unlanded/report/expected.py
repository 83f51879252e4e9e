"""The expected readings as the memo gives them."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from typing import Any

import numpy as np

from ..study.readings import Pair, ReadingSheet, SheetRow, length_curve, loading_curve
from ..units import show
from .figure import Figure
from .figures import length_figure, loading_figure, sheet_marks
from .investigation import Investigation
from .memo import Block, Paragraph, Part
from .tables import Column, Table
from .words import pair_words

INSTRUMENTS = 9  # columns of readings that a page holds


def expected_finding(investigation: Investigation) -> list[str]:
    """What to expect on the pair that matters most, with its numbers."""
    sheet = investigation.sheet
    pair = main_pair(sheet)
    if pair is None:
        return ["On every pair all instruments show nearly the same: no pair is fed only "
                "through the capacitance of the run.", *_residual_sentence(sheet)]
    return [*_pair_sentences(sheet, pair), *_residual_sentence(sheet)]


def expected_part(investigation: Investigation) -> Part:
    """Every expected reading, and the pictures of the pair that matters most."""
    figures: list[Figure] = []
    if pair := main_pair(investigation.sheet):
        figures = [_loading(investigation, pair), _length(investigation, pair)]
    return readings_part(investigation.sheet, figures)


def _loading(investigation: Investigation, pair: Pair) -> Figure:
    ohms = np.geomspace(1e3, 1e9, 121)
    expected, *ends = (loading_curve(run, pair, ohms) for run in investigation.runs)
    band = np.min([expected, *ends], axis=0), np.max([expected, *ends], axis=0)
    return loading_figure(pair, ohms, expected, sheet_marks(investigation.sheet, pair), band)


def _length(investigation: Investigation, pair: Pair) -> Figure:
    run = investigation.run
    lengths = np.linspace(run.length / 40, 2 * run.length, 41)
    tools = [t for t in investigation.instruments if t.kind in ("digital", "analogue")][:4]
    curves = {t.name: length_curve(run, pair, t, lengths) for t in tools}
    return length_figure(pair, lengths, curves, length=run.length,
                         customary=investigation.customary)


def main_pair(sheet: ReadingSheet) -> Pair | None:
    """The pair that the memo is about: the highest unloaded voltage that an instrument pulls down.

    Pulled down is to less than half; pairs with earth go before others; None where there is none.
    """
    pulled = [r for r in sheet.rows if abs(r.unloaded) > 0
              and abs(r.voltage) < 0.5 * abs(r.unloaded)]
    best = max(pulled, key=lambda r: ("earth" in (r.pair.a, r.pair.b), abs(r.unloaded)),
               default=None)
    return best.pair if best else None


def _pair_sentences(sheet: ReadingSheet, pair: Pair) -> list[str]:
    rows = sorted((r for r in sheet.rows if r.pair == pair and abs(r.current) > 0),
                  key=lambda r: abs(r.voltage))
    least, most = rows[0], rows[-1]
    where = pair_words(pair.a, pair.b)
    said = [
        f"On {where}, the unloaded voltage is {show(abs(most.unloaded), 'V')} behind a "
        f"capacitance of {show(most.source_capacitance, 'F')}, which can drive "
        f"{show(abs(most.unloaded / most.source_impedance), 'A')} through a short circuit.",
        f"If all is as described, {_tool(most)} shows {most.reading.text}, "
        f"{_range_words(most)}, and {_tool(least)} shows {least.reading.text}, "
        f"{_range_words(least)}.",
    ]
    if len(rows) > 1:
        said.append("Both together are what capacitive coupling looks like; a reading that stays "
                    "up on the instrument of low impedance is not explained by it.")
    return said


def _residual_sentence(sheet: ReadingSheet) -> list[str]:
    worst = max(sheet.rows, key=lambda r: abs(r.residual_added), default=None)
    if worst is None or abs(worst.residual_added) == 0:
        return []
    return [f"What a measurement adds to the residual current is at most "
            f"{show(abs(worst.residual_added), 'A')}, with {_tool(worst)} on "
            f"{pair_words(worst.pair.a, worst.pair.b)}."]


def _tool(row: SheetRow) -> str:
    return f"the instrument “{row.instrument.name}”"


def _range_words(row: SheetRow) -> str:
    if row.low.text == row.high.text:
        return "over the whole range of the inputs"
    return f"between {row.low.text} and {row.high.text} over the range of the inputs"


def readings_part(sheet: ReadingSheet, figures: Sequence[Figure] = ()) -> Part:
    """Every expected reading, end by end, what stands behind each pair, and the pictures."""
    blocks: list[Block] = [
        Paragraph("Each reading is as the instrument would round it; in brackets its lowest and "
                  "highest over the range of the inputs, where they differ. “OL”: over range. "
                  "“Not lit” says only that the voltage is below the indicator's threshold."),
    ]
    for end, pairs in _ends(sheet.pairs).items():
        groups = range(0, len(sheet.instruments), INSTRUMENTS)
        blocks += [_readings(sheet, end, pairs, i, sheet.instruments[start:start + INSTRUMENTS])
                   for i, start in enumerate(groups, 1)]
        blocks.append(_behind(sheet, end, pairs))
    return Part("Expected readings", (*blocks, *figures))


def _ends(pairs: Iterable[Pair]) -> dict[str, list[Pair]]:
    found: dict[str, list[Pair]] = {}
    for pair in pairs:
        ends = {p.rpartition("@")[2] for p in (pair.a, pair.b) if "@" in p}
        name = f"{ends.pop()} end" if len(ends) == 1 else "supply and between the ends"
        found.setdefault(name, []).append(pair)
    return found


def _readings(
    sheet: ReadingSheet, end: str, pairs: Sequence[Pair], part: int, tools: Sequence[Any]
) -> Table:
    cells = {(r.pair, r.instrument.key): _cell(r) for r in sheet.rows}
    more = f", {part}" if part > 1 else ""
    return Table(
        f"readings-{end.replace(' ', '-')}{f'-{part}' if part > 1 else ''}",
        f"Expected readings, {end}{more}.",
        (Column("Pair"), *(Column(t.name, "", "right") for t in tools)),
        tuple((pair_words(p.a, p.b, end="end" not in end),
               *(cells.get((p, t.key), "–") for t in tools)) for p in pairs),
    )


def _cell(row: SheetRow) -> str:
    same = row.low.text == row.high.text == row.reading.text
    return row.reading.text if same else f"{row.reading.text} ({row.low.text} … {row.high.text})"


def _behind(sheet: ReadingSheet, end: str, pairs: Sequence[Pair]) -> Table:
    first: dict[Pair, SheetRow] = {}
    for row in sheet.rows:
        first.setdefault(row.pair, row)
    rows = tuple(
        (pair_words(p.a, p.b, end="end" not in end), show(abs(r.unloaded), "V"),
         show(abs(r.source_impedance), "Ω"), _most_residual(sheet, p), r.remark)
        for p in pairs if (r := first.get(p)) is not None
    )
    return Table(
        f"behind-{end.replace(' ', '-')}", f"What stands behind each pair, {end}.",
        (Column("Pair"), Column("Unloaded", "", "right"), Column("Source impedance", "", "right"),
         Column("Adds to residual", "", "right"), Column("Remark")), rows,
        "Adds to residual: the most that any of the instruments adds to the residual current.")


def _most_residual(sheet: ReadingSheet, pair: Pair) -> str:
    return show(max(abs(r.residual_added) for r in sheet.rows if r.pair == pair), "A")


def sheet_results(sheet: ReadingSheet) -> list[Mapping[str, Any]]:
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
        for r in sheet.rows
    ]
