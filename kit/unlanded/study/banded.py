"""The reading sheet with its bands: what each instrument may show, over all that is not known.

A draw has its own run, its own burden of every instrument within the maker's tolerance, and its
own error within the accuracy statement, a rectangular distribution (JCGM 100, 4.3.7).
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import ArrayLike, NDArray

from ..reference.instruments import Instrument, Shown
from ..units import show
from .batch import Complex, Ports, RunBatch
from .readings import Pair, ReadingSheet, SheetRow
from .spread import (
    COVERAGE,
    STABLE,
    Input,
    Sensitivity,
    Spread,
    coverage_interval,
    propagate,
    sensitivity,
    uniform,
    within,
)
from .uncertain import UncertainRun

Real = NDArray[np.float64]
DRAWS, STATED = 256, 1024  # for each point of a curve's band, and for a single voltage


@dataclass(frozen=True, eq=False)
class SpreadSheet:
    """A reading sheet whose bands are coverage intervals.

    Parameters
    ----------
    sheet : with `low` and `high` of every row at the ends of its interval, widened to hold the
        reading of the run as described, which a random arrangement may make an unusual one
    spread : of each row's shown value in volts (amperes for a body model), row by row, and last
        of the standing residual current [A]
    inputs : everything that was drawn
    """

    sheet: ReadingSheet
    spread: Spread
    inputs: tuple[Input, ...]


def spread_sheet(
    sheet: ReadingSheet,
    uncertain: UncertainRun,
    *,
    coverage: float = COVERAGE,
    stable: float = STABLE,
    batch: int = 128,
    most: int = 1024,
    seed: int = 1,
) -> SpreadSheet:
    """The sheet with each reading's coverage interval; arguments as for `propagate`."""
    tools = sheet.instruments
    inputs = (*uncertain.inputs, *(i for tool in tools for i in _tool_inputs(tool)))
    inputs = inputs or (Input("nothing", uniform(0.0, 1.0)),)
    model = _Shows(uncertain, tools, sheet.rows)
    spread = propagate(model, inputs, coverage=coverage, stable=stable, batch=batch, most=most,
                       seed=seed)
    rows = tuple(_banded(row, float(low), float(high)) for row, low, high in
                 zip(sheet.rows, spread.low[:-1], spread.high[:-1], strict=True))
    return SpreadSheet(replace(sheet, rows=rows), spread, inputs)


def reading_sensitivity(
    row: SheetRow, uncertain: UncertainRun, *, points: int = 256, seed: int = 1
) -> Sensitivity:
    """Which input one reading depends on most."""
    inputs = (*uncertain.inputs, *_tool_inputs(row.instrument))
    model = _Shows(uncertain, (row.instrument,), (row,))
    found = sensitivity(model, inputs, points=points, seed=seed)
    return Sensitivity(found.names, found.first[:1], found.total[:1])


def loading_band(
    uncertain: UncertainRun, pair: Pair, resistances: ArrayLike, *, coverage: float = COVERAGE
) -> tuple[Real, Real]:
    """Ends (k,) RMS [V] of the voltage's interval with each resistance (k,) [ohm] on the pair."""
    port = uncertain.draws(DRAWS).port(pair.a, pair.b)
    conductance = 1 / np.asarray(resistances, dtype=float)
    volts = np.abs(port.voltage[:, None] / (1 + conductance * port.impedance[:, None]))
    return coverage_interval(volts, coverage)


def voltage_band(
    uncertain: UncertainRun, pair: Pair, *, coverage: float = COVERAGE
) -> tuple[float, float]:
    """Ends RMS [V] of the interval of the unloaded voltage on a pair."""
    drawn = uncertain.draws(STATED).voltage(pair.a, pair.b)
    low, high = coverage_interval(np.abs(drawn)[:, None], coverage)
    return float(low[0]), float(high[0])


def length_band(
    uncertain: UncertainRun,
    pair: Pair,
    tool: Instrument,
    lengths: ArrayLike,
    *,
    coverage: float = COVERAGE,
) -> tuple[Real, Real]:
    """Ends (k,) RMS [V] of the voltage's interval across an instrument for lengths (k,) [m]."""
    along = np.asarray(lengths, dtype=float)
    batch = uncertain.stretched(along, DRAWS)
    volts, _ = _settled(tool, batch.port(pair.a, pair.b), batch)
    return coverage_interval(np.abs(volts).reshape(len(along), -1).T, coverage)


@dataclass(frozen=True, eq=False)
class _Shows:
    """The model: from values of the inputs to what is shown in every row, and the residual."""

    uncertain: UncertainRun
    tools: Sequence[Instrument]
    rows: Sequence[SheetRow]

    def __call__(self, values: Real) -> Real:
        batch = self.uncertain.at(values)
        columns = iter(values.T[len(self.uncertain.inputs):])
        drawn = {tool.key: [next(columns) for _ in _tool_inputs(tool)] for tool in self.tools}
        ports: dict[Pair, Ports] = {}
        out = np.empty((len(values), len(self.rows) + 1))
        for k, row in enumerate(self.rows):
            if row.pair not in ports:
                ports[row.pair] = batch.port(row.pair.a, row.pair.b)
            out[:, k] = _reading(row.instrument, ports[row.pair], batch, drawn[row.instrument.key])
        out[:, -1] = np.abs(batch.residual)
        return out


def _tool_inputs(tool: Instrument) -> list[Input]:
    found = []
    if tool.tolerance:
        found.append(Input(f"burden of the {tool.name}", within(1.0, tool.tolerance)))
    if any(r.percent or r.counts for r in tool.ranges):
        found.append(Input(f"accuracy of the {tool.name}", uniform(-1.0, 1.0)))
    return found


def _reading(
    tool: Instrument, port: Ports, batch: RunBatch, drawn: Sequence[Real]
) -> Real:
    """What is shown before rounding (B,) [V]; a body model's current [A]."""
    rest = list(drawn)
    share = rest.pop(0) if tool.tolerance else np.ones(1)
    voltage, admittance = _settled(tool, port, batch, share)
    if tool.kind == "body":
        return np.abs(voltage * admittance)
    size = np.abs(voltage)
    return np.maximum(size + rest[0] * _accuracy(tool, size), 0.0) if rest else size


def _settled(
    tool: Instrument, port: Ports, batch: RunBatch, share: Real | float = 1.0
) -> tuple[Complex, Complex]:
    """Voltage and admittance (B,), ranges tried from the largest down as in the plain sheet."""
    voltage = admittance = np.zeros(0, dtype=complex)
    for scale in reversed(tool.ranges):
        own = complex(scale.burden.admittance(batch.run.frequency)) / share
        loaded = port.loaded(own)
        holds = np.abs(voltage) <= scale.full_scale if len(voltage) else np.ones(loaded.shape, bool)
        voltage = np.where(holds, loaded, voltage) if len(voltage) else loaded
        whole = np.broadcast_to(own, loaded.shape)
        admittance = np.where(holds, whole, admittance) if len(admittance) else whole
    return voltage, admittance


def _accuracy(tool: Instrument, size: Real) -> Real:
    """Half width of the accuracy statement at each voltage (B,) [V]."""
    which = np.minimum(np.searchsorted([r.full_scale for r in tool.ranges], size),
                       len(tool.ranges) - 1)
    percent = np.array([r.percent for r in tool.ranges])[which]
    counts = np.array([r.counts * r.resolution for r in tool.ranges])[which]
    return np.asarray(percent * (size if tool.threshold is None else tool.threshold) + counts)


def _shown(tool: Instrument, value: float) -> Shown:
    if tool.kind == "body":
        return Shown(show(value, "A"), math.nan, math.nan)
    return tool.show(max(float(value), 0.0))


def _banded(row: SheetRow, low: float, high: float) -> SheetRow:
    here = abs(row.current if row.instrument.kind == "body" else row.voltage)
    return replace(row, low=_shown(row.instrument, min(low, here)),
                   high=_shown(row.instrument, max(high, here)))
