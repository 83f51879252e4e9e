"""What the readings mean, as the memo gives it: odds of the causes, and what to measure next."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from functools import lru_cache
from typing import Any
from weakref import WeakKeyDictionary

from ..case.observed import case_causes
from ..case.standing import case_margin
from ..errors import Refused, listed
from ..reference.limits import LET_GO_CURRENT, PERCEPTION_CURRENT
from ..reference.records import Source
from ..study.causes import Explanation, Progress, silent
from ..study.claim import RESTS, SURE
from ..study.coupling import DESCRIPTION_SPREAD, GEOMETRY_SPREAD, UNDESCRIBED
from ..study.finding import (
    ACCEPTED_INSULATION,
    Finding,
    credible,
    findings,
    headline,
    sentences,
    span,
)
from ..study.hypotheses import CAUSES, LEAKAGE, LOAD, Cause
from ..study.likelihood import MISREAD_SHARE, WIDE_SHARE
from ..study.next_reading import Prospect, next_readings, simplest, usual_candidates
from ..study.reduced import SUPPLY_SPREAD
from ..units import show
from .causes_figures import (
    doubtful,
    next_figure,
    odds_figure,
    predicted_figure,
    told_figure,
)
from .causes_words import candidate_words, conditions, reading_words
from .investigation import Investigation
from .margin_figures import per_cent
from .memo import Block, Bullets, Caution, Paragraph, Part
from .tables import Column, Table, plain
from .words import filled, pair_words

PICTURED = 2  # suspects with pictures of their own
SUGGESTED = 5  # measurements in the table
SAID = 3  # causes whose predictions are told
NEGLIGIBLE = 1e-4  # share of a cause that is not listed
WORTH = 0.02  # bit: a measurement that tells less is not suggested
LITTLE = 0.2  # bit: a measurement that tells less hardly changes the odds
INSULATION_TEST = ("An insulation test with direct voltage, with the run isolated, would tell a "
                   "leakage from coupling.")

CAUTION = (
    "Odds are not proof. They hold for the causes that are named here and for a run as it is "
    "described, and no odds say that a conductor may be touched.",
    "“None of these” is a finding: when it is likely, the run is not as described.",
    "A measurement suggested here is for qualified persons, with an instrument made for it that "
    "is proved on a known source before and after.",
)


_EXPLAINED: WeakKeyDictionary[Investigation, Explanation | None] = WeakKeyDictionary()


def explanation_of(
    investigation: Investigation, *, progress: Progress = silent
) -> Explanation | None:
    """What the case's readings mean; None where nothing could be meant by them.

    Worked out once; `progress` is told of it, and what it raises ends the work.
    """
    if investigation not in _EXPLAINED:
        _EXPLAINED[investigation] = case_causes(investigation.case, *investigation.runs,
                                                progress=progress)
    return _EXPLAINED[investigation]


@lru_cache(maxsize=2)
def prospects_of(investigation: Investigation) -> tuple[Prospect, ...]:
    """The next measurements with the case's instruments, the best first."""
    found = explanation_of(investigation)
    assert found is not None
    return next_readings(found, usual_candidates(found, investigation.instruments),
                         non_operating=headroom(investigation),
                         costs=investigation.case.content.causes.costs)


def headroom(investigation: Investigation) -> float:
    """Residual current that an instrument may add without tripping the case's device [A]."""
    if investigation.case.content.device is None:
        return float("inf")
    margin = case_margin(investigation.case, *investigation.runs)
    return max(0.0, margin.device.band.low - margin.expected)


def causes_part(investigation: Investigation) -> Part | None:
    """The whole section; None where the case has no reading on a conductor that nothing feeds."""
    if not investigation.case.content.readings:
        return None
    found = explanation_of(investigation)
    if found is None:
        return None
    made = findings(found)
    blocks: list[Block] = [
        Caution("On this section", CAUTION),
        *(Paragraph(" ".join(sentences(found, f, customary=investigation.customary)))
          for f in made),
        readings_table(found), odds_table(found, made),
        *_pictures(found), Part("What to measure next", tuple(next_blocks(investigation))),
        Part("How this was found", (Bullets(tuple(_method(found))),)),
    ]
    return Part("What the readings mean", tuple(blocks))


def causes_finding(investigation: Investigation) -> list[Block]:
    """For the summary: the finding on each conductor, and the next measurement."""
    if causes_part_missing(investigation):
        return []
    found = explanation_of(investigation)
    assert found is not None
    said = [headline(found, f) for f in findings(found)]
    best = next(iter(worth_taking(investigation)), None)
    if best is not None:
        said.append(f"The next measurement that would tell most is {_next_words(best)}"
                    f"{_little(best)}.")
    return [Paragraph(" ".join(said))]


def causes_part_missing(investigation: Investigation) -> bool:
    """Whether the case has no readings that causes could be told from."""
    return not investigation.case.content.readings or explanation_of(investigation) is None


def readings_table(found: Explanation) -> Table:
    """The readings, numbered as the section speaks of them."""
    odd = doubtful(found)
    rows = tuple((str(k), r.instrument.name,
                  f"{pair_words(r.pair.a, r.pair.b)}{conditions(r.actions, r.resistor)}", r.text,
                  f"{per_cent(found.misread(k - 1))}{' *' if k - 1 in odd else ''}")
                 for k, r in enumerate(found.readings, 1))
    return Table("observed", "The readings.", (
        Column("No.", "", "right"), Column("Instrument"), Column("Where, and after what"),
        Column("Read", "", "right"), Column("Fits nothing", "", "right")), rows,
        "Fits nothing: the chance that the reading was misread, was taken at another point, or "
        "comes from none of the causes." + (" * Take it again." if odd else ""))


def odds_table(found: Explanation, made: Sequence[Finding]) -> Table:
    """The share of every cause on every suspect, with what its size comes out at."""
    rows = tuple(
        (f.suspect, cause, per_cent(share), _size_words(found, f.suspect, cause))
        for f in made for cause, share in _ranked(found, f.suspect) if share >= NEGLIGIBLE)
    return Table("odds", "Odds of the causes.", (
        Column("Conductor"), Column("Cause"), Column("Share", "", "right"),
        Column("Comes out at, 90 % range")), rows,
        f"Causes that are not listed have under {per_cent(NEGLIGIBLE)}. The quadrature's own error "
        f"of the odds is {100 * found.error:.1f} % (one standard deviation, {found.points} "
        "points).")


def _ranked(found: Explanation, suspect: str) -> list[tuple[Cause, float]]:
    return sorted(found.odds(suspect).items(), key=lambda item: -item[1])


def _size_words(found: Explanation, suspect: str, cause: Cause) -> str:
    """The size of a cause, or the coupling under it."""
    if cause in ("none of these", "solid connection"):
        return "–"
    if cause == "capacitive coupling":
        live, _, weights = found.capacitances(suspect, cause)
        return f"{span(credible(live, weights), 'F')} to the live conductors"
    unit = "V" if cause == "magnetic pick-up" else "Ω"
    return span(credible(*found.sizes(suspect, cause)), unit)


def _pictures(found: Explanation) -> Iterator[Block]:
    for number, suspect in enumerate(found.reduced.suspects[:PICTURED], 1):
        yield odds_figure(found, suspect, key=f"odds-{number}")
        if (predicted := predicted_figure(found, suspect, key=f"predicted-{number}")) is not None:
            yield predicted
        yield told_figure(found, suspect, key=f"told-{number}")


def next_blocks(investigation: Investigation) -> Iterator[Block]:
    """What would tell most, with what each cause predicts, and what is left out and why."""
    found = explanation_of(investigation)
    assert found is not None
    prospects = prospects_of(investigation)
    worth = worth_taking(investigation)
    if not worth:
        yield Paragraph("No measurement with these instruments would tell the remaining causes "
                        f"apart. {INSULATION_TEST}")
    else:
        little = _little(worth[0])
        yield Paragraph(f"Most would be told by {_next_words(worth[0])}{little}."
                        f"{f' {INSULATION_TEST}' if little else ''}")
        yield next_table(found, worth)
        yield next_figure(simplest(prospects))
    if barred := sorted({candidate_words(p.candidate) for p in prospects if not p.allowed}):
        risk = max(p.trip_chance for p in prospects if not p.allowed)
        yield Paragraph(f"Left out, since the device could trip (chance up to {per_cent(risk)}) or "
                        f"the instrument's range be passed: {listed(barred[:6])}"
                        f"{f' and {len(barred) - 6} more' if len(barred) > 6 else ''}.")


def worth_taking(investigation: Investigation) -> list[Prospect]:
    """The next measurements that would tell something, the best first."""
    return [p for p in simplest(prospects_of(investigation)) if p.bits >= WORTH][:SUGGESTED]


def next_table(found: Explanation, prospects: Sequence[Prospect]) -> Table:
    """The best measurements, and what the likeliest causes predict of each."""
    odds = [found.odds(s) for s in found.reduced.suspects]
    told = {c for p in prospects for c in p.predicted}
    causes = sorted(told, key=lambda c: -sum(o[c] for o in odds))[:SAID]
    rows = tuple(
        (p.candidate.instrument.name,
         f"{pair_words(p.candidate.pair.a, p.candidate.pair.b)}"
         f"{conditions(p.candidate.actions, p.candidate.resistor)}",
         f"{p.bits:.2f}", *(_predicted_words(p, c) for c in causes)) for p in prospects)
    return Table("next-measurements", "What would tell most, and what each cause predicts.", (
        Column("Instrument"), Column("Where, and after what"), Column("Tells", "bit", "right"),
        *(Column(c.capitalize(), "V", "right") for c in causes)), rows,
        "Predictions are the range that 90 % lies in, of the voltage across the instrument.")


def _predicted_words(p: Prospect, cause: Cause) -> str:
    if cause not in p.predicted:
        return "–"
    low, _, high = p.predicted[cause]
    texts = [show(v, "V", 2).removesuffix(" V") if v >= 1 else f"{v:.2g}" for v in (low, high)]
    return texts[0] if texts[0] == texts[1] else " to ".join(texts)


def _little(p: Prospect) -> str:
    """What to say of a measurement that is the best and yet no help."""
    return f", and it would tell little ({p.bits:.2f} bit)" if p.bits < LITTLE else ""


def _next_words(p: Prospect) -> str:
    return f"the {candidate_words(p.candidate)}"


def _method(found: Explanation) -> Iterator[str]:
    shares = [f"{c} {per_cent(found.shares[c])}" for c in CAUSES]
    yield f"Before any reading: {listed(shares)} (a judgement, which the case can replace)."
    if found.reduced.described:
        yield (f"The capacitances are those computed, with {100 * GEOMETRY_SPREAD.likely:.0f} % "
               "standard deviation for the geometry beside the permittivity's range, with "
               f"{100 * DESCRIPTION_SPREAD.likely:.0f} % for what the description has wrong of "
               "them all (now and then a factor of two or more), and with some to surroundings "
               "that the section does not show.")
    else:
        yield (f"The section is taken as not known: {show(UNDESCRIBED.low, 'F/m')} to "
               f"{show(UNDESCRIBED.high, 'F/m')} to the live and to the earthed conductors.")
    yield (f"The supply has {100 * SUPPLY_SPREAD.likely:.0f} % standard deviation; leakage is "
           f"looked for from {show(LEAKAGE.low, 'Ω')} to {show(LEAKAGE.high, 'Ω')}, loads from "
           f"{show(LOAD.low, 'Ω')} to {show(LOAD.high, 'Ω')}.")
    yield (f"Instruments err within their statements; {100 * WIDE_SHARE.likely:.0f} % of readings "
           f"err four times as far, and {100 * MISREAD_SHARE.likely:.0f} % are taken to tell "
           "nothing, so that one misread value does not decide.")
    yield ("How sure a finding is as worded is the chance that the true cause is the one that it "
           "names, or one of those, or a leakage that it says cannot be excluded. It names one "
           f"cause alone from {100 * SURE:.0f} %, and otherwise as many as that takes; where one "
           f"reading alone takes it over {100 * RESTS:.0f} %, it says which. It is not the share "
           "of one cause alone, which the table of odds has. Ranges are those that 90 % lies in.")
    yield "All readings explain one state of the run; its unknowns are shared by all conductors."


def causes_text(investigation: Investigation, width: int) -> str:
    """The findings, the odds and the next measurement, for a terminal of that width."""
    found = explanation_of(investigation)
    if found is None:
        raise Refused("causes", "need a conductor that nothing feeds, and this case has none")
    made = findings(found)
    said = [" ".join(sentences(found, f, customary=investigation.customary)) for f in made]
    blocks: list[Block] = [*(Paragraph(text) for text in said)]
    if found.readings:
        blocks.append(readings_table(found))
    blocks += [odds_table(found, made), *next_blocks(investigation)]
    return "\n\n".join(
        plain(b, width) if isinstance(b, Table) else filled(b.text, width)
        for b in blocks if isinstance(b, Table | Paragraph))


def causes_sources(investigation: Investigation) -> Iterator[tuple[str, Source]]:
    """What the section used, with its source."""
    if causes_part_missing(investigation):
        return
    yield "least insulation resistance that is accepted", ACCEPTED_INSULATION.source
    yield "current that is felt", PERCEPTION_CURRENT.source
    yield "current from which a hand may not let go", LET_GO_CURRENT.source
    for what, value in (("shares of the causes", MISREAD_SHARE), ("capacitances without a section",
                                                                  UNDESCRIBED)):
        yield what, value.source


def causes_results(investigation: Investigation) -> dict[str, Any] | None:
    """For results.json."""
    if causes_part_missing(investigation):
        return None
    found = explanation_of(investigation)
    assert found is not None
    return {
        "odds_error": found.error, "points": found.points,
        "readings": [{"text": reading_words(r), "fits_nothing": found.misread(k)}
                     for k, r in enumerate(found.readings)],
        "suspects": [{
            "conductor": f.suspect, "shares": found.odds(f.suspect), "cause": f.cause,
            "coupling_F": f.coupling, "size": f.size, "leakage_not_excluded_above_ohm":
            f.claim.leak_limit, "coupled_current_A": f.current, "finding": headline(found, f),
            "claimed": f.claim.causes, "sure_as_worded": f.claim.share,
            "rests_on_readings": [k + 1 for k in f.claim.rests_on],
        } for f in findings(found)],
        "next": [{"instrument": p.candidate.instrument.key,
                  "pair": [p.candidate.pair.a, p.candidate.pair.b],
                  "after": sorted(p.candidate.actions), "resistor_ohm": p.candidate.resistor,
                  "bits": p.bits, "trip_chance": p.trip_chance}
                 for p in prospects_of(investigation)[:SUGGESTED]],
    }
