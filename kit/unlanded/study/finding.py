"""What the odds come to on one conductor, and the sentences that say so.

A finding says what, how sure, and what it leaves open. It never says that a conductor is dead.
"""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence
from dataclasses import dataclass

import numpy as np

from ..errors import listed
from ..reference.limits import LET_GO_CURRENT, PERCEPTION_CURRENT
from ..reference.records import Source, Value
from ..units import show, show_length
from .causes import Explanation, quantiles
from .claim import LEAKS, Claim, claim
from .coupling import Real
from .hypotheses import LEAKAGE, Cause
from .observation import NOTHING
from .readings import Pair
from .scene import Solved, rms

LEADING = 0.75  # share of a cause from which it leads among those that are open
SUSPECT_READING = 0.5  # chance of a misread from which a reading counts as one that does not fit
ACCEPTED_INSULATION = Value(1e6, "Ω", Source("IEC 60364-6", "from memory",
                                             "insulation resistance, to 500 V"))

Range = tuple[float, float, float]
"""Values that 5, 50 and 95 % of the posterior lie below."""


@dataclass(frozen=True)
class Finding:
    """What the readings come to on one conductor.

    Parameters
    ----------
    suspect : the conductor
    cause, share : the likeliest cause, and its share
    second, second_share : the next one
    size : of the likeliest cause, [ohm] or [V]; None where it has none
    coupling : capacitance to the live conductors under it [F]; None where nothing is known of it
    claim : what the finding's first sentence claims, and how sure that is
    leak_odds : of capacitive coupling over leakage below 1 MΩ
    current : that capacitive coupling drives through a bond from the conductor to earth [A]
    misfits : indices of readings that fit nothing
    alike : whether no reading speaks clearly for either of the two likeliest causes
    """

    suspect: str
    cause: Cause
    share: float
    second: Cause
    second_share: float
    size: Range | None
    coupling: Range | None
    claim: Claim
    leak_odds: float
    current: Range
    misfits: tuple[int, ...]
    alike: bool

    @property
    def felt(self) -> bool:
        """Whether the coupled current could reach what is felt."""
        return self.current[2] >= PERCEPTION_CURRENT.likely


def finding(found: Explanation, suspect: str) -> Finding:
    """What the readings come to on one of the suspects."""
    odds = found.odds(suspect)
    cause, second = sorted(odds, key=odds.__getitem__, reverse=True)[:2]
    sizes, size_weights = found.sizes(suspect, cause)
    live, _, weights = found.capacitances(suspect, cause)
    sized = len(sizes) > 0 and float(np.ptp(sizes)) > 0
    misfits = tuple(k for k in range(len(found.readings))
                    if found.misread(k) > SUSPECT_READING)
    return Finding(
        suspect, cause, odds[cause], second, odds[second],
        credible(sizes, size_weights) if sized else None,
        None if cause == "none of these" else credible(live, weights),
        claim(found, suspect), _leak_odds(found, suspect), coupled_current(found, suspect),
        misfits, _alike(found, suspect, cause, second))


def coupled_current(found: Explanation, suspect: str) -> Range:
    """What capacitive coupling drives through a bond from the suspect to earth [A].

    With capacitances as the readings leave them under that cause.
    """
    made = []
    for h, share in found.of_cause(suspect, "capacitive coupling"):
        solved = Solved(h.scene, h.draws.size, h.scene.scores(h.draws.score))
        v, z = solved.port(Pair(f"{suspect}@far"), NOTHING)
        made.append((rms(v / z), share * h.draws.weight / h.draws.weight.sum()))
    if not made:
        return (0.0, 0.0, 0.0)
    values, weights = (np.concatenate(x) for x in zip(*made, strict=True))
    return credible(values, weights)


def credible(values: Real, weights: Real) -> Range:
    """What 5, 50 and 95 % of the weighted values lie below."""
    low, middle, high = quantiles(values, weights, (0.05, 0.5, 0.95))
    return float(low), float(middle), float(high)


def _alike(found: Explanation, suspect: str, first: Cause, second: Cause) -> bool:
    told = (found.told(suspect, k) for k in range(len(found.readings)))
    return all(abs(t.get(first, 0.0) - t.get(second, 0.0)) < math.log10(3) for t in told)


def _leak_odds(found: Explanation, suspect: str) -> float:
    """Of capacitive coupling over a leakage that an installation's insulation must not have."""
    poor = 0.0
    for cause in LEAKS:
        sizes, weights = found.sizes(suspect, cause)
        poor += float(weights[sizes < ACCEPTED_INSULATION.likely].sum())
    good = found.odds(suspect)["capacitive coupling"]
    return good / poor if poor > 0 else math.inf


def sentences(
    found: Explanation, made: Finding, *, customary: bool = False
) -> Iterator[str]:
    """What, how sure, and what it leaves open; then how much the coupling could drive.

    Lengths are in feet if `customary`.
    """
    yield headline(found, made)
    if made.coupling is not None and made.claim.decided:
        yield f"The capacitance to the live conductors comes out at {span(made.coupling, 'F')}."
    if made.cause != "none of these":
        for k in made.misfits:
            yield (f"Reading {k + 1} ({found.readings[k].text}, {found.readings[k].instrument.name}"
                   ") fits none of the causes that fit the others: take it again.")
    yield danger(found, made, customary=customary)
    yield (f"Whatever the odds, “{made.suspect}” counts as live until it is proved otherwise at "
           "the point of work.")


def headline(found: Explanation, made: Finding) -> str:
    """The finding in one sentence: what, how sure, and what it leaves open."""
    of = f"on “{made.suspect}”"
    if not found.readings:
        return f"No reading has been taken {of}: the odds are those of the trade beforehand."
    if len(made.claim.causes) > 1:
        return _several(found, made, of)
    if made.cause == "none of these":
        return (f"No cause here explains the readings {of} ({odds_words(_ratio(made))} over "
                f"{made.second}): the run is not as described, or more than one thing is wrong; "
                f"{_sure(made.claim)}.")
    if made.cause == "capacitive coupling":
        return (f"The readings {of} are what capacitive coupling on this run predicts "
                f"({_over(made)}); {_open(made.claim)}; {_sure(made.claim)}.")
    return (f"The readings {of} point to {made.cause}{_sized(made)} "
            f"({odds_words(_ratio(made))} over {made.second}); {_sure(made.claim)}.")


def _several(found: Explanation, made: Finding, of: str) -> str:
    odds = found.odds(made.suspect)
    first, *rest = [f"{c} ({_percent(odds[c])})" for c in made.claim.causes]
    why = f": {_why(made)}" if len(rest) == 1 else ""
    if made.share >= LEADING:
        said = f"point to {first} without ruling out {listed(rest)}{why}"
    elif why:
        said = f"cannot tell {first} from {rest[0]}{why}"
    else:
        said = f"leave open {listed([first, *rest])}"
    return f"The readings {of} {said}; one of these{_or_leakage(made.claim)}, {_sure(made.claim)}."


def _or_leakage(claim: Claim) -> str:
    """What goes with capacitive coupling and is not among the causes."""
    if not claim.open or set(LEAKS) <= set(claim.causes):
        return ""
    return f" or leakage above {show(claim.leak_limit, 'Ω', 2)}"


def _sure(claim: Claim) -> str:
    """How sure the sentence is, and which readings alone make it so."""
    percent = math.floor(100 * claim.share)
    which = "that it is this or such a leakage" if _open_alone(claim) else "as worded"
    said = f"{'over 99' if percent >= 99 else percent} % sure {which}"
    numbers = listed([str(k + 1) for k in claim.rests_on])
    if len(claim.rests_on) > 1:
        return f"{said}, but each of readings {numbers} alone carries that: take them again"
    return f"{said}, but reading {numbers} alone carries that: take it again" if numbers else said


def _open_alone(claim: Claim) -> bool:
    return claim.open and len(claim.causes) == 1


def _why(made: Finding) -> str:
    if made.alike:
        return "both predict every one of them, within what the instruments can tell"
    if "none of these" in (made.cause, made.second):
        other = made.second if made.cause == "none of these" else made.cause
        return f"{other} fits them only if one of them is misread, or fits them badly"
    return "both can produce them, the one more easily than the other"


def _over(made: Finding) -> str:
    """The odds over a leakage that matters, and over the next cause of another kind."""
    said = (f"{odds_words(made.leak_odds)} over leakage below "
            f"{show(ACCEPTED_INSULATION.likely, 'Ω')}")
    if made.second in LEAKS:
        return said
    return f"{said}, {odds_words(_ratio(made))} over {made.second}"


def _ratio(made: Finding) -> float:
    return made.share / made.second_share if made.second_share > 0 else math.inf


def _open(claim: Claim) -> str:
    if math.isinf(claim.leak_limit):
        return f"leakage up to {show(LEAKAGE.high, 'Ω')} is excluded by these instruments"
    return (f"leakage above {show(claim.leak_limit, 'Ω', 2)} cannot be excluded by these "
            "instruments")


def _sized(made: Finding) -> str:
    if made.size is None:
        return ""
    return f" of {span(made.size, 'V' if made.cause == 'magnetic pick-up' else 'Ω')}"


def span(values: Range, unit: str) -> str:
    """From the lower to the upper end of a range.

    >>> span((1.9e5, 2e5, 2.31e5), "Ω"), span((1.21, 1.23, 1.24), "V")
    ('190 kΩ to 230 kΩ', 'about 1.2 V')
    """
    low, high = show(values[0], unit, 2), show(values[2], unit, 2)
    return f"{low} to {high}" if low != high else f"about {low}"


def danger(found: Explanation, made: Finding, *, customary: bool = False) -> str:
    """What the coupled current means, with the limits of IEC 60479-1."""
    most, length = made.current[2], found.reduced.run.length
    felt, let_go = PERCEPTION_CURRENT.likely, LET_GO_CURRENT.likely
    drives = f"Coupling alone drives up to {show(most, 'A', 2)} through a bond to earth"
    if most >= let_go:
        return (f"{drives}. That is above the {show(let_go, 'A')} from which a hand may not let "
                "go (IEC 60479-1): this coupled voltage can injure.")
    if most >= felt:
        return (f"{drives}. That is above the {show(felt, 'A')} that is felt and makes one start "
                "(IEC 60479-1): a fall or a jerk can injure.")
    if most <= 0:
        return "No live conductor couples to it as the run is described."
    reach = show_length(length * felt / most, customary=customary, digits=2)
    return (f"{drives}, below the {show(felt, 'A')} that is felt (IEC 60479-1); it grows with "
            f"length, and may reach that on {reach} of this run. That a coupled voltage cannot "
            "hurt is true of small capacitances only.")


def odds_words(ratio: float) -> str:
    """Odds as they are said, to two digits.

    >>> odds_words(168.2), odds_words(2.345), odds_words(5e4)
    ('odds 170 to 1', 'odds 2.3 to 1', 'odds over 1000 to 1')
    """
    if ratio > 1000:
        return "odds over 1000 to 1"
    return f"odds {float(f'{ratio:.2g}'):g} to 1"


def _percent(share: float) -> str:
    return f"{100 * share:.0f} %"


def findings(found: Explanation, suspects: Sequence[str] | None = None) -> tuple[Finding, ...]:
    """Of each suspect, in order."""
    return tuple(finding(found, s) for s in (suspects or found.reduced.suspects))
