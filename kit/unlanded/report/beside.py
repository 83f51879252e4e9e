"""A resistor beside a load: what it leaves of the voltage or current that is coupled into it."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from ..errors import listed
from ..study.batch import Ports, RunBatch
from ..study.operation import Watched, port_level
from ..study.run import Run
from ..study.sizing import Bleeder
from ..study.spread import COVERAGE, coverage_interval
from ..study.uncertain import UncertainRun
from ..units import show
from .figure import Band, Figure, Line, Points, Reference, even_axis, log_axis

Real = NDArray[np.float64]
RESISTANCES = np.geomspace(1e3, 10e6, 81)
DRAWS = 128  # for the band


def levels_beside(run: Run, watched: Watched, resistances: Real) -> Real:
    """Voltage on the load [V], or a lamp's current [A] (k,), with each resistance (k,) [ohm]."""
    port = RunBatch.of(run).port(watched.pair.a, watched.pair.b)
    return _levels(port, watched, run.frequency, resistances)[:, 0]


def band_beside(uncertain: UncertainRun, watched: Watched) -> tuple[Real, Real]:
    """The ends of its interval at `RESISTANCES`, over the draws."""
    port = uncertain.draws(DRAWS).port(watched.pair.a, watched.pair.b)
    levels = _levels(port, watched, uncertain.run.frequency, RESISTANCES)
    low, high = coverage_interval(levels.T, COVERAGE)
    return np.asarray(low), np.asarray(high)


def _levels(port: Ports, watched: Watched, frequency: float, resistances: Real) -> Real:
    return port_level(port, watched, frequency, (1 / np.asarray(resistances))[:, None])


def power_beside(run: Run, resistance: float) -> float:
    """What the resistor takes while the circuit is on [W].

    >>> from unlanded.study.supply import Supply
    >>> from types import SimpleNamespace
    >>> round(power_beside(SimpleNamespace(supply=Supply(230.0, 50.0)), 22e3), 2)
    2.4
    """
    return float(run.supply.voltage**2 / resistance)


def beside_figure(
    run: Run, watched: Watched, resistance: float, *, band: tuple[Real, Real] | None = None,
    cure: Bleeder | None = None,
) -> Figure:
    """What is left on the load, against the resistor beside it; marked at `resistance` [ohm].

    `band` is that of `band_beside`, `cure` the resistor that is suggested.
    """
    factor, unit = (1e6, "µA") if watched.unit == "A" else (1.0, watched.unit)
    levels = levels_beside(run, watched, RESISTANCES) * factor
    here = float(levels_beside(run, watched, np.array([resistance]))[0])
    off, on = watched.limits
    low, high = ((edge * factor for edge in band) if band else (levels, levels))
    top = max(1.1 * factor * off, float(np.max(high)), factor * here)
    states = watched.threshold.states
    said = (f"{show(resistance, 'Ω')}: {show(here, watched.unit)}, {watched.state(here)}, "
            f"{show(power_beside(run, resistance), 'W')} while on")
    quantity = "Current through the lamp" if watched.unit == "A" else "Voltage on the load, RMS"
    suggested = () if cure is None else (Points(
        np.array([cure.value]), np.array([cure.result * factor]), "suggested", 2,
        (f"suggested: {show(cure.value, 'Ω')}, {show(cure.power, 'W')} while on",)),)
    marks = [Reference(v * factor, "y", f"{state} {word} {show(v, watched.unit)}")
             for v, state, word in ((off, states[0], "at or under"), (on, states[2], "at or over"))
             if v * factor <= top]
    return Figure(
        key="beside", title=f"{watched.name}: with a resistor beside it",
        x=log_axis("Resistor beside the load", "Ω", float(RESISTANCES[0]), float(RESISTANCES[-1])),
        y=even_axis(quantity, unit, 0.0, top),
        caption=f"What the coupled current leaves on {watched.name}, its contacts open, against a "
        f"resistor beside it. {_shaded(band)}Across: what the load is sure to do. The resistor is "
        "hot while the circuit is on.",
        alternative=f"Rising curve. At {said}. Limits: {listed([m.label for m in marks])}.",
        numbers=(said,),
        bands=(Band(RESISTANCES, low, high, f"{COVERAGE:.0%} of the draws", 0),) if band else (),
        lines=(Line(RESISTANCES, levels, "expected", 0),),
        references=tuple(marks),
        points=(*suggested, Points(np.array([resistance]), np.array([here * factor]), "tried", 1,
                                   (f"tried: {said}",))),
    )


def _shaded(band: object) -> str:
    return f"Shaded: {COVERAGE:.0%} of the draws. " if band else ""
