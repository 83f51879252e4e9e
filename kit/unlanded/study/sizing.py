"""Backwards: which length, spacing, impedance or bleeder makes a result meet a limit.

A result is scanned over the range of the unknown, every crossing of the limit is bracketed and
closed in on (Brent's method, scipy). The answer says where the limit is met: nowhere, everywhere,
or on which stretches. With a spread, the result is what the stated share of the draws stays under.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass
from typing import Literal, TypeAlias

import numpy as np
from numpy.typing import NDArray

from ..errors import Refused
from ..physics.burden import Burden
from ..physics.network import EARTH
from ..reference.preferred import (
    DERATING,
    VOLTAGE_RATINGS,
    Series,
    preferred,
    rating,
)
from .batch import Ports, RunBatch
from .readings import Pair
from .run import Run
from .uncertain import UncertainRun

Real = NDArray[np.float64]
Result: TypeAlias = Callable[[Real], Real]
"""From values of the unknown (k,) to a result (k,)."""
Quantity: TypeAlias = Callable[[RunBatch], Real]
"""From a batch of runs to a result (B,)."""

SCAN = 129
DRAWS = 128
_TOLERANCE = 1e-12


@dataclass(frozen=True)
class Met:
    """Where a result meets a limit, over the range `low` to `high` of the unknown.

    `stretches` are the ranges of the unknown where it does, rising; an end that is not `low` or
    `high` is a crossing of the limit.
    """

    stretches: tuple[tuple[float, float], ...]
    low: float
    high: float

    @property
    def nowhere(self) -> bool:
        """Whether no value meets the limit."""
        return not self.stretches

    @property
    def everywhere(self) -> bool:
        """Whether every value does."""
        return self.stretches == ((self.low, self.high),)

    @property
    def crossings(self) -> tuple[float, ...]:
        """Values at which the result is exactly the limit."""
        ends = (e for stretch in self.stretches for e in stretch)
        return tuple(e for e in ends if e not in (self.low, self.high))

    def words(self, show: Callable[[float], str]) -> str:
        """The answer as a phrase; `show` writes a value with its unit.

        >>> Met(((1.0, 34.0),), 1.0, 100.0).words("{:g} m".format)
        'up to 34 m'
        >>> Met((), 1.0, 100.0).words("{:g} m".format)
        'no value from 1 m to 100 m'
        """
        if self.nowhere:
            return f"no value from {show(self.low)} to {show(self.high)}"
        if self.everywhere:
            return f"every value from {show(self.low)} to {show(self.high)}"
        return " and ".join(
            f"up to {show(b)}" if a == self.low else f"from {show(a)}" if b == self.high
            else f"from {show(a)} to {show(b)}" for a, b in self.stretches)


def solve_for(
    result: Result, limit: float, *, low: float, high: float,
    scale: Literal["log", "even"] = "log", at_most: bool = True, scan: int = SCAN,
) -> Met:
    """Where `result` is at most (or at least) `limit`.

    Parameters
    ----------
    result : vectorised over the unknown
    low, high : range of the unknown, above 0 on a log scale
    scale : how the scan is spaced
    scan : its points; where it turns between two of them close to the limit, it is looked at again

    Raises `Refused`. Where x² − 3x + 2 ≤ 0:

    >>> solve_for(lambda x: x**2 - 3 * x + 2, 0.0, low=0.1, high=10.0).words("{:.9g}".format)
    'from 1 to 2'
    """
    if not (low < high and math.isfinite(high) and (low > 0 or scale == "even")):
        raise Refused("range", "low must be below high, and above 0 on a log scale",
                      given=f"{low:g} to {high:g}")
    sign = 1.0 if at_most else -1.0

    def over(x: float) -> float:
        return sign * (float(result(np.array([x]))[0]) - limit)

    grid = np.geomspace(low, high, scan) if scale == "log" else np.linspace(low, high, scan)
    grid[0], grid[-1] = low, high
    values = sign * (np.asarray(result(grid), dtype=float) - limit)
    if not np.all(np.isfinite(values)):
        raise Refused("result", "must be finite over the whole range of the unknown")
    grid, values = _with_turns(over, grid, values)
    return Met(_stretches(over, grid, values), low, high)


def _with_turns(over: Callable[[float], float], grid: Real, values: Real) -> tuple[Real, Real]:
    """The scan with the true turning point wherever one may hide two crossings."""
    from scipy.optimize import minimize_scalar

    steps = np.diff(values)
    turns = np.flatnonzero(steps[:-1] * steps[1:] < 0) + 1
    near = [k for k in turns if (values[k] > 0) == (steps[k] > 0)]  # turns toward the limit
    for k in near:
        side = 1.0 if values[k] > 0 else -1.0
        found = minimize_scalar(lambda x, side=side: side * over(x),
                                bounds=(grid[k - 1], grid[k + 1]), method="bounded")
        grid, values = np.append(grid, found.x), np.append(values, side * found.fun)
    order = np.argsort(grid)
    return grid[order], values[order]


def _stretches(
    over: Callable[[float], float], grid: Real, values: Real
) -> tuple[tuple[float, float], ...]:
    from scipy.optimize import brentq

    met = values <= 0
    edges = [float(grid[0])] if met[0] else []
    edges += [float(brentq(over, grid[k], grid[k + 1], xtol=_TOLERANCE * grid[k + 1],
                           rtol=_TOLERANCE))
              for k in np.flatnonzero(met[1:] != met[:-1])]
    if met[-1]:
        edges.append(float(grid[-1]))
    return tuple(zip(edges[::2], edges[1::2], strict=True))


def voltage_on(pair: Pair, burden: Burden | None = None) -> Quantity:
    """The voltage on a pair with a burden there, or with nothing."""
    def quantity(batch: RunBatch) -> Real:
        port = batch.port(pair.a, pair.b)
        y = 0.0 if burden is None else complex(burden.admittance(batch.run.frequency))
        return np.abs(port.loaded(y))
    return quantity


def current_through(pair: Pair, burden: Burden) -> Quantity:
    """The current through a burden on a pair."""
    def quantity(batch: RunBatch) -> Real:
        y = complex(burden.admittance(batch.run.frequency))
        return np.abs(y * batch.port(pair.a, pair.b).loaded(y))
    return quantity


def residual_current(batch: RunBatch) -> Real:
    """The standing residual current."""
    return np.abs(batch.residual)


def by_length(
    run: Run | UncertainRun, quantity: Quantity, *, coverage: float | None = None
) -> Result:
    """A quantity against the length of the run [m], nominally or as the draws have it.

    With a `coverage` c [1], what the share c of the draws stays under; it needs an `UncertainRun`.
    """
    if isinstance(run, UncertainRun) and coverage is not None:
        drawn = run

        def covered(lengths: Real) -> Real:
            # One length at a time: long ones need many sections, short ones only one.
            return np.array([np.quantile(quantity(drawn.stretched([x], DRAWS)), coverage)
                             for x in lengths])
        return covered
    plain = run.run if isinstance(run, UncertainRun) else run

    def nominal(lengths: Real) -> Real:
        parts = np.array_split(lengths, max(1, len(lengths) // 16))
        return np.concatenate([quantity(RunBatch.of(plain, length=part)) for part in parts])
    return nominal


def by_run(
    make: Callable[[float], Run | UncertainRun], quantity: Quantity, *,
    coverage: float | None = None
) -> Result:
    """A quantity against anything that a run can be made from: a spacing, a height, a filler.

    `make` turns a value of the unknown into the run; with a `coverage`, into an `UncertainRun`.
    """
    def one(value: float) -> float:
        run = make(value)
        if isinstance(run, UncertainRun) and coverage is not None:
            return float(np.quantile(quantity(run.draws(DRAWS)), coverage))
        return float(quantity(RunBatch.of(run.run if isinstance(run, UncertainRun) else run))[0])
    return lambda values: np.array([one(float(v)) for v in values])


def by_resistance(port: Ports, *, coverage: float | None = None) -> Result:
    """The voltage on a pair against a resistance [ohm] put there; `port` of a run or of draws."""
    return _by_admittance(port, lambda r: 1 / r, coverage)


def by_capacitance(port: Ports, *, frequency: float, coverage: float | None = None) -> Result:
    """The voltage on a pair against a capacitance [F] put there."""
    return _by_admittance(port, lambda c: 2j * np.pi * frequency * c, coverage)


def _by_admittance(
    port: Ports, admittance: Callable[[Real], NDArray[np.generic]], coverage: float | None
) -> Result:
    def result(values: Real) -> Real:
        volts = np.abs(port.loaded(admittance(values)[:, None]))
        return np.asarray(volts[:, 0] if coverage is None
                          else np.quantile(volts, coverage, axis=1))
    return result


def most_circuits(each: complex, limit: float, *, standing: complex = 0j) -> int:
    """How many equal circuits keep |standing + n × each| at or under `limit` [A]; −1 for none.

    >>> most_circuits(0.72e-3j, 9e-3)  # 9 mA over 0.72 mA
    12
    """
    if abs(each) == 0:
        raise Refused("circuit", "brings no current: any number of them meets the limit")
    if abs(standing) > limit:
        return -1
    # |s + n e| = limit: the larger root of n² |e|² + 2 n Re(s ē) + |s|² − limit² = 0.
    half = (standing * each.conjugate()).real / abs(each) ** 2
    root = -half + math.sqrt(half**2 + (limit**2 - abs(standing) ** 2) / abs(each) ** 2)
    return math.floor(root * (1 + 1e-12))


@dataclass(frozen=True)
class Bleeder:
    """A resistor across a load that takes what is coupled into it.

    Parameters
    ----------
    largest : resistance that still meets the limit [ohm]
    value : the preferred value at or under it [ohm]
    result : what is left with that value, in the limit's unit
    power : it takes while the circuit is on [W]
    power_rating, voltage_rating : it should have [W], [V]; infinite where none is sold
    """

    largest: float
    value: float
    result: float
    power: float
    power_rating: float
    voltage_rating: float


def bleeder(
    result: Result, limit: float, *, live_voltage: float, series: Series = "E12",
    low: float = 10.0, high: float = 10e6,
) -> Bleeder | None:
    """The largest resistor that brings `result` to the limit; None where none does.

    Parameters
    ----------
    result : against the resistance [ohm], such as `by_resistance`
    live_voltage : across it while the circuit is on, RMS [V]
    series : of preferred values, rounded down
    low, high : range of resistance searched [ohm]

    Power rating: twice the power, common practice in a closed panel. Voltage rating: the peak.
    """
    met = solve_for(result, limit, low=low, high=high)
    if met.nowhere:
        return None
    bottom, top = met.stretches[-1]
    value = preferred(top, series)
    if value < bottom:
        return None
    power = live_voltage**2 / value
    return Bleeder(top, value, float(result(np.array([value]))[0]), power,
                   rating(power / DERATING), rating(math.sqrt(2) * live_voltage, VOLTAGE_RATINGS))


@dataclass(frozen=True)
class Window:
    """Resistances of a meter for one pair [ohm]: `most` collapses the coupled voltage, `least`
    neither trips the device nor disturbs a genuine circuit by more than is allowed.

    `most` is 0 where no meter collapses it, infinite where every one does. `trip` and `loading`
    are the two bounds that `least` is the larger of, 0 where there is none.
    """

    pair: Pair
    most: float
    trip: float
    loading: float

    @property
    def least(self) -> float:
        """The lower end."""
        return max(self.trip, self.loading)

    @property
    def empty(self) -> bool:
        """Whether no meter serves."""
        return self.least > self.most

    @property
    def alternatives(self) -> tuple[str, ...]:
        """What to do where the window is empty."""
        return ALTERNATIVES if self.empty else ()


ALTERNATIVES = (
    "switch off and lock the neighbours in the same cable or raceway, prove them dead, and read "
    "again with the meter of high impedance",
    "add a known resistor across the pair for the reading, of a value that the circuit bears, and "
    "read again without it",
    "measure at the other end, where the genuine source is nearer or the device is another",
)


def meter_window(
    port: Ports, pair: Pair, run: Run, *, collapse_to: float, trip_current: float = math.inf,
    source_resistance: float = 0.0, loading_error: float = 0.05, coverage: float | None = None,
) -> Window:
    """Which meters tell a coupled voltage from a genuine one on this pair, without harm.

    Parameters
    ----------
    port : of the pair, in one case or in draws
    collapse_to : what the coupled voltage must fall to, RMS [V], above 0
    trip_current : more of residual current that the device is sure to bear [A]
    source_resistance : of the genuine circuit that may stand on the pair [ohm]
    loading_error : that it may be disturbed by [1], above 0 and below 1

    If the pair proves to be fed, all the meter's current at the line's voltage returns by earth
    where one of its points is earth. A source of R is read low by R / (R + Z).
    """
    if not (collapse_to > 0 and trip_current > 0 and 0 < loading_error < 1
            and source_resistance >= 0):
        raise Refused("meter window", "limits must be above 0, the error below 1",
                      given=(collapse_to, trip_current, source_resistance, loading_error))
    met = solve_for(by_resistance(port, coverage=coverage), collapse_to, low=1.0, high=1e10)
    most = 0.0 if met.nowhere else met.stretches[-1][1]
    earthed = any(run.same(p, EARTH) for p in (pair.a, pair.b))
    return Window(pair, math.inf if most == met.high else most,
                  run.supply.voltage / trip_current if earthed else 0.0,
                  source_resistance * (1 - loading_error) / loading_error)
