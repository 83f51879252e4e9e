"""A hypothesis as something to solve: one variant of a cause on each suspect conductor."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from functools import cached_property

import numpy as np

from ..physics.burden import Burden
from ..reference.instruments import Instrument
from .coupling import Real, Scores
from .hypotheses import Cause, Variant, size_range
from .observation import Action, Observation
from .readings import Pair
from .reduced import Complex, Defect, Reduced, State, instruments_of

_SAMPLES = 360  # of one period, for the rectified average
MANY = 40  # readings that one explanation takes


@dataclass(frozen=True)
class Group:
    """Variants of one cause that the readings cannot tell apart; `variants[0]` stands for them."""

    variants: tuple[Variant, ...]

    @property
    def cause(self) -> Cause:
        """Of them all."""
        return self.variants[0].cause

    @property
    def share(self) -> float:
        """Of the cause, before any reading [1]."""
        return sum(v.share for v in self.variants)


def groups(found: Sequence[Variant], readings: Sequence[Observation]) -> tuple[Group, ...]:
    """The variants by what these readings can tell of them."""
    circumstances = tuple(dict.fromkeys(r.actions for r in readings))
    made: dict[tuple[object, ...], list[Variant]] = {}
    for v in found:
        made.setdefault(v.look(circumstances), []).append(v)
    return tuple(Group(tuple(g)) for g in made.values())


@dataclass(frozen=True, eq=False)
class Scene:
    """The reduced run with a variant on each of its suspects, in their order.

    Parameters
    ----------
    reduced : the run
    variants : of each suspect's cause
    tools : instruments whose burden is uncertain
    """

    reduced: Reduced
    variants: tuple[Variant, ...]
    tools: tuple[Instrument, ...]

    @cached_property
    def coordinates(self) -> tuple[str, ...]:
        """Names of the normal scores, in their order."""
        own = [f"angle {n}" for n, v in self._suspects() if v.cause == "back-feed through a load"]
        sizes = [f"size {n}" for n, v in self._suspects() if self._sized(v) and n != self.sized]
        return (*self.reduced.coordinates, *instruments_of(self.tools), *own, *sizes)

    @cached_property
    def sized(self) -> str:
        """The last suspect whose cause has a size: its share of the prior is not a score; or ""."""
        return next((n for n, v in reversed(list(self._suspects())) if self._sized(v)), "")

    def scores(self, score: Real) -> Scores:
        """Columns of (Q, d) by name."""
        return dict(zip(self.coordinates, score.T, strict=True))

    def defects(self, size: Real, scores: Scores) -> tuple[Defect, ...]:
        """Of every suspect with anything joined to it."""
        return tuple(self._defect(n, v, size, scores) for n, v in self._suspects() if v.to)

    def size(self, name: str, size: Real, scores: Scores) -> Real:
        """Of the cause on a suspect (Q,), [ohm] or [V]."""
        variant = dict(self._suspects())[name]
        return self._defect(name, variant, size, scores).size

    def volts(self, readings: Sequence[Observation], size: Real, score: Real) -> Real:
        """What each reading's instrument responds to (K, Q) [V]."""
        solved = Solved(self, size, self.scores(score))
        made = [solved.felt(solved.loaded(r.pair, r.actions, solved.admittance(
            r.burden, r.instrument) + 1 / r.resistor), r.instrument) for r in readings]
        return np.array(made).reshape(len(readings), len(size))

    def _suspects(self) -> Iterator[tuple[str, Variant]]:
        return zip(self.reduced.suspects, self.variants, strict=True)

    def _sized(self, variant: Variant) -> bool:
        return size_range(variant.cause, omega=1.0, length=1.0) is not None

    def _defect(
        self, name: str, variant: Variant, size: Real, scores: Mapping[str, Real]
    ) -> Defect:
        from scipy.special import ndtr

        own = size if name == self.sized else ndtr(scores.get(f"size {name}", np.zeros_like(size)))
        angle = ndtr(scores.get(f"angle {name}", np.zeros_like(size)))
        return self.reduced.defect(name, variant, own, angle)


class Solved:
    """A scene at given unknowns (Q,), its circumstances solved as they are asked for."""

    def __init__(self, scene: Scene, size: Real, scores: Scores) -> None:
        self._reduced, self._scores = scene.reduced, scores
        self._defects = scene.defects(size, scores)
        self._capacitance = scene.reduced.capacitance(scores)
        self._states: dict[frozenset[Action], State] = {}

    def port(self, pair: Pair, actions: frozenset[Action]) -> tuple[Complex, Complex]:
        """Unloaded voltage [V] and Thevenin impedance [ohm] of a pair (H, Q)."""
        if actions not in self._states:
            self._states[actions] = self._reduced.solve(
                self._capacitance, self._scores, self._defects, actions)
        return self._reduced.port(self._states[actions], pair, self._scores)

    def loaded(self, pair: Pair, actions: frozenset[Action], admittance: Complex) -> Complex:
        """Voltage of a pair with an admittance on it (H, Q) [V]."""
        v, z = self.port(pair, actions)
        return np.asarray(v / (1 + admittance * z))

    def felt(self, phasors: Complex, tool: Instrument) -> Real:
        """What an instrument responds to (Q,), of phasors over the harmonics (H, Q)."""
        if tool.responds == "average" and len(phasors) > 1:
            return average(phasors, self._reduced.orders)
        return rms(phasors)

    def admittance(self, burden: Burden, tool: Instrument) -> Complex:
        """Of an instrument (H, Q) [S]."""
        y = burden.admittance(self._reduced.omega / (2 * np.pi))
        return self._reduced.admittance(y, self._scores, tool)


def rms(phasors: Complex) -> Real:
    """Over harmonics (H, Q) to (Q,)."""
    return np.asarray(np.sqrt((np.abs(phasors) ** 2).sum(axis=0)))


def average(phasors: Complex, orders: Sequence[int]) -> Real:
    """Rectified average of (H, Q) to (Q,), scaled so that a sine reads its RMS value.

    >>> bool(abs(average(np.array([[230.0], [0.0]]), (1, 3))[0] - 230) < 0.01)
    True
    """
    turns = np.exp(2j * np.pi * np.outer(np.arange(_SAMPLES) / _SAMPLES, orders))
    return np.asarray(np.abs((turns @ phasors).real).mean(axis=0) * np.pi / 2)


def suspects_in(observation: Observation, suspects: Sequence[str]) -> frozenset[str]:
    """The suspects that a reading was taken on."""
    names = {p.rpartition("@")[0] for p in (observation.pair.a, observation.pair.b)}
    return frozenset(names & set(suspects))
