"""False operation as the memo tells it: what each load does, by what margin, what cures it."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import replace
from functools import lru_cache
from typing import Any

import numpy as np
from numpy.typing import NDArray

from ..case.loading import Case
from ..case.runs import switched_of
from ..errors import listed
from ..reference.records import Source
from ..study.comparison import NOTES, Compared, compare
from ..study.operation import IN_HAND, Operation, Watched, level_on, operation
from ..study.run import Run
from ..study.sizing import Met, by_length
from ..study.spread import COVERAGE
from ..study.uncertain import UncertainRun
from ..units import FOOT, show, show_length
from .figure import Figure
from .investigation import Investigation
from .memo import Block, Caution, Paragraph, Part
from .spread_figures import level_figure
from .tables import Column, Table
from .words import capital, pair_words, percent

Real = NDArray[np.float64]
POINTS = 15  # lengths of the picture

_CAUTION = (
    "Thresholds are limits of standards for whole families, or the data sheet's own. A load that "
    "is sure to be off by them can still be held by dirt, wear or residual magnetism.",
    "A resistor across a load is hot while the circuit is on, a capacitor keeps a charge after it "
    "is off. Choose parts rated for lasting use across the supply, and fit them where local codes "
    "allow.",
    "Where a load that stays on can hurt somebody, a cure by impedance is not enough: use a "
    "circuit that fails to the off state, designed by somebody licensed for it.",
)


@lru_cache(maxsize=8)
def operations(investigation: Investigation) -> tuple[Operation, ...]:
    """Every load that the case watches."""
    return tuple(operation(investigation.uncertain, entry.watched())
                 for entry in investigation.case.content.operation)


@lru_cache(maxsize=8)
def comparisons(investigation: Investigation, found: Operation) -> tuple[Compared, ...]:
    """The load in other arrangements of its contacts; nothing where the case names none for it."""
    return rearranged_load(investigation.case, investigation.uncertain, found)


def rearranged_load(case: Case, uncertain: UncertainRun, found: Operation) -> tuple[Compared, ...]:
    """As `comparisons`, for a run that has been changed since it was investigated."""
    built = switched_of(case.content.run, uncertain.run.supply)
    if built is None or built.arrangement.load != found.watched.pair:
        return ()
    entry = next(e for e in case.content.operation if e.name == found.watched.name)
    return compare(uncertain, entry.watched(), built)


def operation_finding(investigation: Investigation) -> list[Block]:
    """What each load does, in a sentence."""
    said = []
    for found in operations(investigation):
        w = found.watched
        cure = next((c for c in found.cures if c.works and c.bleeder), None)
        said.append(
            f"With its contacts open, the {w.name} {state_words(found)}: "
            f"{show(found.level, w.unit)} is coupled into it ({show(found.low, w.unit)} to "
            f"{show(found.high, w.unit)}), and it is sure to be off at "
            f"{show(w.limits[0], w.unit)}{_beyond(found)}.")
        if found.high > w.limits[0] and cure and cure.bleeder:
            said.append(f"A resistor of {show(cure.bleeder.value, 'Ω')} across it, "
                        f"{show(cure.watts, 'W')} while on, would let go of it.")
        # Not the neutral's: a load that stays live is no advice.
        off = [c.words for c in comparisons(investigation, found)
               if c.found.high <= w.limits[0] and c.switched.word != "switched neutral"]
        if found.high > w.limits[0] and off:
            said.append(f"Of other arrangements of the same cable, {listed(off, 'or')} would.")
    return [Paragraph(" ".join(said))] if said else []


def operation_part(investigation: Investigation) -> Part | None:
    """Loads, cures and pictures; None where the case watches no load."""
    found = operations(investigation)
    if not found:
        return None
    blocks: list[Block] = [
        Paragraph("With the contacts open, the run's capacitance still feeds the loads. Each is "
                  "held against the voltage, or the lamp's current, at which it is sure to be off "
                  f"and sure to be on; between them it may do either. {_notes(found)}"),
        states_table(found, customary=investigation.customary)]
    for k, one in enumerate(found, 1):
        blocks += [replace(_figure(investigation, one), key=f"operation-{k}"), cures_table(one, k)]
        if others := comparisons(investigation, one):
            blocks.append(comparison_table(others, k, customary=investigation.customary))
    blocks.append(Caution("Before a cure is fitted", _CAUTION))
    return Part("False operation", tuple(blocks))


def operation_results(investigation: Investigation) -> list[Mapping[str, Any]] | None:
    """The loads for results.json; None where the case watches none."""
    return [
        {"name": o.watched.name, "pair": [o.watched.pair.a, o.watched.pair.b],
         f"level_{o.watched.unit}": o.level, f"range_{o.watched.unit}": [o.low, o.high],
         "current_A": o.current, f"limits_{o.watched.unit}": o.watched.limits, "state": o.state,
         "margin": o.margin, "chances_off_between_on": o.chances,
         "longest_run_m": o.longest.stretches, "longest_run_covered_m": o.longest_covered.stretches,
         "cures": [{"name": c.name, "level": c.level, "state": c.state, "works": c.works,
                    "power_W": c.watts} for c in o.cures],
         "arrangements": [
             {"name": c.words, "as_built": c.as_built, "pair": [c.found.watched.pair.a,
                                                                c.found.watched.pair.b],
              f"level_{o.watched.unit}": c.found.level, f"range_{o.watched.unit}": [c.found.low,
                                                                                    c.found.high],
              "current_A": c.found.current, "state": c.found.state,
              "longest_run_m": c.found.longest.stretches}
             for c in comparisons(investigation, o)]}
        for o in operations(investigation)
    ] or None


def operation_sources(investigation: Investigation) -> Iterator[tuple[str, Source]]:
    """The sources of the thresholds used."""
    for found in operations(investigation):
        kind = found.watched.threshold
        yield f"thresholds of the {kind.name}", kind.off_at.source
        yield f"thresholds of the {kind.name}", kind.on_at.source


def _notes(found: tuple[Operation, ...]) -> str:
    notes = dict.fromkeys(f"{capital(o.watched.threshold.name)}: {o.watched.threshold.note}."
                          for o in found if o.watched.threshold.note)
    return " ".join(notes)


def state_words(o: Operation) -> str:
    """What the load does; of one that is expected to be off, what the band leaves open."""
    off, on = o.watched.limits
    return o.state if o.level > off else o.watched.state(min(o.high, (off + on) / 2))


def _beyond(o: Operation) -> str:
    """How many draws pass the limit that the expected level keeps."""
    if o.level > o.watched.limits[0] or o.chances[0] == 1:
        return ""
    return f", which {percent(1 - o.chances[0])} of the draws pass"


def _over(o: Operation) -> str:
    """The margin; one far over as a multiple of the limit."""
    return percent(o.margin) if o.margin > -1 else f"{1 - o.margin:.2g} × it"


def states_table(found: tuple[Operation, ...], *, customary: bool = False) -> Table:
    """What each load does, by what margin, and for how long a run it is sure to be off."""
    def row(o: Operation) -> tuple[str, ...]:
        w = o.watched
        off, on = w.limits
        return (f"{w.name}\n{pair_words(w.pair.a, w.pair.b)}", _level(o),
                show(off, w.unit), show(on, w.unit), state_words(o), _over(o),
                " / ".join(map(percent, o.chances)), _lengths_off(o, customary))
    return Table(
        "operation", "Loads with their contacts open.",
        (Column("Load"), Column("Coupled in", "", "right"), Column("Sure off at", "", "right"),
         Column("Sure on at", "", "right"), Column("State"), Column("Margin", "", "right"),
         Column("Off / either / on", "", "right"), Column("Sure off for runs", "", "right")),
        tuple(map(row, found)),
        f"In brackets: what {percent(COVERAGE)} of the draws allow. State: what the band "
        "leaves open. Margin: how far under what it is sure to be off at, as a share of it; from "
        "twice that, as a multiple. Off / either / on: shares of the draws.")


def _level(o: Operation) -> str:
    unit = o.watched.unit
    return f"{show(o.level, unit)}\n({show(o.low, unit)} … {show(o.high, unit)})"


def _lengths_off(o: Operation, customary: bool) -> str:
    def length(met: Met) -> str:
        def shown(x: float) -> str:
            return show_length(x, customary=customary)
        if met.nowhere:
            return f"none of {shown(met.low)} or more"
        return f"all to {shown(met.high)}" if met.everywhere else met.words(shown)
    return f"{length(o.longest)}\n({length(o.longest_covered)})"


def comparison_table(
    others: tuple[Compared, ...], number: int, *, customary: bool = False
) -> Table:
    """Every arrangement that the cable has cores for: what the load then does."""
    def row(c: Compared) -> tuple[str, ...]:
        o = c.found
        own = " (as it is)" if c.as_built else ""
        current = (show(o.current, "A"),) if watched.unit == "V" else ()
        return (f"{c.words}{own}\n{pair_words(o.watched.pair.a, o.watched.pair.b)}", _level(o),
                *current, state_words(o), _lengths_off(o, customary))

    watched = others[0].found.watched
    current = (Column("Current", "", "right"),) if watched.unit == "V" else ()
    mind = " ".join(f"{capital(word)}: {note}." for word, note in NOTES.items()
                    if word in {c.switched.word for c in others})
    return Table(
        f"arrangements-{number}", f"The {watched.name} in other arrangements of its contacts: the "
        "same cable, length and load, contacts open.",
        (Column("Arrangement, load"), Column("Coupled in", "", "right"), *current, Column("Load"),
         Column("Sure off for runs", "", "right")),
        tuple(map(row, others)),
        "Cores keep their parts, a spare one is taken for a part that is new, and what is not "
        f"needed is open. In brackets: what {percent(COVERAGE)} of the draws allow. {mind}")


def cures_table(found: Operation, number: int) -> Table:
    """What would let go of the load."""
    unit = found.watched.unit
    return Table(
        f"cures-{number}", f"Cures for the {found.watched.name}, those that work first, by the "
        "watts they take while the circuit is on.",
        (Column("Cure"), Column("Leaves at most", "", "right"), Column("Load then"),
         Column("Takes", "", "right"), Column("Mind")),
        tuple((c.name, show(c.level, unit), c.state, show(c.watts, "W"), c.note or "–")
              for c in found.cures),
        f"Leaves at most: in {percent(COVERAGE)} of the draws. A part across the load is chosen to "
        f"leave {percent(1 - IN_HAND)} in hand.")


def _figure(investigation: Investigation, found: Operation) -> Figure:
    watched, uncertain = found.watched, investigation.uncertain
    band = level_band(uncertain, watched)
    return length_of_load(uncertain.run, watched, band, customary=investigation.customary)


def level_band(uncertain: UncertainRun, watched: Watched) -> tuple[Real, Real]:
    """The ends of the level's interval along the lengths that `length_of_load` draws."""
    def quantity(coverage: float) -> Real:
        result = by_length(uncertain, lambda b: level_on(b, watched), coverage=coverage)
        return result(_lengths(uncertain.run))

    tail = (1 - COVERAGE) / 2
    return quantity(tail), quantity(1 - tail)


def _lengths(run: Run) -> Real:
    return np.linspace(run.length / 20, 2 * run.length, POINTS)


def length_of_load(
    run: Run, watched: Watched, band: tuple[Real, Real] | None = None, *, customary: bool = False
) -> Figure:
    """What is coupled into a load against the length of the run; `band` is `level_band`."""
    unit, size = ("ft", FOOT) if customary else ("m", 1.0)
    lengths = _lengths(run)
    curve = by_length(run, lambda b: level_on(b, watched))(lengths)
    return level_figure(
        lengths / size, curve, band or (curve, curve),
        name=watched.name, unit=watched.unit, limits=watched.limits, length=run.length / size,
        length_unit=unit, coverage=COVERAGE, states=watched.threshold.states)
