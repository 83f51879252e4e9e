"""What a memo on expected readings says: parts made from study results, as data."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from typing import TYPE_CHECKING, Any

import numpy as np

from ..physics.section import Pipe, Plane
from ..study.ends import Bonded, Driven, Joined, Open, Through
from ..units import show, show_length
from .figure import Figure
from .memo import Block, Bullets, Caution, Paragraph, Part, Verbatim
from .tables import Column, Table
from .words import listed, pair_words, point_words

if TYPE_CHECKING:
    from ..physics.section import Section
    from ..reference.records import Source
    from ..study.ends import Termination
    from ..study.readings import Pair, ReadingSheet, SheetRow
    from ..study.run import Run
    from ..study.supply import Supply

INSTRUMENTS = 9  # columns of readings that a page holds

CAUTION = (
    "This is a calculation from a description of the circuit. It never proves a conductor dead, "
    "and no reading in it does.",
    "Prove dead at the point of work, with an instrument made for it that is proved on a known "
    "source before and after. A non-contact detector is not enough.",
    "A low reading on a low-impedance instrument can also come from a weak but real source. A "
    "capacitive source can still give a shock; the current it can drive is in this memo.",
    "Local codes and licensed practice govern. Tests on energised equipment are for qualified "
    "persons only.",
    "A reading outside the ranges given here means that the circuit is not as described. Find "
    "out why before going on.",
)


def caution_part() -> Part:
    """The caution that stands in every memo."""
    return Part("Caution", (Caution("Before anybody relies on this", CAUTION),))


def summary_part(run: Run, sheet: ReadingSheet, *, customary: bool = False) -> Part:
    """What to expect, in a few sentences with the numbers."""
    words = [f"The run is {show_length(run.length, customary=customary)} long, supplied at "
             f"{_supply_words(run.supply)}; {_open_words(run)}."]
    pair = main_pair(sheet)
    if pair is None:
        words.append("On every pair all instruments show nearly the same: no pair is fed only "
                     "through the capacitance of the run.")
    else:
        words += _pair_sentences(sheet, pair)
    words += _residual_sentence(sheet)
    return Part("Summary", (Paragraph(" ".join(words)),))


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


def circuit_part(
    run: Run,
    capacitance: np.ndarray,
    figures: Sequence[Figure] = (),
    *,
    customary: bool = False,
) -> Part:
    """The run as computed: ends, capacitance matrix (n, n) [F/m], pictures."""
    text = (f"A run of {show_length(run.length, customary=customary)}, {_surround(run.section)}. "
            f"Supply: {_supply_words(run.supply)}.")
    return Part("The circuit", (Paragraph(text), conductor_table(run),
                                capacitance_table(run.section, capacitance), *figures))


def conductor_table(run: Run) -> Table:
    """Each conductor with its dimensions and what is done with its ends."""
    columns = (Column("Conductor"), Column("Metal", "mm", "right"), Column("Cover", "mm", "right"),
               Column("Permittivity", "", "right"), Column("Near end"), Column("Far end"))
    rows = tuple(
        (c.name, f"{2e3 * c.radius:.3g}", f"{2e3 * c.outer:.3g}" if c.outer > c.radius else "bare",
         f"{c.cover_permittivity:.3g}" if c.outer > c.radius else "–",
         termination_words(run.near[c.name]), termination_words(run.far[c.name]))
        for c in run.section.conductors
    )
    return Table("conductors", "Conductors, outside diameters of metal and cover, and ends.",
                 columns, rows)


def capacitance_table(section: Section, capacitance: np.ndarray) -> Table:
    """The Maxwell matrix in pF/m."""
    columns = (Column("pF/m"), *(Column(name, "", "right") for name in section.names))
    rows = tuple(
        (name, *(_fixed(value * 1e12) for value in row))
        for name, row in zip(section.names, capacitance, strict=True)
    )
    return Table(
        "capacitance", "Capacitance per metre, as the Maxwell matrix.", columns, rows,
        "On the diagonal: a conductor to all others and the surround. Off it, with the sign "
        "turned: directly between two conductors.",
    )


def _fixed(value: float) -> str:
    """Four digits, not below a hundredth: sums of a row should be seen to agree."""
    size = abs(value)
    text = f"{value:.{0 if size >= 1000 else 1 if size >= 100 else 2}f}"
    return "0" if float(text) == 0 else text.replace("-", "−")


def termination_words(end: Termination) -> str:
    """What is done with a conductor at one end."""
    match end:
        case Driven():
            return f"fed by {end.phase}"
        case Bonded():
            return f"bonded to {end.to}"
        case Joined():
            return f"joined to {end.other}"
        case Through():
            return f"{end.label} to {point_words(end.to)}"
        case Open():
            return "open"


def _open_words(run: Run) -> str:
    loose = [n for n in run.section.names
             if isinstance(run.near[n], Open) and isinstance(run.far[n], Open)]
    if not loose:
        return "no conductor is open at both ends"
    return f"{listed(loose)} {'is' if len(loose) == 1 else 'are'} open at both ends"


def _supply_words(supply: Supply) -> str:
    live = {1: "", 2: ", two lines in opposite phase", 3: ", three phases"}[supply.phases]
    return f"{show(supply.voltage, 'V')} line to neutral, {show(supply.frequency, 'Hz')}{live}"


def _surround(section: Section) -> str:
    if isinstance(section.surround, Pipe):
        return "in an earthed metal pipe or screen"
    return "on an earthed surface" if isinstance(section.surround, Plane) else "in open air"


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


def assumptions_part(lines: Sequence[str]) -> Part:
    """What was taken for granted, one sentence a line."""
    return Part("Assumptions", (Bullets(tuple(lines)),))


def sources_part(sources: Iterable[Source]) -> Part:
    """The sources of the values used, each once."""
    words = tuple(dict.fromkeys(str(s) for s in sources))
    note = Paragraph("“From memory” marks a value recalled and still to be checked against its "
                     "source; “common practice” one of the trade, with no source.")
    return Part("Sources", (note, Bullets(words)) if words else (
        Paragraph("Every value came from the case itself."),))


def case_part(text: str, fingerprint: str, command: str) -> Part:
    """The case as it was read, and how every number is rebuilt from it."""
    return Part("The case", (
        Paragraph("The case file as it was read. Its fingerprint is the SHA-256 of its bytes: "
                  f"{fingerprint}"),
        Verbatim(text),
        Paragraph("This command rebuilds every number, table and picture here from that file:"),
        Verbatim(command),
    ))


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
