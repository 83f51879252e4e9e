"""Figures of the residual-current margin, as descriptions made from study results."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator, Sequence
from itertools import pairwise

import numpy as np
from numpy.typing import ArrayLike, NDArray

from ..errors import listed
from ..study.history import GAP, History
from ..study.residual import Margin
from ..study.trip import MeasuredTrip
from ..units import show
from .figure import Axis, Band, Figure, Line, Note, Points, Reference, even_axis, log_axis
from .labels import flags
from .words import cut

_A = "A"
MARKED = 7  # instruments on the trip-time picture
DRAWN = 900  # stretches of a log that a picture can show
LONGEST_GAPS = 20


def budget_figure(margin: Margin) -> Figure:
    """One bar for each contribution, each from where the last ended, up to the trip band."""
    device = margin.device
    parts = [1e3 * s.along for s in margin.shares]
    ends = np.cumsum([0.0, *parts])
    rest = 1e3 * margin.expected - ends[-1]
    names = [cut(s.name, 30) for s in margin.shares]
    bars = [*pairwise(ends)]
    if rest > 0.01 * ends[-1]:
        names.append("other frequencies")
        bars.append((ends[-1], ends[-1] + rest))
    names.append("all together")
    bars.append((0.0, 1e3 * margin.expected))
    low, high = (1e3 * i for i in margin.credible)
    band = 1e3 * device.band.low, 1e3 * device.band.high
    top = len(names) - 0.4
    return Figure(
        key="budget", title="Standing residual current, and the device's trip band",
        x=even_axis("Residual current, RMS", "mA", min(0.0, *ends), max(band[1], high)),
        y=Axis("", "", -0.6, top, "even", tuple((float(i), n) for i, n in enumerate(names)),
               turned=True),
        caption="Each contribution by its part in the direction of the total, on average, with its "
        "use; the last bar is the whole, its range what 95 % of the draws lie in. Shaded upright: "
        f"the band in which the device trips, {show(device.band.low, 'A')} to "
        f"{show(device.band.high, 'A')}.",
        alternative=f"Bars adding up to {show(margin.expected, 'A')}, of which "
        f"{listed([f'{s.name} {show(s.along, _A)}' for s in margin.shares])}; the trip band "
        f"begins at {show(device.band.low, 'A')}.",
        numbers=(f"expected {show(margin.expected, 'A')}",
                 f"95 % of draws {show(margin.credible[0], 'A')} to "
                 f"{show(margin.credible[1], 'A')}"),
        bands=(_block(band, (-0.6, top), "trip band", 1),
               *(_block((min(bar), max(bar)), (i - 0.32, i + 0.32), "", 0)
                 for i, bar in enumerate(bars))),
        references=_recommended(margin),
        lines=tuple(Line(_floats([b, b]), _floats([i - 0.32, i + 0.32]), "", 0)
                    for i, (_, b) in enumerate(bars)),
        points=(Points(_floats([1e3 * margin.expected]), _floats([len(names) - 1]),
                       "expected, with its range", 0, (show(margin.expected, "A"),),
                       _floats([low]), _floats([high])),),
        aspect=min(1.2, 0.3 + 0.05 * len(names)),
    )


def _floats(values: ArrayLike) -> NDArray[np.float64]:
    return np.asarray(values, dtype=float)


def _block(x: tuple[float, float], y: tuple[float, float], label: str, style: int) -> Band:
    """A shaded rectangle."""
    return Band(_floats(x), _floats([y[0]] * 2), _floats([y[1]] * 2), label, style)


def _recommended(margin: Margin) -> tuple[Reference, ...]:
    if not math.isfinite(margin.recommended):
        return ()
    return (Reference(1e3 * margin.recommended, "x",
                      f"recommended share, {show(margin.recommended, 'A')}"),)


def trip_time_figure(margin: Margin, trips: Sequence[MeasuredTrip]) -> Figure:
    """The longest time to trip against residual current, with the instruments that may trip it."""
    device = margin.device
    marked = _marked(trips, 0.05 * device.rated)
    most = max([10 * device.rated, *(1.3 * t.expected for t in marked)])
    least = min([device.non_operating / 3, *([margin.expected] if margin.expected > 1e-5 else [])])
    amperes = np.geomspace(device.rated, most, 400)
    longest = np.array([device.longest_time(i) for i in amperes])
    stated = bool(np.isfinite(longest).any())
    lines = [Line(1e3 * amperes, longest, "longest time that the standard allows", 0)] * stated
    if device.kind == "delayed":
        shortest = [device.shortest_time(i) for i in amperes]
        lines.append(Line(1e3 * amperes, _floats(shortest), "time for which it must not trip", 2))
    x = _currents(1e3 * least * 0.8, 1e3 * most)
    y = log_axis("Time to trip", "s", 0.01, 10.0)
    band = 1e3 * device.band.low, 1e3 * max(device.band.high, 1.0001 * device.band.low)
    labels = [f"{cut(t.instrument.name, 26)}: {t.verdict}" for t in marked]
    return Figure(
        key="trip-time", title="Time to trip, and what measuring does to the device", x=x, y=y,
        caption="The longest time in which the standard has the device trip. Shaded upright: the "
        "band in which it may. Marks: instruments that will or may trip it, at the residual "
        "current with each in place and the time allowed there (in the band, where none is "
        "stated, at the top). Upright line: the standing current.",
        alternative=f"Time falling with residual current from {show(device.rated, 'A')} on. "
        f"Marked: {listed(labels) or 'no instrument'}.",
        numbers=tuple(f"{label}, {_within(t)}" for label, t in zip(labels, marked, strict=True)),
        bands=(_block(band, (0.01, 10.0), "trip band", 1),),
        references=_standing(margin, x), lines=tuple(lines),
        points=tuple(Points(_floats([1e3 * t.expected]), _floats([_height(t)]), style=i + 3,
                            texts=(label,))
                     for i, (t, label) in enumerate(zip(marked, labels, strict=True))),
        notes=_notes(marked, labels, x, y, lambda at: device.longest_time(1e-3 * x.value(at))),
    )


def _currents(low: float, high: float) -> Axis:
    """A log axis in mA with ticks at 1, 2 and 5 of each decade."""
    powers = range(math.floor(math.log10(low)), math.ceil(math.log10(high)))
    ticks = tuple((m * 10.0**p, f"{m * 10.0**p:g}") for p in powers for m in (1, 2, 5)
                  if low <= m * 10.0**p <= high)
    return Axis("Residual current, RMS", "mA", low, high, "log", ticks)


def _marked(trips: Sequence[MeasuredTrip], least: float) -> list[MeasuredTrip]:
    """Each instrument once, at its highest residual current, where it will or may trip.

    Those that add less than `least` [A] are left out: the standing current alone is the matter.
    """
    worst: dict[str, MeasuredTrip] = {}
    for t in trips:
        key = t.instrument.key
        if t.verdict in ("will", "may") and t.added >= least and (
                key not in worst or t.expected > worst[key].expected):
            worst[key] = t
    return sorted(worst.values(), key=lambda t: t.expected)[-MARKED:]


def _standing(margin: Margin, x: Axis) -> tuple[Reference, ...]:
    if not x.low <= 1e3 * margin.expected <= x.high:
        return ()
    return (Reference(1e3 * margin.expected, "x", f"standing, {show(margin.expected, 'A')}"),)


def _height(trip: MeasuredTrip) -> float:
    return min(9.0, trip.longest) if math.isfinite(trip.longest) else 9.0


def _within(trip: MeasuredTrip) -> str:
    return f"within {show(trip.longest, 's')}" if math.isfinite(trip.longest) else "no time stated"


def _notes(
    marked: Sequence[MeasuredTrip],
    labels: Sequence[str],
    x: Axis,
    y: Axis,
    longest: Callable[[float], float],
) -> tuple[Note, ...]:
    """Words clear of the curve of `longest` times, which is a function of the place along x."""
    spots = [(x.fraction(1e3 * t.expected), y.fraction(_height(t))) for t in marked]

    def curve(at: float) -> float:
        time = longest(at)
        return y.fraction(time) if math.isfinite(time) else -1.0

    return tuple(
        Note(x.value(f.x), y.value(f.height), text, "right" if f.leftward else "left",
             (x.value(f.x), y.value(f.y)))
        for f, text in zip(flags(spots, labels, curve), labels, strict=True))


def added_figure(leak: str, margins: Sequence[tuple[int, Margin]]) -> Figure:
    """The chance of a trip against how many pieces of a leak stand behind the device."""
    counts = [float(n) for n, _ in margins]
    now = [100 * m.chance for _, m in margins]
    busy = [100 * m.chance_all_on for _, m in margins]
    here = margins[0][1]
    said = [f"{n} pieces: {per_cent(m.chance)}" for n, m in margins[:: max(1, len(margins) // 5)]]
    return Figure(
        key="added", title=f"Chance of a trip against added load: {cut(leak, 40)}",
        x=even_axis(f"Pieces of “{cut(leak, 40)}”", "", counts[0], counts[-1]),
        y=even_axis("Chance of a trip", "%", 0.0, max(10.0, *now, *busy)),
        caption="Chance that the device trips, over its own spread and what is not known of the "
        "loads: at a moment taken at random, and with everything on. The leftmost point is what "
        "stands there now.",
        alternative=f"Two rising curves. At a random moment: {listed(said)}.",
        numbers=tuple(said),
        lines=(Line(_floats(counts), _floats(busy), "everything on", 1),
               Line(_floats(counts), _floats(now),
                    f"at a random moment (now {per_cent(here.chance)})", 0)),
    )


def per_cent(chance: float) -> str:
    """A chance as a reader wants it: never 0 or 100 % where it is not.

    >>> per_cent(0.0088), per_cent(0.947), per_cent(0.9999), per_cent(1e-6), per_cent(0.0)
    ('0.88 %', '95 %', 'over 99 %', 'under 0.01 %', '0 %')
    """
    if 0.99 < chance < 1:
        return "over 99 %"
    if 0 < chance < 1e-4:
        return "under 0.01 %"
    return f"{100 * chance:.0f} %" if chance >= 0.1 else f"{100 * chance:.2g} %"


def log_figure(history: History, margin: Margin) -> Figure:
    """The logged current with its steps, against the device and the computed standing current."""
    log = history.log
    days = log.seconds[-1] - log.seconds[0] > 2 * 86400
    unit, length = ("d", 86400.0) if days else ("h", 3600.0)
    along = (log.seconds - log.seconds[0]) / length
    shown = 1e3 * np.where(np.isfinite(log.current), log.current, np.nan)
    steps = history.steps[:200]
    at = _floats([(s.seconds - log.seconds[0]) / length for s in steps])
    stretches = list(_stretches(along, shown))
    ends = (0.0, float(along[-1]))
    low, high = (1e3 * i for i in margin.credible)
    return Figure(
        key="log", title="Logged residual current, and its steps",
        x=even_axis("Time since the first sample", unit, *ends, parts=7),
        y=even_axis("Residual current, RMS", "mA", 0.0,
                    1.05 * max(float(np.nanmax(shown)), 1e3 * history.limit)),
        caption="Logged current, from lowest to highest in each stretch of time; a gap is left "
        "open. Marks: changes that look like a load switching, at the level before them. Shaded "
        "across: the computed standing current, 95 % of its draws.",
        alternative=f"Logged current over {ends[1]:.3g} {unit}, median "
        f"{show(history.percentiles[50], 'A')}, above the limit of {show(history.limit, 'A')} for "
        f"{_share(history)} of the time, with {len(history.steps)} steps.",
        numbers=(f"median {show(history.percentiles[50], 'A')}",
                 f"above {show(history.limit, 'A')}: {_share(history)}"),
        bands=(_block(ends, (low, high), "computed standing current", 2),
               *(Band(x, least, most, "", 0) for x, least, most in stretches)),
        references=(Reference(1e3 * history.limit, "y",
                              f"must not trip, {show(history.limit, 'A')}"),),
        lines=tuple(Line(x, most, "" if i else "logged", 0)
                    for i, (x, _, most) in enumerate(stretches)),
        points=(Points(at, _floats(np.interp(at, along, shown)), "steps", 3,
                       tuple(show(s.size, "A") for s in steps)),) if steps else (),
    )


def _stretches(
    along: NDArray[np.float64], shown: NDArray[np.float64]
) -> Iterator[tuple[NDArray[np.float64], NDArray[np.float64], NDArray[np.float64]]]:
    """Time, lowest and highest, thinned to what a picture can show, between the longest gaps."""
    interval = np.diff(along)
    gaps = np.flatnonzero(interval > GAP * np.median(interval))
    longest = np.sort(gaps[np.argsort(-interval[gaps])[:LONGEST_GAPS]])
    for x, y in zip(np.split(along, longest + 1), np.split(shown, longest + 1), strict=True):
        bins = max(2, int(DRAWN * len(x) / len(along)))
        starts = np.unique(np.linspace(0, len(x) - 1, bins).astype(int))
        if len(x) > 1:
            yield x[starts], np.fmin.reduceat(y, starts), np.fmax.reduceat(y, starts)


def _share(history: History) -> str:
    return f"{100 * history.above / history.recorded:.2g} %"
