"""Investigations drawn at random: a run, a cause, what it does, and what instruments then show.

Cause, sizes and spreads are drawn from what `causes` thinks beforehand; the errors of instruments
are drawn here, without the code that weighs them.
"""

from __future__ import annotations

import math
from dataclasses import dataclass, replace

import numpy as np

from unlanded.physics import layouts
from unlanded.physics.layouts import Core
from unlanded.physics.section import Section
from unlanded.reference.instruments import INSTRUMENTS, Instrument
from unlanded.study.ends import Bonded, Driven
from unlanded.study.hypotheses import CAUSES, SHARES, Variant, variants
from unlanded.study.next_reading import Candidate, met
from unlanded.study.observation import Observation, observe
from unlanded.study.readings import Pair
from unlanded.study.reduced import Reduced
from unlanded.study.run import Run
from unlanded.study.scene import Scene, Solved
from unlanded.study.supply import Supply

KIT = tuple(INSTRUMENTS[k] for k in ("digital-10M", "low-impedance", "moving-coil", "coil-tester",
                                     "two-pole", "proximity"))
SUSPECT, SECOND = "spare", "other"
PERMITTIVITY = (4.8, 3.5, 6.5)  # of the covers: likely, low and high


@dataclass(frozen=True)
class Wrong:
    """How an investigation departs from what `causes` believes of it.

    Parameters
    ----------
    gain : of every instrument
    capacitance : factor on all capacitances of the run
    permittivity : the covers' true one over the top of its range, where it is not within it
    misread : one reading, at random, shows a value that has nothing to do with the run
    """

    gain: float = 1.0
    capacitance: float = 1.0
    permittivity: float | None = None
    misread: bool = False


def sections(permittivities: tuple[float, ...] = PERMITTIVITY
             ) -> list[tuple[tuple[str, ...], list[Section]]]:
    """Cables with the covers' permittivity likely, low and high."""
    made = []
    for names in (("line", "neutral", "spare"), ("line", "neutral", "earthed", "spare"),
                  ("line", "spare", "neutral", "earthed", "other")):
        cores = [Core(0.89e-3, 1.69e-3, e) for e in permittivities]
        made.append((names, [Section(layouts.laid_up(names, core)) for core in cores]))
    names = ("line", "earthed", "spare")
    cores = [Core(0.69e-3, 1.39e-3, e) for e in permittivities]
    made.append((names, [Section(layouts.flat_twin(names, core, earth_radius=0.565e-3))
                         for core in cores]))
    return made


class Bench:
    """Draws investigations by their number; the same number gives the same one.

    With more than one suspect, of the cable that has them all.
    """

    def __init__(self, wrong: Wrong | None = None, suspects: tuple[str, ...] = (SUSPECT,)) -> None:
        self.wrong, self.suspects = wrong or Wrong(), suspects
        near = {"line": Driven("L"), "neutral": Bonded("N"), "earthed": Bonded("earth")}
        supply = Supply(230.0, 50.0)
        self._runs = [[Run(s, 1.0, supply, {n: near[n] for n in names if n in near}, {},
                           (7e-3,) * len(names)) for s in cables]
                      for names, cables in sections() if set(suspects) <= set(names)]
        self._matrices = [[r.matrix for r in runs] for runs in self._runs]
        self._true = self._matrices
        if self.wrong.permittivity is not None:
            true = (self.wrong.permittivity * max(PERMITTIVITY),) * 3
            self._true = [[replace(r, section=s, capacitance=None).matrix
                           for r, s in zip(runs, cables, strict=True)]
                          for runs, (_, cables) in zip(self._runs, (
                              x for x in sections(true) if set(suspects) <= set(x[0])),
                              strict=True)]

    def site(self, number: int) -> Site:
        """The investigation of that number."""
        rng = np.random.default_rng([7, number])
        which = int(rng.integers(len(self._runs)))
        length = float(np.exp(rng.uniform(math.log(5.0), math.log(300.0))))
        runs = [replace(r, length=length, capacitance=c)
                for r, c in zip(self._runs[which], self._matrices[which], strict=True)]
        factor = self.wrong.capacitance
        truth = Reduced(*(replace(r, capacitance=c * factor) for r, c in
                          zip(runs, self._true[which], strict=True)), self.suspects)
        return Site(Reduced(*runs, self.suspects), truth, rng, self.wrong)


class Site:
    """One investigation: what is so, and what instruments show."""

    def __init__(self, reduced: Reduced, truth: Reduced, rng: np.random.Generator, wrong: Wrong
                 ) -> None:
        self.reduced, self._rng, self._wrong = reduced, rng, wrong
        self.variants = {name: self._variant() for name in truth.suspects}
        self.cause = self.variants[SUSPECT].cause
        scene = Scene(truth, tuple(self.variants.values()), KIT)
        score = rng.standard_normal((1, len(scene.coordinates)))
        size = rng.random(1)
        self.scores = scene.scores(score)
        self.size = {n: float(scene.size(n, size, self.scores)[0]) for n in truth.suspects}
        self.coupling = {n: float(truth.capacitances(self.scores, n)[0][0])
                         for n in truth.suspects}
        self._solved = Solved(scene, size, self.scores)

    def _variant(self) -> Variant:
        cause = CAUSES[self._rng.choice(len(CAUSES), p=[SHARES[c].likely for c in CAUSES])]
        own = [v for v in variants(("L",), ("L",)) if v.cause == cause]
        return own[self._rng.choice(len(own), p=[v.share for v in own])]

    def readings(self, candidates: list[Candidate]) -> list[Observation]:
        """What is shown, one after the other."""
        spoilt = int(self._rng.integers(len(candidates))) if self._wrong.misread else -1
        return [self.reading(c, spoilt=k == spoilt) for k, c in enumerate(candidates)]

    def reading(self, c: Candidate, *, spoilt: bool = False) -> Observation:
        """What one instrument shows."""
        nothing = 0.30 if c.instrument.kind == "proximity" else 0.05
        about_it = any(name in (c.pair.a + c.pair.b) and v.cause == "none of these"
                       for name, v in self.variants.items())
        if spoilt or about_it or self._rng.random() < nothing:
            volts, error = self._anything(), 0.0
        else:
            volts = float(met(self._solved, c)[0][0])
            error = self._error(c.instrument, volts)
        return observe(c.instrument, c.pair, _text(c.instrument, volts, error),
                       actions=c.actions, resistor=c.resistor)

    def _anything(self) -> float:
        top = self.reduced.top
        if self._rng.random() < 0.5:
            return float(self._rng.uniform(0, top))
        return float(np.exp(self._rng.uniform(math.log(0.01), math.log(top))))

    def _error(self, tool: Instrument, volts: float) -> float:
        """Half rectangular, half normal, now and then four times as wide; and the gain's."""
        half = tool.accuracy_at(volts) * (4.0 if self._rng.random() < 0.05 else 1.0)
        error = (self._rng.uniform(-half, half) if self._rng.random() < 0.5
                 else self._rng.normal(0, half / math.sqrt(3)))
        return float(error + (self._wrong.gain - 1) * volts)


def _text(tool: Instrument, volts: float, error: float) -> str:
    if tool.threshold is not None:
        return "lit" if volts + error >= tool.threshold else "not lit"
    settled = tool.range_for(volts)
    shown = max(0.0, volts + error)
    if volts > tool.ranges[-1].full_scale:
        return tool.show(volts).text
    steps = round(shown / settled.resolution) * settled.resolution
    decimals = max(0, -math.floor(math.log10(settled.resolution) + 1e-9))
    return f"{steps:.{decimals}f} V"


def usual_kit(rng: np.random.Generator) -> list[Candidate]:
    """Two to six readings that an electrician might take."""
    far, near = Pair(f"{SUSPECT}@far"), Pair(f"{SUSPECT}@near")
    digital, low, coil_meter, coil, two_pole, proximity = KIT
    more = [
        Candidate(digital, near), Candidate(low, near), Candidate(coil_meter, far),
        Candidate(coil, far), Candidate(two_pole, far), Candidate(proximity, far),
        Candidate(digital, Pair(f"{SUSPECT}@far", "line@far")),
        Candidate(digital, far, resistor=100e3),
        Candidate(digital, far, frozenset({"neighbours off"})),
        Candidate(digital, far, frozenset({"loads off"})),
        Candidate(digital, near, frozenset({"far end disconnected"})),
    ]
    chosen = rng.permutation(len(more))[: rng.integers(0, 5)]
    return [Candidate(digital, far), Candidate(low, far), *(more[k] for k in chosen)]
