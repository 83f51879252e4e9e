"""What a person would feel, as the memo tells it: current, charge, induced voltage."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from functools import lru_cache
from typing import Any

import numpy as np

from ..case.inputs import LoadedTable
from ..reference.limits import (
    CHARGE_PERCEPTION,
    EXTRA_LOW_VOLTAGE_AC,
    FIBRILLATION_CURRENT,
    LET_GO_CURRENT,
    PERCEPTION_CURRENT,
    STORED_CHARGE,
)
from ..reference.records import Source
from ..study.run import Run
from ..study.sizing import DRAWS
from ..study.spread import COVERAGE
from ..study.touch import (
    Touch,
    induced_voltages,
    induction_finding,
    length_for_current,
    screen_current,
    screening_factor,
    touch_network,
    touch_sheet,
)
from ..units import show, show_length
from .investigation import Investigation
from .memo import Block, Caution, Paragraph, Part
from .tables import Column, Table
from .words import percent, point_words, screen_words

ROWS = 14

_CAUTION = (
    "No number here says that a conductor may be touched. Limits are those of documents, for "
    "healthy people, dry skin and the paths that the documents name.",
    "The current that a source can drive is what hurts, not the reading: a coupled conductor that "
    "reads low on a meter may still drive its current through a person.",
    "A run beside high voltage, or beside a heavily loaded or faulted line, can be dangerous over "
    "a short length. Bond it to earth at the place of work before touching, by the standard that "
    "governs there and by people licensed for it. One bond takes away the coupled voltage and "
    "leaves the induced one at the other end; two bonds carry a current.",
)


def touch_finding(investigation: Investigation) -> list[Block]:
    """The worst of what nothing feeds."""
    most = most_current(investigation)
    worst = max((t for t in touch_sheet(investigation.run) if not t.fed),
                key=lambda t: most[t.point], default=None)
    if worst is None or most[worst.point] < PERCEPTION_CURRENT.likely:
        return []
    return [Paragraph(
        f"A person who touches {point_words(worst.point)} would have {show(worst.current, 'A')} "
        f"(up to {show(most[worst.point], 'A')}) through the body by calculation: "
        f"{_finding(worst, most[worst.point])}. It must be bonded to earth before work on it.")]


@lru_cache(maxsize=2)
def most_current(investigation: Investigation) -> Mapping[str, float]:
    """By end, what the current through the body stays under over the draws, RMS [A]."""
    drawn = investigation.uncertain.draws(DRAWS)
    body, _ = touch_network(investigation.run.frequency)
    most = {}
    for t in touch_sheet(investigation.run):
        port = drawn.port(t.point)
        currents = np.abs(port.voltage / (port.impedance + body))
        most[t.point] = max(t.current, float(np.quantile(currents, COVERAGE)))
    return most


def _finding(touch: Touch, most: float) -> str:
    """Against the limits as computed; and the limit that it may pass over the draws."""
    passed = next((limit for limit in (FIBRILLATION_CURRENT, LET_GO_CURRENT, PERCEPTION_CURRENT)
                   if touch.current < limit.likely <= most), None)
    if touch.fed or passed is None:
        return touch.finding
    return f"may pass {show(passed.likely, 'A')}; as computed {touch.finding}"


def touch_part(investigation: Investigation) -> Part | None:
    """Every end that is not earthed, what is induced along the run, and cautions."""
    rows = touch_sheet(investigation.run)
    if not rows:
        return None
    blocks: list[Block] = [
        Paragraph("Each end as the measuring network of IEC 60990 for the human body (500 Ω before "
                  "1500 Ω beside 0.22 µF) would find it between that end and earth; the current "
                  "that an earth bond there would carry; and the charge and energy that the end "
                  "may be left with when the supply goes off at its crest."),
        _table(rows, most_current(investigation))]
    if text := _lengths(investigation, rows):
        blocks.append(Paragraph(text))
    blocks += [_induced(investigation, k) for k in range(len(investigation.case.content.loaded))]
    blocks.append(Caution("Before anybody touches a conductor", _CAUTION))
    return Part("What a person would feel", tuple(blocks))


def touch_results(investigation: Investigation) -> list[Mapping[str, Any]]:
    """The ends for results.json."""
    return [{"point": t.point, "fed": t.fed, "unloaded_V": t.unloaded, "body_current_A": t.current,
             "body_current_high_A": most_current(investigation)[t.point],
             "weighted_current_A": t.weighted, "bond_current_A": t.bonded, "charge_C": t.charge,
             "energy_J": t.energy, "finding": t.finding} for t in touch_sheet(investigation.run)]


def touch_sources(_: Investigation) -> Iterator[tuple[str, Source]]:
    """The sources of the limits."""
    for what, value in (("current that is felt", PERCEPTION_CURRENT),
                        ("current that all people can let go of", LET_GO_CURRENT),
                        ("current that may stop a heart", FIBRILLATION_CURRENT),
                        ("charge that is felt", CHARGE_PERCEPTION),
                        ("charge that a circuit may keep", STORED_CHARGE),
                        ("extra-low voltage", EXTRA_LOW_VOLTAGE_AC)):
        yield what, value.source


def _table(rows: tuple[Touch, ...], most: Mapping[str, float]) -> Table:
    def body(t: Touch) -> str:
        said, high = show(t.current, "A"), show(most[t.point], "A")
        return said if t.fed or said == high else f"{said}\n(up to {high})"

    return Table(
        "touch", "What a person on earth would meet at each end.",
        (Column("End"), Column("Unloaded", "", "right"), Column("Through body", "", "right"),
         Column("Through bond", "", "right"), Column("Charge", "", "right"),
         Column("Energy", "", "right"), Column("Finding")),
        tuple((point_words(t.point), show(t.unloaded, "V"), body(t),
               "the supply's" if t.fed else show(t.bonded, "A"),
               "–" if t.fed else show(t.charge, "C"), "–" if t.fed else show(t.energy, "J"),
               _finding(t, most[t.point])) for t in rows[:ROWS]),
        f"Up to: in {percent(COVERAGE)} of the draws."
        + (f" {len(rows) - ROWS} more ends drive less." if len(rows) > ROWS else ""))


def _lengths(investigation: Investigation, rows: tuple[Touch, ...]) -> str:
    coupled = [t for t in rows if not t.fed and t.bonded > 0]
    if not coupled:
        return ""
    worst = coupled[0]
    said = []
    for limit, words in ((PERCEPTION_CURRENT, "which people feel"),
                         (LET_GO_CURRENT, "above which not everybody can let go")):
        length = length_for_current(investigation.run, worst.point, limit)
        said.append(f"{show_length(length, customary=investigation.customary)} for "
                    f"{show(limit.likely, 'A')}, {words}")
    return (f"What {point_words(worst.point)} can drive grows with the run. As computed, without "
            f"the range, it takes about {', and '.join(said)}.")


def _induced(investigation: Investigation, number: int) -> Table:
    entry = investigation.case.content.loaded[number]
    run = investigation.run
    volts = induced_voltages(run, entry.currents)
    back = f" and back in {entry.back}" if entry.back else " and back by earth"
    return Table(
        f"induced-{number + 1}",
        f"Voltage induced along each conductor, end to end, by {show(entry.current, 'A')} in "
        f"{entry.go}{back}.",
        (Column("Conductor"), Column("Induced", "", "right"), Column("Finding")),
        tuple((name, show(abs(e), "V"), induction_finding(abs(e))) for name, e in volts.items()),
        "It stands at one end of a conductor that is bonded to earth at the other; a meter of low "
        f"impedance reads it as well as any.{_screened(run, entry)}")


def _screened(run: Run, entry: LoadedTable) -> str:
    """What the screen does about induction, in words; "" for a run without one."""
    if run.screen is None:
        return ""
    how = f" The screen is {screen_words(run)}"
    current = screen_current(run, entry.currents)
    if not current:
        return f"{how}: no current flows along it, and it takes nothing off what is induced."
    if entry.back:
        return f"{how}; a current that returns inside it induces none in it, and is not screened."
    return (f"{how}, carries {show(abs(current), 'A')} of it back, and leaves "
            f"{100 * screening_factor(run):.3g} % of what would be induced without its bonds.")
