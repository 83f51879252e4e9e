"""False operation: whether stray coupling keeps a load on, by what margin, and what cures it.

The run is taken as it is with its contacts open. The voltage on the load, or a lamp's current, is
held against what the load is sure to be off at. Cures are the same run changed.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator
from dataclasses import dataclass, replace
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from ..errors import Refused
from ..physics.burden import Burden
from ..physics.lamp import rectified_current
from ..physics.network import EARTH
from ..physics.screen import own_screens
from ..reference.loads import Threshold
from ..reference.preferred import preferred
from ..units import show
from .batch import Ports, RunBatch
from .ends import SCREEN, Bonded, Driven, Ends, Open, Through
from .readings import Pair
from .run import Run
from .sizing import Bleeder, Met, Result, bleeder, by_length, solve_for
from .spread import COVERAGE, coverage_interval
from .uncertain import UncertainRun

Real = NDArray[np.float64]
DRAWS, CURED = 1024, 128  # for the state, and for each cure
IN_HAND = 0.9  # of what a load is sure to be off at, that a part beside it may leave: a judgement
LOW_VOLTAGE = 24.0  # of a control circuit, RMS [V]
SHORTEST, LONGEST = 5.0, 3e3  # metres that the longest run is looked for in


@dataclass(frozen=True)
class Watched:
    """A load whose state matters, on a pair of the run.

    Parameters
    ----------
    name : as the memo calls it
    pair : where it is; the run has its impedance there already, but for a lamp's chips
    threshold : of its kind
    rated : voltage, where the thresholds are shares of it [V]
    off_at, on_at : from its data sheet, in place of the kind's [V], [A] for a lamp
    conducts_from : voltage of a lamp's lit chips with their rectifier [V]
    series_capacitance : before them [F]; infinite without one
    """

    name: str
    pair: Pair
    threshold: Threshold
    rated: float | None = None
    off_at: float | None = None
    on_at: float | None = None
    conducts_from: float = 50.0
    series_capacitance: float = math.inf

    @property
    def limits(self) -> tuple[float, float]:
        """Sure to be off at the first, sure to be on at the second [V] or [A]."""
        kind = self.threshold
        off = kind.volts(kind.off_at, self.rated) if self.off_at is None else self.off_at
        on = kind.volts(kind.on_at, self.rated) if self.on_at is None else self.on_at
        if not 0 < off < on:
            raise Refused(self.name, "must be sure to be off at less than it is sure to be on at",
                          given=f"{off:g} and {on:g}")
        return off, on

    @property
    def unit(self) -> str:
        """Of the limits and levels."""
        return "A" if self.threshold.measure == "lamp current" else "V"

    def state(self, level: float) -> str:
        """In words: off, between, or on."""
        off, on = self.limits
        return self.threshold.states[0 if level <= off else 2 if level >= on else 1]


@dataclass(frozen=True)
class Cure:
    """A change of the run that may let go of the load.

    Parameters
    ----------
    name : what is done
    level : voltage [V] or lamp current [A] that 95 % of the draws then stay under
    state : of the load then, in words
    works : whether the load is then sure to be off
    watts : that the cure takes while the circuit is on
    note : of its price
    bleeder : its values, where it is one
    """

    name: str
    level: float
    state: str
    works: bool
    watts: float = 0.0
    note: str = ""
    bleeder: Bleeder | None = None


@dataclass(frozen=True, eq=False)
class Operation:
    """What a load does with its contacts open.

    Parameters
    ----------
    watched : the load
    level : voltage on it [V], or a lamp's mean current [A]
    low, high : its coverage interval
    current : through its impedance [A], NaN where the run has none on the pair
    state : in words
    margin : how far under its limit it stays, relative to that limit [1]; negative when over
    chances : of being off, between, and on, over the draws [1]
    longest : lengths of the run [m] at which it is sure to be off, nominally
    longest_covered : the same for 95 % of the draws
    cures : those that work first, by the watts they take
    """

    watched: Watched
    level: float
    low: float
    high: float
    current: float
    state: str
    margin: float
    chances: tuple[float, float, float]
    longest: Met
    longest_covered: Met
    cures: tuple[Cure, ...]


def operation(
    uncertain: UncertainRun, watched: Watched, *, seed: int = 1, cured: bool = True
) -> Operation:
    """The state of a load, its margin, the longest run, and the cures; raises `Refused`.

    Without cures where they are not asked for: `cured` False.
    """
    run = uncertain.run
    watched = by_current(run, watched)
    off, on = watched.limits
    level = float(level_on(RunBatch.of(run), watched)[0])
    drawn = level_on(uncertain.draws(DRAWS, seed=seed), watched)
    low, high = coverage_interval(drawn[:, None], COVERAGE)
    chances = (float(np.mean(drawn <= off)), float(np.mean((drawn > off) & (drawn < on))),
               float(np.mean(drawn >= on)))
    longest, covered = _longest(uncertain, watched)
    return Operation(
        watched, level, float(low[0]), float(high[0]), level * _admittance(run, watched),
        watched.state(level), (off - level) / off, chances, longest, covered,
        tuple(_ranked(_cures(uncertain.draws(CURED, seed=seed), watched))) if cured else ())


def level_on(batch: RunBatch, watched: Watched, admittance: ArrayLike = 0.0) -> Real:
    """Voltage on the load [V], or a lamp's mean current [A] (B,), with an admittance beside it."""
    return port_level(batch.port(watched.pair.a, watched.pair.b), watched, batch.run.frequency,
                      admittance)


def port_level(
    port: Ports, watched: Watched, frequency: float, admittance: ArrayLike = 0.0
) -> Real:
    """The same from the port of the load; broadcasts with the admittance [S]."""
    loaded = port.loaded(admittance)
    if watched.threshold.measure == "voltage":
        return np.abs(loaded)
    impedance = port.impedance / (1 + np.asarray(admittance) * port.impedance)
    if math.isfinite(watched.series_capacitance):
        impedance = impedance - 1j / (2 * np.pi * frequency * watched.series_capacitance)
    return rectified_current(voltage=loaded.ravel(), impedance=impedance.ravel(),
                             frequency=frequency, conducts_from=watched.conducts_from
                             ).reshape(loaded.shape)


def _longest(uncertain: UncertainRun, watched: Watched) -> tuple[Met, Met]:
    """Lengths at which the load is sure to be off, nominally and for most of the draws."""
    def met(coverage: float | None, high: float, scan: int) -> Met:
        result = by_length(uncertain, lambda b: level_on(b, watched), coverage=coverage)
        return solve_for(result, watched.limits[0], low=SHORTEST, high=high, scan=scan)

    nominal = met(None, LONGEST, 65)
    # A long run needs many sections: the draws are not asked far beyond the nominal answer.
    beyond = min((2 * c for c in nominal.crossings), default=LONGEST)
    return nominal, met(COVERAGE, min(beyond, LONGEST), 17)


def _admittance(run: Run, watched: Watched) -> float:
    """Of the load that the run has on the pair [S]; 1 for a lamp, NaN where there is none."""
    if watched.threshold.measure == "lamp current":
        return 1.0
    nodes = {run.node(watched.pair.a), run.node(watched.pair.b)}
    own = [t.burden for a, b, t in run.closed if {a, b} == nodes]
    return abs(sum(complex(b.admittance(run.frequency)) for b in own)) if own else math.nan


def by_current(run: Run, watched: Watched) -> Watched:
    """An input that is off at a current too: its limit in volts, through its own impedance."""
    leak = watched.threshold.off_current
    admittance = _admittance(run, watched)
    if leak is None or watched.off_at is not None or not admittance > 0:
        return watched
    off, on = watched.limits
    return replace(watched, off_at=max(off, min(leak.likely / admittance, 0.999 * on)))


def _ranked(cures: Iterator[Cure]) -> list[Cure]:
    return sorted(cures, key=lambda c: (not c.works, c.watts, c.level))


def _cures(drawn: RunBatch, watched: Watched) -> Iterator[Cure]:
    yield from _resistor(drawn, watched)
    yield from _capacitor(drawn, watched)
    yield from _spares(drawn, watched)
    yield from _screen(drawn, watched)
    yield from _own_cable(drawn, watched)
    yield from _low_voltage(drawn, watched)
    yield from _at_supply(drawn, watched)


def _cure(
    name: str, level: float, watched: Watched, *, watts: float = 0.0, note: str = "",
    found: Bleeder | None = None
) -> Cure:
    return Cure(name, level, watched.state(level), level <= watched.limits[0], watts, note, found)


def _beside(drawn: RunBatch, watched: Watched, admittance: Callable[[Real], Any]) -> Result:
    """What most of the draws stay under, against the value of something beside the load."""
    port = drawn.port(watched.pair.a, watched.pair.b)

    def result(values: Real) -> Real:
        levels = port_level(port, watched, drawn.run.frequency, admittance(values)[:, None])
        return np.asarray(np.quantile(levels, COVERAGE, axis=1))
    return result


def _resistor(drawn: RunBatch, watched: Watched) -> Iterator[Cure]:
    result = _beside(drawn, watched, lambda r: 1 / r)
    found = bleeder(result, IN_HAND * watched.limits[0], live_voltage=drawn.run.supply.voltage)
    if found is not None:
        yield _cure(f"resistor across the load, {show(found.value, 'Ω')}", found.result, watched,
                    watts=found.power, found=found,
                    note=f"{_sold(found.power_rating, 'W')}, {_sold(found.voltage_rating, 'V')}; "
                         "hot while the circuit is on")


def _sold(rating: float, unit: str) -> str:
    return f"rated {show(rating, unit)}" if math.isfinite(rating) else "beyond the ratings sold"


def _capacitor(drawn: RunBatch, watched: Watched) -> Iterator[Cure]:
    omega = 2 * math.pi * drawn.run.frequency
    result = _beside(drawn, watched, lambda c: 1j * omega * c)
    met = solve_for(result, IN_HAND * watched.limits[0], low=1e-9, high=10e-6, scan=65)
    if met.nowhere:
        return
    farads = preferred(met.stretches[-1][0], "E6", down=False)
    yield _cure(f"capacitor across the load, {show(farads, 'F')}",
                float(result(np.array([farads]))[0]), watched,
                note=f"draws {show(omega * farads * drawn.run.supply.voltage, 'A')} without heat; "
                     "rated for across-the-line use, with a resistor in series against inrush, and "
                     "checked against resonance")


def _spares(drawn: RunBatch, watched: Watched) -> Iterator[Cure]:
    run = drawn.run
    spares = [n for n in run.spares if not _is_on(watched, n)]
    if spares:
        bonded = replace(run, near={**run.near, **dict.fromkeys(spares, Bonded("earth"))})
        yield _cure(f"spare cores ({', '.join(spares)}) bonded to earth at the near end",
                    _covered(replace(drawn, run=bonded), watched), watched)


def _screen(drawn: RunBatch, watched: Watched) -> Iterator[Cure]:
    run = drawn.run
    if (run.screen and isinstance(run.near[SCREEN], Open) and isinstance(run.far[SCREEN], Open)
            and not _is_on(watched, SCREEN)):
        bonded = replace(run, near={**run.near, SCREEN: Bonded(EARTH)})
        yield _cure("the screen bonded to earth at the near end",
                    _covered(replace(drawn, run=bonded), watched), watched,
                    note="at one end it carries no current, and screens from electric fields alone")


def _is_on(watched: Watched, name: str) -> bool:
    return bool({f"{name}@near", f"{name}@far"} & {watched.pair.a, watched.pair.b})


def _own_cable(drawn: RunBatch, watched: Watched) -> Iterator[Cure]:
    if live := _live(drawn.run, ("near", "far")):
        apart = own_screens(drawn.capacitance, [drawn.run.names.index(n) for n in live])
        yield _cure(f"the live core ({', '.join(live)}) in an earthed screen or a cable of its own",
                    _covered(replace(drawn, capacitance=apart), watched), watched,
                    note="a screen earthed at one end or at both")


def _low_voltage(drawn: RunBatch, watched: Watched) -> Iterator[Cure]:
    run = drawn.run
    if watched.rated is None or run.supply.voltage <= LOW_VOLTAGE:
        return
    share = LOW_VOLTAGE / run.supply.voltage
    changed = replace(run, supply=replace(run.supply, voltage=LOW_VOLTAGE),
                      near=_scaled(run.near, share**2), far=_scaled(run.far, share**2))
    off, on = watched.limits
    low = replace(watched, off_at=off * share, on_at=on * share)
    yield _cure(f"control circuit at {show(LOW_VOLTAGE, 'V')} AC, coil of the same power",
                _covered(replace(drawn, run=changed), low), low,
                note="check the voltage drop when the coil picks up")


def _scaled(ends: Ends, share: float) -> Ends:
    """Every load with `share` of its impedance."""
    def scaled(b: Burden) -> Burden:
        return Burden(b.resistance * share, b.inductance * share, b.capacitance / share,
                      b.front_resistance * share)
    return {n: replace(t, burden=scaled(t.burden)) if isinstance(t, Through) else t
            for n, t in ends.items()}


def _at_supply(drawn: RunBatch, watched: Watched) -> Iterator[Cure]:
    run = drawn.run
    live = _live(run, ("near",))
    if not live or {run.node(f"{n}@near") for n in live} & {
            run.node(watched.pair.a), run.node(watched.pair.b)}:
        return
    off = replace(run, near={**run.near, **dict.fromkeys(live, Open())})
    yield _cure(f"the contact at the supply's end of the live core ({', '.join(live)}), by an "
                "interposing relay or a direct-current circuit",
                _covered(replace(drawn, run=off), watched), watched,
                note="nothing alternating goes out while it is open")


def _live(run: Run, ends: tuple[str, ...]) -> list[str]:
    return [n for n in run.section.names
            if any(isinstance(getattr(run, end)[n], Driven) for end in ends)]


def _covered(drawn: RunBatch, watched: Watched) -> float:
    return float(np.quantile(level_on(drawn, watched), COVERAGE))
