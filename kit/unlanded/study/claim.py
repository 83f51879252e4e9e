"""What a finding claims of one conductor, and the chance that the claim holds as it is worded.

A claim names one cause where that is sure enough, and otherwise as many as it takes. Where
capacitive coupling is the likeliest it is not claimed alone: a leakage that hardly changes any
reading goes with it, and the claim says from how many ohms on.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from .causes import Explanation, Hypothesis
from .coupling import Real
from .hypotheses import LEAKAGE, Cause

SURE = 0.95  # chance from which a claim is made; the causes that it names are as few as that takes
RESTS = 0.7  # chance of it without one reading, below which it rests on that reading
NOT_EXCLUDED = 10.0  # to 1: odds below which the readings do not exclude a size
LEAKS: tuple[Cause, Cause] = ("leakage to a live neighbour", "leakage to earth")
_BINS = 32


@dataclass(frozen=True)
class Claim:
    """One of the causes, or beside capacitive coupling a leakage above the limit.

    Parameters
    ----------
    causes : the likeliest first
    leak_limit : leakage from which on one goes with capacitive coupling [ohm]; infinite for none
    share : chance that it holds [1]
    rests_on : indices of readings without which it would hardly be made
    """

    causes: tuple[Cause, ...]
    leak_limit: float
    share: float
    rests_on: tuple[int, ...]

    @property
    def decided(self) -> bool:
        """Whether it names one cause, and no single reading carries it."""
        return len(self.causes) == 1 and not self.rests_on

    def holds(self, cause: Cause, size: float) -> bool:
        """Whether it does when the cause is this, of that size [ohm].

        >>> coupled = Claim(("capacitive coupling",), 3e5, 0.97, ())
        >>> coupled.holds("leakage to earth", 5e5), coupled.holds("leakage to earth", 1e5)
        (True, False)
        """
        return cause in self.causes or (self.open and cause in LEAKS and size >= self.leak_limit)

    @property
    def open(self) -> bool:
        """Whether a leakage above the limit goes with the causes."""
        return self.causes[0] == "capacitive coupling" and math.isfinite(self.leak_limit)


def claim(found: Explanation, suspect: str) -> Claim:
    """What the readings let one claim of a suspect: the fewest causes that are sure together."""
    odds = found.odds(suspect)
    ranked = sorted(odds, key=odds.__getitem__, reverse=True)
    limit = leak_limit(found, suspect)
    for count in range(1, len(ranked) + 1):
        made = Claim(tuple(ranked[:count]), limit, 1.0, ())
        whole, *without = chances(found, suspect, made)
        if whole >= SURE:
            break
    rests = tuple(k for k, share in enumerate(without) if share < RESTS)
    return Claim(made.causes, limit, float(whole), rests)


def chances(found: Explanation, suspect: str, made: Claim) -> Real:
    """That a claim holds: with all K readings, then without each of them in turn (1 + K,)."""
    at = found.reduced.suspects.index(suspect)
    inside, all_of_them = np.zeros((2, 1 + len(found.readings)))
    for h in found.hypotheses:
        weights = np.vstack([h.draws.weight, h.draws.weight / h.draws.gain])
        weights *= h.prior / len(h.draws.weight)
        all_of_them += weights.sum(axis=1)
        inside += weights @ _within(h, suspect, h.causes[at], made)
    return np.asarray(inside / all_of_them)


def _within(h: Hypothesis, suspect: str, cause: Cause, made: Claim) -> Real:
    """1 for each draw (Q,) at which the claim holds, else 0."""
    if cause in made.causes or not made.holds(cause, math.inf):
        return np.full(len(h.draws.weight), float(cause in made.causes))
    sizes = h.scene.size(suspect, h.draws.size, h.scene.scores(h.draws.score))
    return np.asarray(sizes >= made.leak_limit, dtype=float)


def leak_limit(found: Explanation, suspect: str) -> float:
    """The least resistance from which on no leakage is ten times less likely than none [ohm].

    Of two digits, rounded down, so that the claim is the one that is printed. Infinite where the
    readings, or the shares beforehand, exclude all that is looked for.
    """
    coupled = found.shares["capacitive coupling"]
    leaks = [c for c in LEAKS if found.shares[c] > 0]
    if not (coupled > 0 and leaks):
        return math.inf
    plain = found.odds(suspect)["capacitive coupling"] / coupled
    edges = np.append(np.geomspace(LEAKAGE.low, LEAKAGE.high, _BINS + 1)[:-1], math.inf)
    limits = []
    for cause in leaks:
        sizes, weights = found.sizes(suspect, cause)
        held = np.histogram(sizes, edges, weights=weights)[0] * _BINS
        open_to = NOT_EXCLUDED * held >= plain * found.shares[cause]
        limits.append(edges[_BINS - int(np.argmin(np.append(open_to[::-1], False)))])
    return _two_digits(float(min(limits)))


def _two_digits(value: float) -> float:
    """Rounded down to two significant digits.

    >>> _two_digits(421_697.0), _two_digits(1e6), _two_digits(math.inf)
    (420000.0, 1000000.0, inf)
    """
    if math.isinf(value):
        return value
    step = 10.0 ** (math.floor(math.log10(value) + 1e-9) - 1)
    return math.floor(value / step + 1e-9) * step
