"""What the readings mean: the odds of every cause on every suspect conductor, and its size.

All readings explain one state of the run: its capacitances, its supply and the instruments' burdens
are shared, and a cause on one suspect shows on the others. Suspects are taken in turn; combinations
of causes that the readings so far make very unlikely are dropped.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator, Mapping, Sequence
from dataclasses import dataclass
from functools import cached_property, partial
from typing import TypeAlias

import numpy as np

from ..errors import Refused
from .coupling import STRETCHED, Real
from .evidence import Draws, Integral
from .hypotheses import CAUSES, Cause, prior_shares, variants
from .likelihood import Likelihood, likelihood
from .modes import Problem
from .observation import Observation
from .reduced import Reduced
from .scene import MANY, Group, Scene, groups, suspects_in

Progress: TypeAlias = Callable[[float], None]
"""Told what share of a long work is done [1]; what it raises ends the work."""

STABLE = 0.01  # error of the odds that is aimed at
_DROPPED = 1e-4  # of the likeliest, below which a combination is not taken further
_KEPT = 24  # combinations, at most
_SHARP = 1e-3  # odds against the likeliest below which no sharper ones are asked for
_EARLY = 3  # doublings, at most, while suspects are still being added


@dataclass(frozen=True, eq=False)
class Hypothesis:
    """A cause on each suspect, and what the readings make of it.

    Parameters
    ----------
    groups : of each suspect, in their order
    scene : with the variant that stands for each group
    prior : its share before any reading
    evidence : chance of the readings over that under "none of these"
    error : of it, relative, one standard deviation
    draws : weighted points of its unknowns
    """

    groups: tuple[Group, ...]
    scene: Scene
    prior: float
    evidence: float
    error: float
    draws: Draws

    @property
    def causes(self) -> tuple[Cause, ...]:
        """Of each suspect."""
        return tuple(g.cause for g in self.groups)

    @property
    def weight(self) -> float:
        """Its posterior share, before all are made to add to 1."""
        return self.prior * self.evidence


@dataclass(frozen=True, eq=False)
class Explanation:
    """What the readings mean.

    Parameters
    ----------
    reduced : the run, with its suspects
    readings : that were explained
    shares : of the causes before any reading
    hypotheses : that were not dropped
    error : standard deviation of the odds of the likeliest cause by the quadrature, relative
    points : of the quadrature, over all hypotheses
    """

    reduced: Reduced
    readings: tuple[Observation, ...]
    shares: Mapping[Cause, float]
    hypotheses: tuple[Hypothesis, ...]
    error: float
    points: int

    @cached_property
    def posterior(self) -> Real:
        """Share of each hypothesis; they add to 1."""
        weights = np.array([h.weight for h in self.hypotheses])
        return np.asarray(weights / weights.sum())

    def odds(self, suspect: str) -> dict[Cause, float]:
        """Share of each cause on a suspect; they add to 1."""
        k = self.reduced.suspects.index(suspect)
        shares = dict.fromkeys(CAUSES, 0.0)
        for h, share in zip(self.hypotheses, self.posterior, strict=True):
            shares[h.causes[k]] += float(share)
        return shares

    def likeliest(self, suspect: str) -> Cause:
        """The cause with the largest share."""
        odds = self.odds(suspect)
        return max(odds, key=odds.__getitem__)

    def of_cause(self, suspect: str, cause: Cause) -> Iterator[tuple[Hypothesis, float]]:
        """Hypotheses with that cause on a suspect, and their shares."""
        k = self.reduced.suspects.index(suspect)
        for h, share in zip(self.hypotheses, self.posterior, strict=True):
            if h.causes[k] == cause:
                yield h, float(share)

    def sizes(self, suspect: str, cause: Cause) -> tuple[Real, Real]:
        """Sizes of the cause, [ohm] or [V], and their weights; empty where it has none."""
        made = [(h.scene.size(suspect, h.draws.size, h.scene.scores(h.draws.score)),
                 _shared(h, share)) for h, share in self.of_cause(suspect, cause)]
        return _joined(made)

    def capacitances(self, suspect: str, cause: Cause) -> tuple[Real, Real, Real]:
        """To the live conductors and to all else under the cause [F], and their weights."""
        made = [(*self.reduced.capacitances(h.scene.scores(h.draws.score), suspect),
                 _shared(h, share)) for h, share in self.of_cause(suspect, cause)]
        if not made:
            return (np.empty(0),) * 3
        live, earth, weight = (np.concatenate(parts) for parts in zip(*made, strict=True))
        return live, earth, weight

    def misread(self, reading: int) -> float:
        """Chance that a reading is one that fits nothing: misread, or taken at another point.

        Under "none of these" every reading is.
        """
        return float(sum(share * self._misread_under(h, reading)
                         for h, share in zip(self.hypotheses, self.posterior, strict=True)))

    def told(self, suspect: str, reading: int) -> dict[Cause, float]:
        """What one reading adds to the evidence of each cause, given all the others.

        log10 of its chance under the cause, over that under "none of these". A difference
        between two causes is what it adds to the odds between them.
        """
        with_it, without = dict.fromkeys(CAUSES, 0.0), dict.fromkeys(CAUSES, 0.0)
        k = self.reduced.suspects.index(suspect)
        for h in self.hypotheses:
            with_it[h.causes[k]] += h.weight
            left_out = float(np.mean(h.draws.weight / h.draws.gain[reading]))
            without[h.causes[k]] += h.prior * left_out
        return {c: math.log10(with_it[c] / without[c]) for c in CAUSES
                if with_it[c] > 0 and without[c] > 0}

    def _misread_under(self, h: Hypothesis, reading: int) -> float:
        if self._unexplained(h, reading):
            return 1.0
        share = self._likelihood.misread[reading, 0] / h.draws.gain[reading]
        return float((h.draws.weight * share).sum() / h.draws.weight.sum())

    def _unexplained(self, h: Hypothesis, reading: int) -> bool:
        touched = suspects_in(self.readings[reading], self.reduced.suspects)
        return any(n in touched and c == "none of these"
                   for n, c in zip(self.reduced.suspects, h.causes, strict=True))

    @cached_property
    def _likelihood(self) -> Likelihood:
        return likelihood(self.readings, top=self.reduced.top)


def silent(_: float) -> None:
    """No progress is told."""


def _part_of(progress: Progress, done: int, parts: int, share: float) -> None:
    progress((done + share) / parts)


def explain(
    reduced: Reduced,
    readings: Sequence[Observation],
    *,
    shares: Mapping[str, float] | None = None,
    stable: float = STABLE,
    progress: Progress = silent,
) -> Explanation:
    """The odds of the causes on every suspect.

    Parameters
    ----------
    reduced : the run, with at least one suspect
    readings : at most 40; those on no suspect tell of the supply
    shares : of the causes before any reading, where they differ from `hypotheses.SHARES`
    stable : error of the odds to aim at, relative
    progress : told now and then what share of the work is done; what it raises ends the work

    Raises `Refused`. No odds prove a conductor dead.
    """
    if not reduced.suspects:
        raise Refused("causes", "need a conductor that nothing feeds, with a reading on it")
    if len(readings) > MANY:
        raise Refused("readings", f"may be {MANY} in one explanation", given=len(readings))
    prior = prior_shares(shares)
    search = _Search(reduced, tuple(readings), prior)
    beam: list[_Candidate] = [_Candidate((), 1.0)]
    for count in range(1, len(reduced.suspects) + 1):
        last = count == len(reduced.suspects)
        beam = [search.grown(b, g) for b in beam for g in search.groups if prior[g.cause] > 0]
        part = partial(_part_of, progress, count - 1, len(reduced.suspects))
        search.settle(beam, stable, None if last else _EARLY, part)
        beam = _likely(beam) if not last else beam
    found = tuple(search.finished(b) for b in beam)
    return Explanation(reduced, tuple(readings), prior, found,
                       math.hypot(*_error_parts(beam)),
                       sum(b.points for b in beam))


@dataclass(eq=False)
class _Candidate:
    """A combination of causes on the suspects so far."""

    groups: tuple[Group, ...]
    prior: float
    integral: Integral | None = None

    @property
    def weight(self) -> float:
        return self.prior * (self.integral.value if self.integral else 1.0)

    @property
    def error(self) -> float:
        return self.integral.error if self.integral else 0.0

    @property
    def points(self) -> int:
        return self.integral.points if self.integral else 0


class _Search:
    """Grows combinations of causes suspect by suspect, and settles their evidence."""

    def __init__(self, reduced: Reduced, readings: tuple[Observation, ...],
                 prior: Mapping[Cause, float]) -> None:
        self.reduced = reduced
        self.readings = readings
        self.prior = prior
        self.groups = groups(variants(reduced.run.supply.lines, reduced.cable_lines()), readings)

    def grown(self, base: _Candidate, group: Group) -> _Candidate:
        """One suspect more."""
        both = (*base.groups, group)
        made = _Candidate(both, base.prior * self.prior[group.cause] * group.share)
        made.integral = Integral(self._problem(both))
        return made

    def settle(self, beam: Sequence[_Candidate], stable: float, doublings: int | None,
               progress: Progress) -> None:
        """Double the points of what the error of the odds comes from, until they are stable."""
        done = 0
        while doublings is None or done < doublings:
            progress(1 - 0.75**done)  # how many doublings there will be is not known
            done += 1
            every = _error_parts(beam)
            parts = [(part, b.integral) for part, b in zip(every, beam, strict=True)
                     if b.integral and not b.integral.exhausted]
            to_gain = math.hypot(*(part for part, _ in parts))
            if math.hypot(*every) <= stable or to_gain <= stable / 2:
                return
            most = max(part for part, _ in parts)
            loose = [integral for part, integral in parts if part > most / 2]
            for integral in loose:
                integral.double()
                progress(1 - 0.75**done)

    def finished(self, candidate: _Candidate) -> Hypothesis:
        """The combination as it is reported."""
        integral = candidate.integral
        assert integral is not None
        return Hypothesis(candidate.groups, self._scene(candidate.groups), candidate.prior,
                          integral.value, integral.error, integral.draws)

    def _scene(self, chosen: tuple[Group, ...]) -> Scene:
        plain = (self.groups[0],) * (len(self.reduced.suspects) - len(chosen))
        tools = tuple(dict.fromkeys(r.instrument for r in self.readings))
        return Scene(self.reduced, tuple(g.variants[0] for g in (*chosen, *plain)), tools)

    def _problem(self, chosen: tuple[Group, ...]) -> Problem:
        """Readings on suspects still to come, or under "none of these", say nothing yet."""
        names = self.reduced.suspects
        explained = {n for n, g in zip(names, chosen, strict=False) if g.cause != "none of these"}
        heard = [k for k, r in enumerate(self.readings) if suspects_in(r, names) <= explained]
        scene = self._scene(chosen)
        some = [self.readings[k] for k in heard]
        wide = tuple(k for k, n in enumerate(scene.coordinates) if n in STRETCHED)
        return Problem(lambda size, score: scene.volts(some, size, score),
                       _Heard(self.readings, heard, self.reduced.top),
                       len(scene.coordinates), bool(scene.sized), wide)


class _Heard:
    """The likelihood of some readings; each of the others has gain 1, whatever the unknowns."""

    def __init__(self, readings: Sequence[Observation], heard: list[int], top: float) -> None:
        self._count, self._heard = len(readings), heard
        self._likelihood = likelihood([readings[k] for k in heard], top=top)

    def gain(self, volts: Real) -> Real:
        """Of all the readings (K, Q)."""
        made = np.ones((self._count, volts.shape[1]))
        if self._heard:
            made[self._heard] = self._likelihood.gain(volts)
        return made

    def misfit(self, volts: Real) -> Real:
        """Of those that are heard."""
        return np.asarray(self._likelihood.misfit(volts))


def _likely(beam: Sequence[_Candidate]) -> list[_Candidate]:
    ranked = sorted(beam, key=lambda b: -b.weight)
    return [b for b in ranked[:_KEPT] if b.weight > _DROPPED * ranked[0].weight]


def _error_parts(beam: Sequence[_Candidate]) -> list[float]:
    """What each adds to the relative error of the odds of the likeliest against the rest.

    Odds beyond 1000 to 1 need not be as sharp.
    """
    best = max(beam, key=lambda b: b.weight)
    rest = sum(b.weight for b in beam if b is not best)
    rest = max(rest, _SHARP * best.weight)
    return [b.error if b is best else b.error * b.weight / rest for b in beam]


def _shared(h: Hypothesis, share: float) -> Real:
    return np.asarray(share * h.draws.weight / h.draws.weight.sum())


def _joined(made: Sequence[tuple[Real, Real]]) -> tuple[Real, Real]:
    if not made:
        return np.empty(0), np.empty(0)
    values, weights = zip(*made, strict=True)
    return np.concatenate(values), np.concatenate(weights)


def quantiles(values: Real, weights: Real, shares: Sequence[float]) -> Real:
    """Weighted quantiles.

    >>> quantiles(np.array([1.0, 2.0, 3.0]), np.array([1.0, 1.0, 2.0]), [0.5])
    array([2.])
    """
    order = np.argsort(values)
    reached = np.cumsum(weights[order])
    where = np.searchsorted(reached, np.array(shares) * reached[-1])
    return np.asarray(values[order][np.minimum(where, len(values) - 1)])
