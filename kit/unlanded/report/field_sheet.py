"""The sheet to take to site: what to measure, in which order, what to expect, and room to write."""

from __future__ import annotations

import datetime
import math
from collections.abc import Iterator
from dataclasses import dataclass

from ..case.observed import COLUMNS, case_suspects
from ..errors import Refused
from ..physics.network import EARTH
from ..study.causes import explain
from ..study.next_reading import RISK, Candidate, next_readings
from ..study.readings import Pair, SheetRow
from ..study.reduced import Reduced, free_conductors
from .causes import headroom
from .investigation import Investigation
from .margin_figures import per_cent
from .memo import Bullets, Caution, Memo, Paragraph, Part
from .sheet_lines import shown_words
from .tables import Column, Table
from .words import pair_words

PROVE = "Prove the instrument on a known source"
CAUTION = (
    "Prove, test, prove: prove each instrument on a known source before the first reading and "
    "after the last one. A reading between two proofs that failed is no reading.",
    "No reading on this sheet proves a conductor dead. Work only after the local rules for that "
    "have been followed.",
    "Qualified persons only, with instruments and leads rated for the place. Keep fingers behind "
    "the guards.",
    "A reading outside its band means that the circuit is not as described: stop, and find out.",
)


@dataclass(frozen=True)
class Step:
    """One reading to take: what to expect, and the chance that it trips the device if the
    conductor is not what it is taken for."""

    row: SheetRow
    trip_chance: float

    @property
    def risky(self) -> bool:
        """Whether it comes last, after a light instrument has shown no connection."""
        return self.trip_chance > RISK


def steps(investigation: Investigation) -> tuple[Step, ...]:
    """The readings to take, end by end; what hardly loads first, what could trip the device last.

    Every instrument of the sheet on every conductor that nothing feeds, to earth and to a live
    conductor at the same end.
    """
    run = investigation.run
    named = {*case_suspects(investigation.case.content, run), *free_conductors(run)}
    suspects = tuple(n for n in run.names if n in named)
    if not suspects:
        raise Refused("field sheet", "needs a conductor that nothing feeds")
    rows: list[SheetRow] = []
    room = headroom(investigation)
    chances: dict[tuple[str, Pair], float] = {}
    for suspect in suspects:  # each by itself: before any reading they tell nothing of each other
        reduced = Reduced(run, investigation.low, investigation.high, (suspect,))
        live = reduced.live_conductors()[:1]
        own = [r for r in investigation.sheet.rows if _wanted(r.pair, suspect, live)]
        candidates = {(r.instrument.key, r.pair): Candidate(r.instrument, r.pair) for r in own}
        ranked = next_readings(explain(reduced, ()), list(candidates.values()),
                               non_operating=room)
        chances |= {(p.candidate.instrument.key, p.candidate.pair): p.trip_chance for p in ranked}
        rows += own
    made = [Step(r, chances[r.instrument.key, r.pair]) for r in rows]
    return tuple(sorted(made, key=lambda s: (s.row.pair.a.endswith("far"), s.risky,
                                             _load(s.row), s.row.pair.b != EARTH)))


def _wanted(pair: Pair, suspect: str, live: tuple[str, ...]) -> bool:
    names = {p.rpartition("@")[0] for p in (pair.a, pair.b)}
    return suspect in names and (EARTH in (pair.a, pair.b) or bool(names & set(live)))


def _load(row: SheetRow) -> float:
    """How much the instrument loads: the logarithm of its admittance, coarsely."""
    return round(math.log10(abs(row.current / row.voltage) + 1e-12), 1) if row.voltage else -12.0


def field_memo(investigation: Investigation, *, date: datetime.date) -> Memo:
    """The sheet as a document of a few pages."""
    case = investigation.case
    taken = steps(investigation)
    return Memo(
        title=f"Field sheet: {case.content.title}", site=case.content.site, case_file=case.name,
        fingerprint=case.fingerprint, date=date,
        parts=(
            Part("Before you begin", (Caution("Prove, test, prove", CAUTION),
                                      Bullets(tuple(_order(investigation, taken))))),
            Part("Readings", (
                Paragraph("Write what the display shows with its last zeros. Note what was "
                          "switched off or disconnected."),
                field_table(taken),
                Paragraph("Temperature, weather, loads that were on, and anything that differs "
                          "from the drawing:"), Paragraph(" \n" * 3))),
        ),
        language="en-US" if investigation.customary else "en-GB",
    )


def _order(investigation: Investigation, taken: tuple[Step, ...]) -> Iterator[str]:
    yield ("Keep to the order: at each end, instruments that hardly load come first; they show "
           "whether a conductor is connected to something.")
    risky = [s for s in taken if s.risky]
    if risky:
        worst = max(s.trip_chance for s in risky)
        yield (f"The readings marked * could trip the {_device(investigation)}, if the conductor "
               f"turns out to be connected to a line (chance beforehand up to {per_cent(worst)}). "
               "Take them only after the light instruments have read as expected; warn those who "
               "are fed from it.")
    if any(s.row.instrument.kind == "proximity" for s in taken):
        yield "A non-contact detector senses field: neither its lamp nor its silence decides."
    yield ("Low-impedance instruments heat: keep to the maker's longest time, and let them cool.")
    yield ("At the end put every link back as it was found, and prove the instruments again.")


def _device(investigation: Investigation) -> str:
    device = investigation.case.content.device
    return "device" if device is None else f"{1e3 * device.rated:g} mA device"


def field_table(taken: tuple[Step, ...]) -> Table:
    """Expected reading and band beside an empty column, in the order of measurement."""
    rows = [("", PROVE, "", "", "done at ____")]
    rows += [(f"{n}{'*' if s.risky else ''}", pair_words(s.row.pair.a, s.row.pair.b),
              s.row.instrument.name, _expected(s.row), _blank(s.row))
             for n, s in enumerate(taken, 1)]
    rows.append(("", f"{PROVE} again", "", "", "done at ____"))
    return Table("field", "Readings to take, in this order.", (
        Column("No."), Column("Where"), Column("Instrument"), Column("Expected, and its band", "V"),
        Column("Read")), tuple(rows),
        "The band is what the limits of the cable's data and of the instrument allow.")


def _expected(row: SheetRow) -> str:
    return shown_words(row.reading, [row.low], [row.high])


def _blank(row: SheetRow) -> str:
    return "lit / not lit" if row.instrument.threshold is not None else "__________ V"


def field_csv(investigation: Investigation) -> Table:
    """The same readings as a table to fill in; the case takes it back with its readings."""
    rows = tuple((s.row.instrument.key, s.row.pair.a, s.row.pair.b, "", "", "",
                  f"expected {_expected(s.row)}") for s in steps(investigation))
    return Table("field", "Readings to take, in this order.",
                 tuple(Column(name) for name in COLUMNS), rows)
