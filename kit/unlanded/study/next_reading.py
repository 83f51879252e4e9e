"""The next measurement: which reading would tell most about the causes, and what each predicts.

What a reading is worth is the mutual information between the causes and what will be shown, in
bits: how much it is expected to reduce what is not known about them. Readings that could trip the
device, or that the instrument could not take, are left out.
"""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

from ..physics.network import EARTH
from ..reference.instruments import Instrument
from .causes import Explanation, Hypothesis, quantiles
from .coupling import Real, Scores
from .hypotheses import Cause
from .likelihood import error_chance, misread_share, reference_chance
from .observation import ACTIONS, NOTHING, Action
from .readings import Pair
from .reduced import instruments_of
from .scene import Scene, Solved, rms

ADDED_RESISTOR = 100e3  # ohm
LIGHT = 300e3  # ohm: an instrument of more hardly loads, and a resistor beside it is another one
RISK = 0.02  # chance of a trip, or of going over range, above which a reading is not suggested
_DRAWS = 192  # for each hypothesis
_BINS = 24
_IGNORED = 1e-3  # share of a hypothesis


@dataclass(frozen=True)
class Candidate:
    """A reading that could be taken."""

    instrument: Instrument
    pair: Pair
    actions: frozenset[Action] = NOTHING
    resistor: float = math.inf


@dataclass(frozen=True, eq=False)
class Prospect:
    """What a reading is worth.

    Parameters
    ----------
    candidate : the reading
    bits : information about the causes that it is expected to give
    predicted : by the cause on the suspect that it is taken on, the voltage across the instrument
        at 5, 50 and 95 %
    trip_chance : chance that its current passes what must not trip the device
    over_chance : chance that the voltage passes the instrument's largest range
    """

    candidate: Candidate
    bits: float
    predicted: Mapping[Cause, tuple[float, float, float]]
    trip_chance: float
    over_chance: float

    @property
    def allowed(self) -> bool:
        """Whether it is neither likely to trip the device nor too much for the instrument."""
        return max(self.trip_chance, self.over_chance) <= RISK


def usual_candidates(found: Explanation, tools: Sequence[Instrument]) -> tuple[Candidate, ...]:
    """Each instrument on each suspect, at either end, after each action, with a resistor or not."""
    usable = [t for t in tools if t.kind != "body"]
    return tuple(c for s in found.reduced.suspects for t in usable for c in _usual(found, s, t))


def _usual(found: Explanation, suspect: str, tool: Instrument) -> Iterator[Candidate]:
    far, near = Pair(f"{suspect}@far"), Pair(f"{suspect}@near")
    yield Candidate(tool, far)
    yield Candidate(tool, near)
    for action in ACTIONS:
        yield Candidate(tool, near if action.startswith("far") else far, frozenset({action}))
    live = next(iter(found.reduced.live_conductors()), None)
    if tool.kind == "proximity":
        return
    if live is not None:
        yield Candidate(tool, Pair(f"{suspect}@far", f"{live}@far"))
    if abs(1 / tool.ranges[-1].burden.admittance(50.0)) > LIGHT:
        yield Candidate(tool, far, NOTHING, ADDED_RESISTOR)


def next_readings(
    found: Explanation,
    candidates: Sequence[Candidate],
    *,
    non_operating: float = math.inf,
    costs: Mapping[str, float] | None = None,
) -> tuple[Prospect, ...]:
    """The candidates, those that may be taken first, by what they tell for what they cost.

    Parameters
    ----------
    non_operating : residual current that must not trip the device [A]
    costs : of an action or of an instrument's key, in any unit; one of 1 where none is given
    """
    given = costs or {}
    draws = [_Set(h, share, candidates)
             for h, share in zip(found.hypotheses, found.posterior, strict=True)
             if share > _IGNORED]
    made = [_prospect(found, draws, c, non_operating) for c in candidates]
    return tuple(sorted(made, key=lambda p: (not p.allowed,
                                             -p.bits / _cost(p.candidate, given))))


def _cost(candidate: Candidate, costs: Mapping[str, float]) -> float:
    extra = sum(costs.get(a, 0.0) for a in candidate.actions)
    return costs.get(candidate.instrument.key, 1.0) + extra


def simplest(prospects: Sequence[Prospect]) -> tuple[Prospect, ...]:
    """Those that may be taken, without any that a simpler one on the same instrument makes idle.

    Simpler is one with fewer actions and no resistor, or an earlier one; idle is one that tells
    hardly more.
    """
    kept: list[Prospect] = []
    for p in sorted((p for p in prospects if p.allowed), key=_effort):
        same = (q for q in kept if q.candidate.instrument == p.candidate.instrument)
        if all(p.bits > 1.05 * q.bits + 0.01 for q in same):
            kept.append(p)
    return tuple(p for p in prospects if p in kept)


def _effort(p: Prospect) -> int:
    return len(p.candidate.actions) + math.isfinite(p.candidate.resistor)


class _Set:
    """Draws of one hypothesis, of even weight, spread over the variants that it stands for."""

    def __init__(self, h: Hypothesis, share: float, candidates: Sequence[Candidate]) -> None:
        self.causes, self.share = h.causes, float(share)
        tools = [c.instrument for c in candidates]
        which = _even(h.draws.weight)
        scores = _filled(h.scene.scores(h.draws.score[which]), tools)
        self._known: dict[Candidate, tuple[Real, Real]] = {}
        self.parts = [
            Solved(scene, h.draws.size[which][at], {n: v[at] for n, v in scores.items()})
            for scene, at in _by_variant(h)
        ]

    def met(self, c: Candidate) -> tuple[Real, Real]:
        """Voltage across the instrument and current through it and the resistor (Q,)."""
        if c not in self._known:
            both = [met(p, c) for p in self.parts]
            volts, amperes = (np.concatenate(x) for x in zip(*both, strict=True))
            self._known[c] = volts, amperes
        return self._known[c]


def _even(weight: Real) -> NDArray[np.intp]:
    """Indices of `_DRAWS` draws, each as often as its weight says."""
    reached = np.cumsum(weight)
    at = np.searchsorted(reached, (np.arange(_DRAWS) + 0.5) / _DRAWS * reached[-1])
    return np.asarray(at, dtype=np.intp)


def _filled(scores: Scores, tools: Sequence[Instrument]) -> Scores:
    """The scores with those of instruments that have not been used yet, evenly spread."""
    from scipy.special import ndtri

    made = dict(scores)
    rng = np.random.default_rng(0)
    for name in instruments_of(tools):
        if name not in made:
            made[name] = ndtri((rng.permutation(_DRAWS) + 0.5) / _DRAWS)
    return made


def _by_variant(h: Hypothesis) -> Iterator[tuple[Scene, slice]]:
    """Scenes of the variants of a hypothesis' groups, and every how many draws each has.

    The last suspect's variants are told apart; those of the others by the one that stands for them.
    """
    group = h.groups[-1]
    reached = np.cumsum([v.share for v in group.variants]) / group.share
    stops = np.round(reached * _DRAWS).astype(int)
    start = 0
    for variant, stop in zip(group.variants, stops, strict=True):
        if stop > start:
            scene = Scene(h.scene.reduced, (*h.scene.variants[:-1], variant), h.scene.tools)
            yield scene, slice(start, int(stop))
        start = int(stop)


def met(solved: Solved, c: Candidate) -> tuple[Real, Real]:
    """Voltage across an instrument, and current through it and the resistor beside it (Q,).

    Its ranges are tried from the largest down, as in the reading sheet.
    """
    v, z = solved.port(c.pair, c.actions)
    volts, amperes = np.full(v.shape[1], -np.inf), np.zeros(v.shape[1])
    for r in reversed(c.instrument.ranges):
        y = solved.admittance(r.burden, c.instrument) + 1 / c.resistor
        loaded = v / (1 + y * z)
        lower = volts <= r.full_scale
        volts = np.where(lower, solved.felt(loaded, c.instrument), volts)
        amperes = np.where(lower, rms(loaded * y), amperes)
    return volts, amperes


def _prospect(
    found: Explanation, draws: Sequence[_Set], c: Candidate, non_operating: float
) -> Prospect:
    found_there = [(d, *d.met(c)) for d in draws]
    whole = sum(d.share for d in draws)
    top = c.instrument.ranges[-1].full_scale
    edges = _edges(c, np.concatenate([v for _, v, _ in found_there]))
    shown: dict[tuple[Cause, ...], Real] = {}
    volts: dict[Cause, list[tuple[Real, Real]]] = {}
    suspect = _suspect(found, c)
    for d, v, _ in found_there:
        unknown = _unknown(found, d.causes, c)
        chances = _chances(c, v, edges, found.reduced.top, unknown).mean(axis=0)
        shown[d.causes] = shown.get(d.causes, 0.0) + d.share / whole * chances
        if not unknown:
            volts.setdefault(d.causes[suspect], []).append((v, np.full(len(v), d.share)))
    through_earth = EARTH in (c.pair.a, c.pair.b)
    trip = through_earth * sum(d.share * float(np.mean(i > non_operating))
                               for d, _, i in found_there)
    over = sum(d.share * float(np.mean(v > top)) for d, v, _ in found_there)
    return Prospect(c, _information(np.array(list(shown.values()))), {
        cause: _three(parts) for cause, parts in volts.items()}, trip / whole, over / whole)


def _three(parts: Sequence[tuple[Real, Real]]) -> tuple[float, float, float]:
    volts, weights = (np.concatenate(x) for x in zip(*parts, strict=True))
    low, middle, high = quantiles(volts, weights, (0.05, 0.5, 0.95))
    return float(low), float(middle), float(high)


def _suspect(found: Explanation, c: Candidate) -> int:
    """Index of the suspect that the reading is taken on."""
    names = [p.rpartition("@")[0] for p in (c.pair.a, c.pair.b)]
    return next((k for k, s in enumerate(found.reduced.suspects) if s in names), 0)


def _unknown(found: Explanation, causes: tuple[Cause, ...], c: Candidate) -> bool:
    names = {p.rpartition("@")[0] for p in (c.pair.a, c.pair.b)}
    return any(cause == "none of these" and suspect in names
               for suspect, cause in zip(found.reduced.suspects, causes, strict=True))


def _edges(c: Candidate, volts: Real) -> Real:
    """Between displays that are told apart: the threshold, or quantiles of what may be met."""
    if c.instrument.threshold is not None:
        return np.array([c.instrument.threshold])
    edges = np.unique(np.quantile(volts, np.linspace(0, 1, _BINS + 1)[1:-1]))
    kept = [edges[0]]
    for edge in edges[1:]:
        if edge - kept[-1] > c.instrument.accuracy_at(float(edge)) / 2:
            kept.append(edge)
    return np.array(kept)


def _chances(c: Candidate, volts: Real, edges: Real, top: float, unknown: bool) -> Real:
    """Chance of each display between the edges (Q, B), given the voltage (Q,)."""
    ends = [-math.inf, *edges, math.inf]
    reference = np.array([reference_chance(a, b, top=top)
                          for a, b in pairwise(ends)])
    reference /= reference.sum()
    if unknown:
        return reference[None]
    half = np.maximum(_half_widths(c.instrument, volts), 1e-6)[:, None]
    below = error_chance(edges - volts[:, None], half)
    reached = np.column_stack([np.zeros(len(volts)), below, np.ones(len(volts))])
    share = misread_share(c.instrument.kind)
    return np.asarray((1 - share) * np.diff(reached, axis=1) + share * reference)


def _half_widths(tool: Instrument, volts: Real) -> Real:
    if tool.threshold is not None:
        return np.full(len(volts), tool.accuracy_at(tool.threshold))
    scales = np.array([r.full_scale for r in tool.ranges])
    k = np.minimum(np.searchsorted(scales, volts), len(scales) - 1)
    percent = np.array([r.percent for r in tool.ranges])[k]
    counts = np.array([r.counts * r.resolution + r.resolution / 2 for r in tool.ranges])[k]
    return np.asarray(percent * volts + counts)


def _information(joint: Real) -> float:
    """Mutual information of a joint distribution (causes, displays) [bit].

    >>> _information(np.array([[0.5, 0.0], [0.0, 0.5]]))
    1.0
    """
    alone = joint.sum(axis=1, keepdims=True) * joint.sum(axis=0, keepdims=True)
    held = joint > 0
    return float((joint[held] * np.log2(joint[held] / alone[held])).sum())
