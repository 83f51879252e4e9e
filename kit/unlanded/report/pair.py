"""One pair of a run, looked at closely: on the case's instruments and on a meter of your own."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from ..reference.instruments import Instrument, custom_instrument
from ..study.readings import (
    Pair,
    ReadingSheet,
    SheetRow,
    loading_curve,
    ports_along,
    voltages_across,
)
from ..study.run import Port, Run
from ..units import FOOT, show
from .figure import Figure, even_axis
from .figures import length_figure, loading_figure, sheet_marks
from .tables import Column, Table
from .words import pair_words

Real = NDArray[np.float64]
IMPEDANCES = np.geomspace(1e3, 1e9, 121)
CURVES = 3  # instruments drawn against the run's length
SHOWN = 1.8  # times the run's length: how far the picture of it reaches
YOURS = "your meter"


def your_meter(resistance: float) -> Instrument:
    """A meter of any resistance [ohm], read to a tenth of a volt."""
    return custom_instrument("your-meter", f"{YOURS}, {show(resistance, 'Ω')}",
                             resistance=resistance)


def pair_loading(
    sheet: ReadingSheet, pair: Pair, band: tuple[Real, Real] | None = None
) -> Figure:
    """Reading against the impedance of the meter, with every instrument of the sheet marked.

    `band` has the ends of the voltage's interval at `IMPEDANCES` [V].
    """
    curve = loading_curve(sheet.run, pair, IMPEDANCES)
    # Your meter comes last, so that the others keep their colours wherever it is moved to.
    marks = sorted(sheet_marks(sheet, pair), key=lambda m: m.name.startswith(YOURS))
    return loading_figure(pair, IMPEDANCES, curve, marks, band)


def lengths_for(run: Run, count: int, *, customary: bool = False) -> Real:
    """Lengths (count,) [m] to draw, to well beyond the run's, closest where curves are steep."""
    unit = FOOT if customary else 1.0
    longest = unit * even_axis("", "", 0.0, SHOWN * run.length / unit).high
    return np.asarray(longest * np.linspace(0.1, 1.0, count) ** 2)


def pair_length(
    run: Run, pair: Pair, tools: Sequence[Instrument], lengths: Real, *,
    ports: Sequence[Port] | None = None, customary: bool = False,
) -> Figure:
    """Reading against the length of the run, on the last of the meters and the first of the rest.

    `ports` are those of the pair along the lengths, where they are known already.
    """
    meters = [t for t in tools if t.kind in ("digital", "analogue")]
    chosen = dict.fromkeys([meters[-1], *meters[:CURVES - 1]])
    along = ports_along(run, pair, lengths) if ports is None else ports
    curves = {t.name: voltages_across(t, along, frequency=run.frequency) for t in chosen}
    return length_figure(pair, lengths, curves, length=run.length, customary=customary)


def pair_table(sheet: ReadingSheet, pair: Pair, *, banded: bool = True) -> Table:
    """What each instrument should show on the pair, and what it does there.

    Where the sheet is not `banded` yet, lowest and highest are left open.
    """
    rows = [r for r in sheet.rows if r.pair == pair]
    return Table(
        "pair-readings", f"Expected readings on {pair_words(pair.a, pair.b)}, if all is well.",
        (Column("Instrument"), Column("Reads", "", "right"), Column("Lowest", "", "right"),
         Column("Highest", "", "right"), Column("Loads it by", "", "right"),
         Column("Adds to residual", "", "right")),
        tuple(_cells(r, banded) for r in rows))


def _cells(r: SheetRow, banded: bool) -> tuple[str, ...]:
    ends = (r.low.text, r.high.text) if banded else ("…", "…")
    return (r.instrument.name, r.reading.text, *ends,
            show(100 * r.loading_error, "%"), show(abs(r.residual_added), "A"))
