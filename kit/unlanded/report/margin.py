"""The residual-current margin as the memo gives it."""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence
from functools import lru_cache
from typing import Any

from ..case.standing import THE_RUN, case_history, case_margin
from ..errors import listed
from ..reference.devices import ANSWERS, BREAK_TIME, ring_wave
from ..reference.limits import STANDING_SHARE
from ..reference.records import Source
from ..study.ends import Driven
from ..study.inrush import Inrush, run_inrush
from ..study.residual import Margin, added_pieces, longest_run, most_pieces
from ..study.standing import without_line
from ..study.trip import MeasuredTrip, measured_trips
from ..units import FOOT, show, show_length
from .investigation import Investigation
from .margin_figures import added_figure, budget_figure, per_cent, trip_time_figure
from .margin_log import log_blocks, milliamperes
from .memo import Block, Bullets, Caution, Paragraph, Part
from .tables import Column, Table
from .words import pair_words

RULE = (f"The recommended share is {100 * STANDING_SHARE.likely:.0f} % of the rated current "
        "(BS 7671, 531.3.2; IEC 60364-5-53, 531.3.2); the local rules govern.")
CAUTION = (
    "That a device will not trip says nothing of whether a conductor may be touched: 0.5 mA is "
    "felt, and a current that the device lets pass can be dangerous.",
    "That an instrument will trip the device is no test of the device; its test is that of its "
    "standard, with an instrument made for it.",
    "Do not raise a device's rating, or take it out, to stop it from tripping: it protects "
    "persons.",
)


@lru_cache(maxsize=2)
def margin_of(investigation: Investigation) -> Margin | None:
    """The margin of the case's device; None where it has none."""
    if investigation.case.content.device is None:
        return None
    return case_margin(investigation.case, *investigation.runs)


@lru_cache(maxsize=2)
def trips_of(investigation: Investigation) -> tuple[MeasuredTrip, ...]:
    """What every instrument of the sheet does to the case's device."""
    margin = margin_of(investigation)
    assert margin is not None
    return measured_trips(investigation.sheet, margin, runs=investigation.runs[1:])


def margin_part(investigation: Investigation) -> Part | None:
    """The whole section; None where the case has no device."""
    margin = margin_of(investigation)
    if margin is None:
        return None
    trips = trips_of(investigation)
    blocks: list[Block] = [
        Caution("On this section", CAUTION), Paragraph(_device_words(margin)),
        Paragraph(" ".join(_standing_words(margin))),
        shares_table(margin), limits_table(margin), budget_figure(margin),
        Paragraph(" ".join(_run_words(investigation, margin))),
        *_added(margin), Part("Trip by measurement", tuple(_trip_blocks(margin, trips))),
        Part("What would help", (Bullets(tuple(_cures(margin))),)),
    ]
    if found := case_history(investigation.case, margin):
        blocks.append(Part("The current log", tuple(log_blocks(*found, margin))))
    return Part("Residual-current margin", tuple(blocks))


def margin_finding(investigation: Investigation) -> list[Block]:
    """What the summary says of it."""
    margin = margin_of(investigation)
    if margin is None:
        return []
    words = [_verdict_words(margin)]
    tripping = [t for t in trips_of(investigation) if t.verdict == "will"]
    if tripping:
        tools = dict.fromkeys(t.instrument.name for t in tripping)
        pairs = dict.fromkeys(pair_words(t.pair.a, t.pair.b) for t in tripping)
        words.append(f"Measuring will trip it with {listed(list(tools), 'or')} on "
                     f"{listed(list(pairs)[:3], 'or')}.")
    return [Paragraph(" ".join(words))]


def _device_words(margin: Margin) -> str:
    d = margin.device
    kind = {"general": "general", "delayed": "time-delayed (type S)",
            "personnel": "for the protection of persons", "equipment": "for the protection of "
            "equipment"}[d.kind]
    words = (f"The device: {show(d.rated, 'A')}, {kind}. At {show(d.non_operating, 'A')} it must "
             f"not trip, at {show(d.rated, 'A')} it must. ")
    if d.ramp_test is not None:
        words += (f"A ramp test tripped it at {show(d.ramp_test, 'A')}, and it is taken to trip "
                  f"between {show(d.band.low, 'A')} and {show(d.band.high, 'A')}. ")
        if d.outside_its_standard:
            words += "That is outside what its standard allows: have it replaced. "
    else:
        words += ("Between the two its own trip current is not known; a distribution over the band "
                  "is a judgement, which a ramp test of the device replaces. ")
    if d.waveform:
        return f"{words}Type {d.waveform} answers to {ANSWERS[d.waveform].words}."
    return f"{words}Its type (AC, A, F or B) is not stated." if d.kind in BREAK_TIME else words


def _standing_words(margin: Margin) -> Iterator[str]:
    low, high = margin.credible
    yield (f"Added as numbers, everything on, what stands behind it leaks "
           f"{show(margin.arithmetic, 'A')}. Added as phasors, with the use of each, "
           f"{show(margin.expected, 'A')} is expected, and 95 % of the draws lie between "
           f"{show(low, 'A')} and {show(high, 'A')}.")
    yield _verdict_words(margin)
    if margin.chance_all_on > 0:
        yield ("A chance is of a moment taken at random, and the device's own spread is in it. "
               f"With everything on it is {per_cent(margin.chance_all_on)}.")
    if any(leak.fast for leak in margin.leaks):
        yield ("Drives leak at their switching frequency and its multiples, which is counted here "
               "as one band at the weight that the device's standard gives it, in full where it is "
               "silent. What it does to a device beyond 1 kHz no standard states, nor does this "
               "model know the length of the motor's cable or the filter's resonances.")


def _verdict_words(margin: Margin) -> str:
    non_operating = margin.device.non_operating
    expected, worst = margin.to(non_operating)
    words = (f"To the current that must not trip it, {show(non_operating, 'A')}, the margin is "
             f"{show(expected, 'A')} as expected and {show(worst, 'A')} at the worst credible")
    if math.isfinite(margin.recommended):
        to, _ = margin.to(margin.recommended)
        words += (f"; to the recommended share, {show(margin.recommended, 'A')}, it is "
                  f"{show(to, 'A')} as expected")
    below = " (below 0: exceeded)" if min(worst, margin.to(margin.recommended)[0]) < 0 else ""
    return f"{words}{below}. {_chance_words(margin)}"


def _chance_words(margin: Margin) -> str:
    if margin.chance == 0:
        return "No draw of it reaches the band in which the device may trip."
    return (f"The chance of a trip is {per_cent(margin.chance)} "
            f"(± {per_cent(2 * margin.chance_error)} of calculation).")


def shares_table(margin: Margin) -> Table:
    """What each contribution brings."""
    rows = tuple(
        (s.name, str(leak.count), f"{100 * leak.use:.3g}", leak.line, milliamperes(s.arithmetic),
         milliamperes(s.expected), milliamperes(s.along))
        for leak, s in zip(margin.leaks, margin.shares, strict=True))
    total = ("All together", "", "", "", milliamperes(margin.arithmetic),
             milliamperes(margin.expected), "")
    return Table(
        "standing", "What stands behind the device.",
        (Column("Contribution"), Column("Pieces", "", "right"), Column("Use", "%", "right"),
         Column("Line"), Column("As numbers, all on", "mA", "right"),
         Column("Expected", "mA", "right"), Column("Towards the total", "mA", "right")),
        (*rows, total),
        "Towards the total: its part in the direction of the whole phasor at the supply's "
        "frequency. Where the angle of a contribution is not known it is drawn between resistive "
        "and capacitive, an unknown line from all of them.")


def limits_table(margin: Margin) -> Table:
    """The margin to each limit."""
    d = margin.device
    limits = [("recommended share", margin.recommended), ("must not trip", d.non_operating),
              ("lowest that may trip it", d.band.low), ("must trip", d.rated)]
    rows = tuple((word, milliamperes(limit), *(milliamperes(m) for m in margin.to(limit)))
                 for word, limit in limits if math.isfinite(limit)
                 and (word != "lowest that may trip it" or limit != d.non_operating))
    return Table("margin", "Margin of the standing current to each limit.",
                 (Column("Limit"), Column("At", "mA", "right"), Column("Expected", "mA", "right"),
                  Column("Worst credible", "mA", "right")), rows,
                 "Below 0: exceeded. Worst credible: 2.5 % of the draws exceed it. "
                 + (RULE if math.isfinite(margin.recommended) else ""))


def _run_words(investigation: Investigation, margin: Margin) -> Iterator[str]:
    run, customary = investigation.run, investigation.customary
    own = run.residual
    if abs(own) > 0:
        limit = _aim(margin)
        alone = show_length(longest_run(run, limit), customary=customary)
        unit, size = ("foot", FOOT) if customary else ("metre", 1.0)
        yield (f"This run leaks {show(abs(own) / run.length * size, 'A')} per {unit}. Alone it "
               f"would reach {show(limit, 'A')} at {alone}.")
        left = longest_run(run, limit, others=complex(margin.fundamental.mean()) - own)
        if left == 0:
            yield "What else stands behind the device exceeds that already."
        elif len(margin.leaks) > 1:
            yield f"With what else stands there, at {show_length(left, customary=customary)}."
    fed = [line for line in run.supply.lines if Driven(line) in run.near.values()]
    if len(fed) > 1:
        lost = [f"{show(abs(without_line(run, line).residual), 'A')} without {line}"
                for line in fed]
        yield f"With a line lost, its conductors open, the run leaks {listed(lost)}."
    if (rush := run_inrush(run, _filters(margin))) and margin.device.kind in BREAK_TIME:
        yield _inrush_words(rush, margin)


def _aim(margin: Margin) -> float:
    """The limit to keep to [A]: the recommended share, or what must not trip."""
    known = math.isfinite(margin.recommended)
    return margin.recommended if known else margin.device.non_operating


def _filters(margin: Margin) -> float:
    """Capacitance of what leads by 90°, but for the run [F]."""
    omega = 2 * math.pi * margin.supply.frequency
    return sum(leak.count * leak.phasors[1].imag / (omega * margin.supply.voltage)
               for leak in margin.leaks
               if leak.name != THE_RUN and leak.angle_known and leak.phasors.get(1, 0j).imag > 0)


def _inrush_words(rush: Inrush, margin: Margin) -> str:
    promised = ring_wave(margin.device)
    than = "below" if rush.peak < promised.likely else "above"
    return (f"As an indication only: switched on at the crest, it takes {show(rush.charge, 'C')} "
            f"in a ring of {show(rush.peak, 'A')} peak at {show(rush.frequency, 'Hz')}, {than} the "
            f"{show(promised.likely, 'A')} ring wave that the device is tested to withstand "
            f"({promised.source}). The two differ in shape and length.")


def _added(margin: Margin) -> Iterator[Block]:
    others = [(s, leak) for s, leak in zip(margin.shares, margin.leaks, strict=True)
              if leak.name != THE_RUN and s.expected > 0]
    if not others:
        return
    share, leak = max(others, key=lambda o: o[0].expected)
    limits = [limit for limit in (margin.recommended, margin.device.non_operating)
              if math.isfinite(limit)]
    said = listed([f"{_most(margin, leak.name, limit)} within {show(limit, 'A')}"
                   for limit in limits])
    yield Paragraph(f"Of “{share.name}” there are {leak.count}; at the worst credible current "
                    f"there may be {said}.")
    step = max(1, leak.count // 6)
    extra = range(0, 13 * step, step)
    yield added_figure(leak.name, [
        (leak.count + n, m)
        for n, m in zip(extra, added_pieces(margin, leak.name, extra), strict=True)])


def _most(margin: Margin, leak: str, limit: float) -> str:
    found = most_pieces(margin, leak, limit)
    return "not even none" if found < 0 else str(found)


def _trip_blocks(margin: Margin, trips: Sequence[MeasuredTrip]) -> Iterator[Block]:
    yield Paragraph(
        "What the device sees with each instrument in place is the standing current and what the "
        "instrument adds, as phasors. “Will”: even at the lowest of its range it must trip. “Will "
        "not”: even at the highest it must not. In brackets, the longest time that the standard "
        "allows, or the chance. Held for less time, an instrument may leave it closed.")
    if margin.draws.max() >= margin.device.band.low:
        yield Paragraph("Here the standing current alone may trip the device, so no instrument can "
                        "be said not to; an instrument that adds nothing has the chance that there "
                        "is without it.")
    loud = 0.01 * margin.device.rated
    heard = {t.pair for t in trips if t.added >= loud}
    yield from _trip_tables([t for t in trips if t.pair in heard])
    if quiet := [t for t in trips if t.pair not in heard]:
        pairs = dict.fromkeys(pair_words(t.pair.a, t.pair.b) for t in quiet)
        said = listed(list(dict.fromkeys(t.verdict for t in quiet)), "or")
        yield Paragraph(f"On every other pair no instrument adds more than "
                        f"{show(max(t.added for t in quiet), 'A')}, and it {said} trip the device: "
                        f"{'; '.join(pairs)}.")
    yield trip_time_figure(margin, trips)


def _trip_tables(trips: Sequence[MeasuredTrip]) -> Iterator[Table]:
    names = {t.instrument.key: t.instrument.name for t in trips}
    cells = {(t.pair, t.instrument.key): _trip_cell(t) for t in trips}
    tools = list(names)
    for start in range(0, len(tools), 7):
        group = tools[start:start + 7]
        yield Table(
            f"trips{start // 7 + 1 if start else ''}", "Will the measurement trip the device?",
            (Column("Pair"), *(Column(names[key]) for key in group)),
            tuple((pair_words(p.a, p.b), *(cells.get((p, key), "–") for key in group))
                  for p in dict.fromkeys(t.pair for t in trips)))


def _trip_cell(trip: MeasuredTrip) -> str:
    if trip.verdict == "will" and math.isfinite(trip.longest):
        return f"will ({show(trip.longest, 's', 2)})"
    if trip.verdict == "may":  # in which the instrument's own tolerance counts too
        return f"may ({per_cent(min(trip.chance, 0.9999))})"
    return trip.verdict


def _cures(margin: Margin) -> Iterator[str]:
    shares = sorted(zip(margin.shares, margin.leaks, strict=True),
                    key=lambda s: s[0].along, reverse=True)
    share, leak = shares[0]
    if margin.credible[1] <= (limit := _aim(margin)):
        yield (f"The worst credible current is within {show(limit, 'A')}: for the margin's sake "
               "nothing needs moving.")
        return
    yield (f"“{share.name}” brings most, {show(share.along, 'A')}: move some of it to another "
           "device, or give each circuit a device of its own.")
    damp = [k.name for s, k in shares if k.angle_known and k.phasors.get(1, 0j).real
            > abs(k.phasors.get(1, 0j).imag) and s.expected > 0.02 * margin.device.rated]
    if damp:
        yield (f"{listed(damp)}: a resistive leak, which an insulation test can find; dry or "
               "repair it.")
    if margin.supply.phases == 3 and leak.line in margin.supply.lines:
        yield ("Sharing the single-phase loads out over the lines lets them cancel in part while "
               "all are on; do not count on it when some are off.")
    if any(k.fast for _, k in shares):
        yield ("Drives: a filter of low leakage, a shorter or unscreened motor cable where the "
               "drive's maker allows it, and a device of type B or as the maker asks.")
    if margin.device.ramp_test is None:
        yield "Ramp-test the device with its loads off, and write the result into the case."


def margin_sources(investigation: Investigation) -> Iterator[tuple[str, Source]]:
    """What the section used, with its source."""
    margin = margin_of(investigation)
    if margin is None:
        return
    for source in margin.device.sources:
        yield "residual-current device", source
    if math.isfinite(margin.recommended):
        yield "recommended share of standing current", STANDING_SHARE.source
    if margin.device.kind in BREAK_TIME:
        yield "ring wave", ring_wave(margin.device).source
    for entry in investigation.case.content.standing:
        if entry.equipment is not None:
            yield f"leakage of {entry.name}", entry.equipment.source


def margin_results(investigation: Investigation) -> dict[str, Any] | None:
    """For results.json."""
    margin = margin_of(investigation)
    if margin is None:
        return None
    return {
        "rated_A": margin.device.rated, "non_operating_A": margin.device.non_operating,
        "trip_band_A": [margin.device.band.low, margin.device.band.high],
        "recommended_A": margin.recommended, "arithmetic_A": margin.arithmetic,
        "expected_A": margin.expected, "credible_A": list(margin.credible),
        "chance": margin.chance, "chance_standard_error": margin.chance_error,
        "chance_all_on": margin.chance_all_on,
        "contributions": [{"name": s.name, "arithmetic_A": s.arithmetic, "expected_A": s.expected,
                           "towards_total_A": s.along} for s in margin.shares],
        "trips": [{"pair": [t.pair.a, t.pair.b], "instrument": t.instrument.key,
                   "added_A": t.added, "residual_A": t.expected, "lowest_A": t.lowest,
                   "highest_A": t.highest, "verdict": t.verdict, "chance": t.chance,
                   "longest_time_s": t.longest} for t in trips_of(investigation)],
    }

