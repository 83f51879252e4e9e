"""Figures of the causes, as descriptions made from study results."""

from __future__ import annotations

import math
from collections.abc import Sequence

import numpy as np

from ..errors import listed
from ..study.causes import Explanation, quantiles
from ..study.finding import SUSPECT_READING
from ..study.hypotheses import CAUSES, Cause
from ..study.next_reading import Prospect
from ..study.observation import Observation
from ..units import show
from .causes_words import candidate_words
from .figure import Axis, Band, Figure, Line, Points, Reference, even_axis, log_axis
from .margin_figures import per_cent
from .words import cut

FLOOR = 0.01  # volts: less is drawn as this
SHOWN_SHARE = 1e-3  # of a cause, below which a picture leaves it out
NEXT = 8  # measurements on one picture
READ = 13  # style of what was read: a cross in the seventh colour, black
LEAST_TOLD = -4.0  # powers of ten


def odds_figure(found: Explanation, suspect: str, *, key: str) -> Figure:
    """The share of each cause before the readings and after them."""
    odds = found.odds(suspect)
    said = [f"{c}: {per_cent(odds[c])}" for c in CAUSES]
    return Figure(
        key=key, title=f"Odds of the causes on {suspect}",
        x=even_axis("Share", "%", 0.0, 100.0), y=_rows(CAUSES),
        caption=f"What the readings leave of each cause on “{suspect}”; hollow marks: what was "
        "thought of it beforehand.",
        alternative=f"Bars: {listed(said)}.",
        numbers=tuple(said),
        bands=tuple(_bar(i, 0.0, 100 * odds[c]) for i, c in enumerate(CAUSES)),
        lines=tuple(Line(np.array([1.0, 1.0]) * 100 * odds[c], np.array([i - 0.3, i + 0.3]), "", 0)
                    for i, c in enumerate(CAUSES)),
        points=(Points(np.array([100 * found.shares[c] for c in CAUSES]),
                       np.arange(len(CAUSES), dtype=float), "beforehand", 1, hollow=True),),
        aspect=0.42,
    )


def told_figure(found: Explanation, suspect: str, *, key: str) -> Figure:
    """What each reading says for and against each cause, given all the others."""
    causes = shown_causes(found, suspect)
    best = found.likeliest(suspect)
    told = [found.told(suspect, k) for k in range(len(found.readings))]
    step = 0.7 / max(len(causes), 1)
    points = []
    for i, cause in enumerate(causes):
        against = [max(t.get(cause, LEAST_TOLD) - t[best], LEAST_TOLD) for t in told]
        heights = [k + step * (i - (len(causes) - 1) / 2) for k in range(len(told))]
        points.append(Points(np.array(against), np.array(heights), cause, CAUSES.index(cause)))
    most = max(1.0, *(float(p.x.max()) for p in points))
    return Figure(
        key=key, title=f"What each reading says, {suspect}",
        x=_powers(LEAST_TOLD, math.ceil(most)),
        y=_rows([_short(k, r) for k, r in enumerate(found.readings)]),
        caption=f"The factor by which each reading changes the odds of a cause over {best}, the "
        "likeliest, given all the other readings. Left of 1 it speaks against the cause. What is "
        "less than 1/10 000 is drawn there.",
        alternative="A row for each reading, a mark for each cause. " + _told_words(told, causes,
                                                                                    best),
        points=tuple(points),
        references=(Reference(0.0, "x", f"{best}"),),
        aspect=min(1.2, 0.3 + 0.075 * len(told)),
    )


def _told_words(
    told: Sequence[dict[Cause, float]], causes: Sequence[Cause], best: Cause
) -> str:
    said = []
    for k, t in enumerate(told, 1):
        worst = min((c for c in causes if c != best), key=lambda c: t.get(c, 0.0), default=None)
        if worst is not None:
            factor = 10 ** (t.get(worst, 0.0) - t[best])
            said.append(f"reading {k} speaks most against {worst}, by a factor of {factor:.2g}")
    return f"{listed(said)}." if said else "No other cause is left."


def predicted_figure(found: Explanation, suspect: str, *, key: str) -> Figure | None:
    """Each reading on the suspect against what each cause predicts from all the other readings.

    None where no reading is on it.
    """
    numbered = [(k, r) for k, r in enumerate(found.readings) if suspect in _names(r)]
    if not numbered:
        return None
    causes = shown_causes(found, suspect)
    bands = {c: [b for k, _ in numbered if (b := predicted(found, suspect, c, k))] for c in causes}
    drawn = {c: b for c, b in bands.items() if len(b) == len(numbered)}
    step = 0.7 / (len(drawn) + 1)
    points = []
    for i, (cause, ends) in enumerate(drawn.items()):
        low, middle, high = (np.maximum([e[j] for e in ends], FLOOR) for j in range(3))
        heights = [row + step * (i + 0.5 - len(drawn) / 2) for row in range(len(numbered))]
        points.append(Points(middle, np.array(heights), cause, CAUSES.index(cause), (), low, high))
    points += _shown(numbered)
    volts = np.concatenate([p.x for p in points]
                           + [p.x_high for p in points if p.x_high is not None])
    return Figure(
        key=key, title=f"Read and predicted, {suspect}",
        x=log_axis("Voltage, RMS", "V", FLOOR * 0.8, 1.5 * float(volts.max())),
        y=_rows([_short(k, r) for k, r in numbered]),
        caption="For each reading, the voltage that each cause predicts from all the other "
        "readings: median, and the range that 90 % lies in. Black crosses: what was read (for a "
        "lamp, its threshold).",
        alternative="A row for each reading with a range for each cause. " + _fit_words(
            numbered, drawn),
        points=tuple(points),
        aspect=min(1.2, 0.3 + 0.085 * len(numbered)),
    )


def predicted(
    found: Explanation, suspect: str, cause: Cause, reading: int
) -> tuple[float, float, float] | None:
    """Voltage of a reading under a cause, from all the others, at 5, 50 and 95 % [V].

    None under "none of these".
    """
    if cause == "none of these":
        return None
    values, weights = [], []
    for h, share in found.of_cause(suspect, cause):
        weight = h.draws.weight / h.draws.gain[reading]
        values.append(h.scene.volts([found.readings[reading]], h.draws.size, h.draws.score)[0])
        weights.append(share / h.evidence * weight / len(weight))
    if not values:
        return None
    low, middle, high = quantiles(np.concatenate(values), np.concatenate(weights),
                                  (0.05, 0.5, 0.95))
    return float(low), float(middle), float(high)


def _fit_words(
    numbered: Sequence[tuple[int, Observation]],
    drawn: dict[Cause, list[tuple[float, float, float]]],
) -> str:
    said = []
    for row, (k, r) in enumerate(numbered):
        ends = [f"{c} {show(b[row][0], 'V')} to {show(b[row][2], 'V')}" for c, b in drawn.items()]
        said.append(f"Reading {k + 1}, {r.text}: {listed(ends)}.")
    return " ".join(said)


def _shown(numbered: Sequence[tuple[int, Observation]]) -> list[Points]:
    volts = [r.value if math.isfinite(r.value) else
             (r.low if math.isfinite(r.low) else r.high) for _, r in numbered]
    heights = np.array([row + 0.35 for row in range(len(numbered))])
    return [Points(np.maximum(volts, FLOOR), heights, "read", READ,
                   tuple(r.text for _, r in numbered))]


def next_figure(prospects: Sequence[Prospect]) -> Figure:
    """The information that each of the best next measurements is expected to give."""
    best = [p for p in prospects if p.allowed][:NEXT]
    said = [f"{candidate_words(p.candidate)}: {p.bits:.2f} bit" for p in best]
    return Figure(
        key="next", title="The next measurement",
        x=even_axis("Expected information on the causes", "bit", 0.0,
                    max(0.1, *(p.bits for p in best))),
        y=_rows([cut(candidate_words(p.candidate), 66) for p in best]),
        caption="How much each measurement is expected to reduce what is not known of the causes. "
        "Those that could trip the device, or pass the instrument's range, are left out.",
        alternative=f"Bars: {listed(said)}.",
        numbers=tuple(said),
        bands=tuple(_bar(i, 0.0, p.bits) for i, p in enumerate(best)),
        lines=tuple(Line(np.array([p.bits] * 2), np.array([i - 0.3, i + 0.3]), "", 0)
                    for i, p in enumerate(best)),
        aspect=0.2 + 0.05 * len(best),
    )


def shown_causes(found: Explanation, suspect: str) -> list[Cause]:
    """Causes with a share that a picture shows, the likeliest first; at least two."""
    odds = found.odds(suspect)
    ranked = sorted(odds, key=odds.__getitem__, reverse=True)
    return [c for k, c in enumerate(ranked) if odds[c] > SHOWN_SHARE or k < 2]


def doubtful(found: Explanation) -> tuple[int, ...]:
    """Readings that fit nothing, by index."""
    return tuple(k for k in range(len(found.readings)) if found.misread(k) > SUSPECT_READING)


def _short(k: int, r: Observation) -> str:
    return f"{k + 1}: {cut(f'{r.text}, {r.instrument.name}', 44)}"


def _names(r: Observation) -> set[str]:
    return {p.rpartition("@")[0] for p in (r.pair.a, r.pair.b)}


def _rows(labels: Sequence[str]) -> Axis:
    return Axis("", "", -0.6, len(labels) - 0.4, "even",
                tuple((float(i), text) for i, text in enumerate(labels)), turned=True)


def _bar(row: int, low: float, high: float) -> Band:
    return Band(np.array([low, high]), np.array([row - 0.3] * 2), np.array([row + 0.3] * 2), "", 0)


def _powers(low: float, high: float) -> Axis:
    """Powers of ten, written as factors."""
    ticks = tuple((float(p), f"{10**p:,}".replace(",", " ") if p >= 0
                   else f"1/{10**-p:,}".replace(",", " "))
                  for p in range(math.ceil(low), math.floor(high) + 1))
    return Axis("Factor on the odds", "", low - 0.2, high + 0.2, "even", ticks)
