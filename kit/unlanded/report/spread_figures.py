"""Pictures of how sure a result is, and of what decides it."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import ArrayLike, NDArray

from ..errors import listed
from ..study.spread import Sensitivity
from ..units import show
from .figure import Axis, Band, Figure, Line, Points, Reference, even_axis
from .words import capital, cut, percent

BARS = 8
POINTS = 121  # of a curve


def sensitivity_figure(found: Sensitivity, what: str) -> Figure:
    """A bar for each input: its share of the variance alone, and with what it does together."""
    ranked = found.ranked()[:BARS]
    names = [cut(name, 44) for name, _, _ in ranked]
    alone, whole = (np.clip([r[k] for r in ranked], 0.0, 1.0) * 100 for k in (1, 2))
    said = [f"{name} {total:.0f} %" for (name, _, _), total in zip(ranked, whole, strict=True)]
    return Figure(
        key="sensitivity", title=f"What decides {what}",
        x=even_axis("Share of the variance", "%", 0.0, 100.0),
        y=Axis("", "", -0.6, len(names) - 0.4, "even",
               tuple((float(i), n) for i, n in enumerate(names)), turned=True),
        caption=f"Share of the variance of {what} that vanishes when one input alone becomes "
        "known (first order), and that stays when all others are known (total). The input at the "
        "top is the one to pin down first.",
        alternative=f"Bars of the total share of each input: {listed(said)}.",
        numbers=tuple(said),
        bands=tuple(_bar(size, (i - 0.34, i + 0.34), "" if i else "total", 0)
                    for i, size in enumerate(whole)),
        lines=tuple(Line(_floats([size, size]), _floats([i - 0.34, i + 0.34]), "", 0)
                    for i, size in enumerate(whole)),
        points=(Points(alone, np.arange(float(len(alone))), "first order", 1),),
        aspect=min(1.0, 0.24 + 0.06 * len(names)),
    )


def distribution_figure(
    sample: ArrayLike, ends: tuple[float, float], expected: float, *, what: str, unit: str,
    coverage: float
) -> Figure:
    """How the draws of a result, which must differ, are distributed, its interval shaded."""
    x, height = _density(np.asarray(sample, dtype=float), ends)
    inside = (x >= ends[0]) & (x <= ends[1])
    words = f"{show(ends[0], unit)} to {show(ends[1], unit)}"
    return Figure(
        key="distribution", title=f"How sure: {what}",
        x=even_axis(capital(what), unit, float(x[0]), float(x[-1])),
        y=Axis("Relative density", "", 0.0, 1.1, "even", tuple((v, f"{v:g}") for v in (0, 0.5, 1))),
        caption=f"How often {what} came out at each value, over what is not known of the inputs. "
        f"Shaded: {percent(coverage)} of the draws, {words}. Upright: with every input as it is "
        "most likely.",
        alternative=f"Curve over {show(x[0], unit)} to {show(x[-1], unit)}; "
        f"{percent(coverage)} of the draws lie in {words}; expected {show(expected, unit)}.",
        numbers=(f"expected {show(expected, unit)}", f"{percent(coverage)} of draws {words}"),
        bands=(Band(x[inside], np.zeros(inside.sum()), height[inside],
                    f"{percent(coverage)} of the draws", 0),),
        references=(Reference(expected, "x", f"expected {show(expected, unit)}"),),
        lines=(Line(x, height, "", 0),),
        aspect=0.45,
    )


def level_figure(
    lengths: ArrayLike, curve: ArrayLike, band: tuple[ArrayLike, ArrayLike], *,
    name: str, unit: str, limits: tuple[float, float], length: float, length_unit: str,
    coverage: float, states: Sequence[str]
) -> Figure:
    """The voltage on a load, or a lamp's current, against the length of the run."""
    x, y = np.asarray(lengths, dtype=float), np.asarray(curve, dtype=float)
    low, high = (np.asarray(edge, dtype=float) for edge in band)
    factor, shown = (1e6, "µA") if unit == "A" else (1.0, unit)
    top = max(float(high.max()), 1.15 * limits[0]) * factor
    here = float(np.interp(length, x, y))
    marks = [(limits[0], f"{states[0]} at or under {show(limits[0], unit)}"),
             (limits[1], f"{states[2]} at or over {show(limits[1], unit)}")]
    quantity = "Current through the lamp" if unit == "A" else "Voltage on the load, RMS"
    return Figure(
        key="operation", title=f"{name}: with its contacts open, against run length",
        x=even_axis("Run length", length_unit, 0.0, float(x[-1])),
        y=even_axis(quantity, shown, 0.0, top),
        caption=f"{quantity}: {name}, against the length of the run. Shaded: {percent(coverage)} "
        "of the draws. Across: what the load is sure to do.",
        alternative=f"Curve rising with run length to {show(float(y[-1]), unit)}; at the run's "
        f"own length {show(here, unit)}. {listed([words for _, words in marks])}.",
        numbers=(f"{name}: {show(here, unit)}",),
        bands=(Band(x, low * factor, high * factor, f"{percent(coverage)} of the draws", 0),),
        references=(Reference(length, "x", f"this run, {length:.4g} {length_unit}"),
                    *(Reference(v * factor, "y", words) for v, words in marks
                      if v * factor <= top)),
        lines=(Line(x, y * factor, "expected", 0),),
    )


def _density(
    values: NDArray[np.float64], ends: tuple[float, float]
) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """A smoothed density (scipy's kernel estimate), its crest at 1, with the interval's ends.

    A size is never below 0: what the estimate would spread there is turned back.
    """
    from scipy.stats import gaussian_kde

    low, high = values.min(), values.max()
    margin = 0.05 * (high - low)
    x = np.unique([*np.linspace(max(0.0, low - margin), high + margin, POINTS), *ends])
    density = gaussian_kde(values)
    height = density(x) + density(-x)
    return x, height / height.max()


def _bar(size: float, y: tuple[float, float], label: str, style: int) -> Band:
    return Band(_floats([0.0, size]), _floats([y[0]] * 2), _floats([y[1]] * 2), label, style)


def _floats(values: ArrayLike) -> NDArray[np.float64]:
    return np.asarray(values, dtype=float)
