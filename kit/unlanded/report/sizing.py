"""Questions asked backwards, as the memo answers them: how long, which meter, which bleeder."""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping
from typing import Any

from ..case.inputs import SizingTable
from ..reference.limits import STANDING_SHARE
from ..reference.preferred import IEC_60063, RATINGS_SOURCE
from ..reference.records import Source
from ..study.readings import Pair
from ..study.sizing import (
    DRAWS,
    Bleeder,
    Window,
    bleeder,
    by_length,
    by_resistance,
    meter_window,
    most_circuits,
    solve_for,
    voltage_on,
)
from ..study.spread import COVERAGE
from ..units import show, show_length
from .expected import main_line
from .investigation import Investigation
from .memo import Block, Bullets, Paragraph, Part
from .spread import main_row
from .tables import Column, Table
from .words import capital, pair_words, percent

SHORTEST, LONGEST = 1.0, 3e3  # metres


def sizing_part(investigation: Investigation) -> Part | None:
    """The answers on the pair that the memo is about; None where the case does not ask."""
    table, pair = investigation.case.content.sizing, _pair(investigation)
    if table is None or pair is None:
        return None
    window, cure = _window(investigation, table, pair), _bleeder(investigation, table, pair)
    rows = (*_lengths(investigation, table, pair), *_window_rows(window, table),
            *_bleeder_rows(cure, table), *_circuits(investigation))
    blocks: list[Block] = [
        Paragraph(f"Answers for {pair_words(pair.a, pair.b)}, so that {percent(COVERAGE)} of the "
                  "draws meet the limit."),
        Table("sizing", "Questions asked backwards.",
              (Column("Question"), Column("Limit", "", "right"), Column("Answer")), rows)]
    if window.empty:
        trips = "trips the device or " if window.trip else ""
        blocks += [Paragraph("No meter does all of it: one low enough to collapse the coupled "
                             f"voltage {trips}disturbs a genuine circuit too far. Instead:"),
                   Bullets(tuple(f"{capital(a)}." for a in window.alternatives))]
    blocks.append(Paragraph(
        "A meter within the window tells a coupled voltage from a genuine one as far as the case "
        "describes the circuit. A low reading on it is no proof that a conductor is dead."))
    return Part("How long, how low, how small", tuple(blocks))


def sizing_results(investigation: Investigation) -> Mapping[str, Any] | None:
    """The answers for results.json; None where the case does not ask."""
    table, pair = investigation.case.content.sizing, _pair(investigation)
    if table is None or pair is None:
        return None
    window, cure = _window(investigation, table, pair), _bleeder(investigation, table, pair)
    return {"pair": [pair.a, pair.b], "window_ohm": [window.least, window.most],
            "window_empty": window.empty,
            "bleeder_ohm": cure and cure.value, "bleeder_power_W": cure and cure.power}


def sizing_sources(investigation: Investigation) -> Iterator[tuple[str, Source]]:
    """Where preferred values and ratings come from."""
    if investigation.case.content.sizing or investigation.case.content.operation:
        yield "preferred values", IEC_60063
        yield "ratings of resistors", RATINGS_SOURCE


def _pair(investigation: Investigation) -> Pair | None:
    line = main_line(investigation)
    return None if line is None else line.first.pair


def _window(investigation: Investigation, table: SizingTable, pair: Pair) -> Window:
    return meter_window(
        investigation.uncertain.draws(DRAWS).port(pair.a, pair.b), pair, investigation.run,
        collapse_to=table.collapse_to, trip_current=_spare(investigation),
        source_resistance=table.source_resistance, loading_error=table.loading_error,
        coverage=COVERAGE)


def _spare(investigation: Investigation) -> float:
    """Residual current that the device is sure to bear above the run's own [A]."""
    device = investigation.case.content.device
    if device is None:
        return math.inf
    spare = device.device().non_operating - abs(investigation.run.residual)
    return spare if spare > 0 else 1e-9


def _bleeder(investigation: Investigation, table: SizingTable, pair: Pair) -> Bleeder | None:
    port = investigation.uncertain.draws(DRAWS).port(pair.a, pair.b)
    return bleeder(by_resistance(port, coverage=COVERAGE), table.collapse_to,
                   live_voltage=investigation.run.supply.voltage)


def _lengths(
    investigation: Investigation, table: SizingTable, pair: Pair
) -> Iterator[tuple[str, str, str]]:
    row = main_row(investigation)
    if table.reading_limit is None or row is None:
        return
    burden = row.instrument.burden_at(abs(row.voltage))
    result = by_length(investigation.uncertain, voltage_on(pair, burden), coverage=COVERAGE)
    met = solve_for(result, table.reading_limit, low=SHORTEST, high=LONGEST, scan=17)
    yield (f"How long may the run be, for the {row.instrument.name} to show no more?",
           show(table.reading_limit, "V"),
           met.words(lambda x: show_length(x, customary=investigation.customary)))


def _window_rows(window: Window, table: SizingTable) -> Iterator[tuple[str, str, str]]:
    most = ("none does" if window.most == 0 else "every one does" if math.isinf(window.most)
            else f"up to {show(window.most, 'Ω')}")
    yield "Which meter collapses the coupled voltage?", show(table.collapse_to, "V"), most
    if window.trip:
        yield ("Which meter leaves the device on, if the pair proves to be fed?", "",
               f"from {show(window.trip, 'Ω')}")
    if window.loading:
        yield ("Which meter reads a genuine circuit of "
               f"{show(table.source_resistance, 'Ω')} no lower than this?",
               f"−{100 * table.loading_error:.2g} %", f"from {show(window.loading, 'Ω')}")
    yield ("Which meter does all of it?", "",
           "none" if window.empty else f"{show(window.least, 'Ω')} to {show(window.most, 'Ω')}")


def _bleeder_rows(cure: Bleeder | None, table: SizingTable) -> Iterator[tuple[str, str, str]]:
    if cure is None:
        yield "Which resistor keeps the pair under it?", show(table.collapse_to, "V"), "none does"
        return
    rated = "beyond those sold" if math.isinf(cure.power_rating) else show(cure.power_rating, "W")
    yield ("Which resistor keeps the pair under it?", show(table.collapse_to, "V"),
           f"{show(cure.value, 'Ω')} (E12), {show(cure.power, 'W')} if the pair is fed: rating "
           f"{rated}, {show(cure.voltage_rating, 'V')}")


def _circuits(investigation: Investigation) -> Iterator[tuple[str, str, str]]:
    device, own = investigation.case.content.device, investigation.run.residual
    if device is None or abs(own) == 0:
        return
    limit = STANDING_SHARE.likely * device.rated
    yield ("How many such runs may stand behind the device, by their cables alone?",
           show(limit, "A"), str(most_circuits(own, limit)))
