"""What the engineer added to the memo from the panels: `[[memo.added]]` as figures and tables."""

from __future__ import annotations

from dataclasses import replace

from ..case.memo import Added, size_unit
from ..case.observed import case_observations, case_suspects
from ..study.banded import loading_band, spread_sheet
from ..study.hypotheses import Cause
from ..study.operation import by_current
from ..study.readings import Pair, reading_sheet
from ..study.reduced import Reduced
from ..study.residual import Margin, added_pieces
from ..units import si
from .beside import band_beside, beside_figure
from .figure import Figure
from .formulas import formula_table
from .investigation import Investigation
from .margin import margin_of
from .margin_figures import added_figure
from .memo import Block, Part
from .pair import IMPEDANCES, lengths_for, pair_length, pair_loading, pair_table, your_meter
from .tables import Table
from .tried import Trial, tried_figure

LENGTHS = 60  # points of a curve on paper


def added_part(investigation: Investigation) -> Part | None:
    """The figures and tables that the case adds, in its order; None where it adds none."""
    entries = investigation.case.content.memo.added
    if not entries:
        return None
    blocks: tuple[Block, ...] = tuple(_keyed(added_block(investigation, entry), number)
                                      for number, entry in enumerate(entries, 1))
    return Part("Added figures and tables", blocks)


def added_block(investigation: Investigation, entry: Added) -> Figure | Table:
    """One of them; raises `Refused` where the case no longer has what it is about."""
    match entry.kind:
        case "formulas":
            return formula_table(investigation.run, customary=investigation.customary)
        case "tried cause":
            return _tried(investigation, entry)
        case "added load":
            margin = margin_of(investigation)
            assert margin is not None
            assert entry.leak is not None
            return load_figure(margin, entry.leak)
        case "resistor beside":
            return _beside(investigation, entry)
    return _of_pair(investigation, entry)


def _of_pair(investigation: Investigation, entry: Added) -> Figure | Table:
    assert entry.a is not None
    assert entry.b is not None
    assert entry.meter is not None
    pair = Pair(entry.a, entry.b)
    run, tools = investigation.run, (*investigation.instruments, your_meter(entry.meter))
    if entry.kind == "length":
        lengths = lengths_for(run, LENGTHS, customary=investigation.customary)
        return pair_length(run, pair, tools, lengths, customary=investigation.customary)
    sheet = reading_sheet(run, tools, [pair])
    coverage = investigation.case.content.spread.coverage
    if entry.kind == "loading":
        band = loading_band(investigation.uncertain, pair, IMPEDANCES, coverage=coverage)
        return pair_loading(sheet, pair, band)
    return pair_table(spread_sheet(sheet, investigation.uncertain, coverage=coverage).sheet, pair)


def _tried(investigation: Investigation, entry: Added) -> Figure:
    case, runs = investigation.case, investigation.runs
    assert entry.conductor is not None
    cause: Cause = entry.cause or "leakage to earth"
    reduced = Reduced(*runs, case_suspects(case.content, runs[0]),
                      case.content.causes.section == "as described")
    trial = Trial(reduced, case_observations(case), entry.conductor, cause)
    size = si(entry.size, size_unit(cause)) if entry.size else trial.sizes.likely
    return tried_figure(trial, size)


def _beside(investigation: Investigation, entry: Added) -> Figure:
    watched = next(o.watched() for o in investigation.case.content.operation
                   if o.name == entry.load)
    assert entry.resistor is not None
    watched = by_current(investigation.run, watched)
    return beside_figure(investigation.run, watched, entry.resistor,
                         band=band_beside(investigation.uncertain, watched))


def load_figure(margin: Margin, leak: str) -> Figure:
    """The chance of a trip against how many pieces of a leak stand behind the device."""
    count = next(known.count for known in margin.leaks if known.name == leak)
    step = max(1, count // 6)
    extra = range(0, 13 * step, step)
    return added_figure(leak, [(count + more, m) for more, m in
                               zip(extra, added_pieces(margin, leak, extra), strict=True)])


def _keyed(block: Figure | Table, number: int) -> Figure | Table:
    """With a key that no other part of the memo uses."""
    return replace(block, key=f"added-{number}-{block.key}")
