"""What a cause of any size would read: each reading taken, against the size of the cause."""

from __future__ import annotations

import math
from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from ..errors import Refused, listed
from ..reference.records import Value
from ..study.hypotheses import CAUSES, Cause, Variant, size_at, size_range, variants
from ..study.observation import Observation
from ..study.reduced import Reduced
from ..study.scene import Scene
from ..units import show
from .causes_words import reading_words
from .figure import Band, Figure, Line, Points, Reference, log_axis
from .words import capital, cut

Real = NDArray[np.float64]
SIZED: tuple[Cause, ...] = tuple(
    c for c in CAUSES if size_range(c, omega=1.0, length=1.0) is not None)
_POINTS = 61
_FLOOR = 0.01  # volts: less is drawn as this
_DRAWN = 6  # readings on one picture
_DRAWS = 64  # of the unknowns, a power of 2


@dataclass(frozen=True, eq=False)
class Trial:
    """A cause tried on one suspect: what it reads with the unknowns as likely, and over them.

    Parameters
    ----------
    reduced : the run with its suspects
    readings : that were taken
    suspect : the conductor that the cause is tried on
    cause : one that has a size; nothing but capacitive coupling is on the other suspects
    """

    reduced: Reduced
    readings: tuple[Observation, ...]
    suspect: str
    cause: Cause

    def __post_init__(self) -> None:
        if self.cause not in SIZED:
            raise Refused("cause", "has no size to try", given=self.cause,
                          hint=f"known: {', '.join(SIZED)}")
        if self.suspect not in self.reduced.suspects:
            raise Refused("conductor", "is not one that a cause is looked for on",
                          given=self.suspect, hint=f"known: {', '.join(self.reduced.suspects)}")

    @property
    def unit(self) -> str:
        """Of the size: Ω, or V for magnetic pick-up."""
        return self.sizes.unit

    @cached_property
    def sizes(self) -> Value:
        """The range that the size is looked for in."""
        found = size_range(self.cause, omega=float(self.reduced.omega[0]),
                           length=self.reduced.run.length)
        assert found is not None
        return found

    def volts(self, shares: Real) -> Real:
        """Voltage of each reading (K, Q) [V] at shares (Q,) of the range of sizes, 0 to 1."""
        scores = np.zeros((len(shares), len(self._scene.coordinates)))
        return self._scene.volts(self.readings, np.asarray(shares, dtype=float), scores)

    def volts_at(self, size: float) -> Real:
        """Voltage of each reading (K,) [V] with the cause at a size within its range."""
        return np.asarray(self.volts(np.array([self._share(size)]))[:, 0])

    def _share(self, size: float) -> float:
        low, high = self.sizes.low, self.sizes.high
        if not low <= size <= high * (1 + 1e-12):
            raise Refused("size", f"must be {show(low, self.unit)} to {show(high, self.unit)}",
                          given=show(size, self.unit, 6))
        return math.log(size / low) / math.log(high / low)

    def band_at(self, size: float) -> tuple[Real, Real]:
        """What 5 % and 95 % of the draws of all unknowns give each reading (K,) [V] at a size."""
        low, high = self._band(np.array([self._share(size)]))
        return low[:, 0], high[:, 0]

    @cached_property
    def curves(self) -> tuple[Real, Real]:
        """Sizes (Q,) and the voltages of each reading there (K, Q) [V], unknowns as likely."""
        shares = np.linspace(0.0, 1.0, _POINTS)
        return size_at(shares, self.sizes), self.volts(shares)

    @cached_property
    def bands(self) -> tuple[Real, Real]:
        """`band_at` along the sizes of the curves, (K, Q) each [V]."""
        return self._band(np.linspace(0.0, 1.0, _POINTS))

    def _band(self, shares: Real) -> tuple[Real, Real]:
        count = len(shares)
        drawn = np.tile(self._draws, (count, 1))
        volts = self._scene.volts(self.readings, np.repeat(shares, _DRAWS), drawn)
        low, high = np.quantile(volts.reshape(-1, count, _DRAWS), (0.05, 0.95), axis=2)
        return low, high

    @cached_property
    def _draws(self) -> Real:
        """Normal scores of the unknowns (draws, d); the same each time."""
        from scipy.special import ndtri
        from scipy.stats import qmc

        unknowns = len(self._scene.coordinates)
        return np.asarray(ndtri(qmc.Sobol(unknowns, seed=1).random(_DRAWS)))

    @cached_property
    def _scene(self) -> Scene:
        run, reduced = self.reduced.run, self.reduced
        ways = variants(run.supply.lines, reduced.cable_lines())
        plain = next(v for v in ways if v.cause == "capacitive coupling")
        tried = next(v for v in ways if v.cause == self.cause)
        chosen: tuple[Variant, ...] = tuple(
            tried if n == self.suspect else plain for n in reduced.suspects)
        return Scene(reduced, chosen, tuple(dict.fromkeys(r.instrument for r in self.readings)))


def tried_figure(trial: Trial, size: float) -> Figure:
    """Voltage of each reading against the size of the cause; marked at `size`."""
    sizes, volts = trial.curves
    here = trial.volts_at(size)
    kept = range(min(_DRAWN, len(trial.readings)))
    names = [cut(reading_words(trial.readings[k]), 60) for k in kept]
    said = [f"{name}: would be {show(float(here[k]), 'V')}" for k, name in enumerate(names)]
    low, high = trial.sizes.low, trial.sizes.high
    top = max([1.0, *(float(volts[k].max()) for k in kept)])
    least, most = (np.maximum(edge, _FLOOR) for edge in trial.bands)
    return Figure(
        key="tried", title=f"{capital(trial.cause)} on {trial.suspect}: "
        "what it would read",
        x=log_axis("Size of the cause", trial.unit, low, high),
        y=log_axis("Voltage, RMS", "V", _FLOOR, 2 * top),
        caption=f"The voltage that each reading would have with {trial.cause} of that size on "
        f"“{trial.suspect}”: with everything else as it is most likely, and shaded, 90 % of what "
        "is not known of it. Across: what was read. A cause fits where every reading crosses its "
        "own shade.",
        alternative=f"At {show(size, trial.unit)}: {listed(said)}.",
        numbers=tuple(said),
        bands=tuple(Band(sizes, least[k], most[k], "", k) for k in kept),
        lines=tuple(Line(sizes, np.maximum(volts[k], _FLOOR),
                         f"reading {k + 1}, {trial.readings[k].text}", k) for k in kept),
        references=(Reference(size, "x", f"tried, {show(size, trial.unit)}"),
                    *(Reference(v, "y", f"reading {k + 1}, {trial.readings[k].text}")
                      for k in kept if _FLOOR < (v := trial.readings[k].value) < 2 * top)),
        points=tuple(Points(np.array([size]), np.array([max(float(here[k]), _FLOOR)]), "", k,
                            (said[k],)) for k in kept),
    )


def fits(trial: Trial, size: float) -> tuple[bool, ...]:
    """Whether each reading, within its accuracy, is among 90 % of what the cause would show."""
    low, high = trial.band_at(size)
    return tuple(bool(r.low - r.half_width <= most and least <= r.high + r.half_width)
                 for r, least, most in zip(trial.readings, low, high, strict=True))
