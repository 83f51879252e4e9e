"""What will each instrument read here? The model, and the view over it."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

import ipywidgets as w
import numpy as np
import traitlets
from numpy.typing import NDArray

from ..case.build import build_run, case_instruments
from ..reference.instruments import Instrument, custom_instrument
from ..report.figure import Figure, round_step
from ..report.figures import length_figure, loading_figure, sheet_marks
from ..report.words import pair_words
from ..study.readings import (
    Pair,
    ReadingSheet,
    SheetRow,
    loading_curve,
    ports_along,
    reading_sheet,
    usual_pairs,
    voltages_across,
)
from ..study.run import Port, Run
from ..units import show, si
from .desk import Desk
from .live import LiveFigure
from .look import said, table_html
from .panel import Panel
from .quantity import Quantity, QuantityBox

Real = NDArray[np.float64]
IMPEDANCES = np.geomspace(1e3, 1e9, 121)
CURVES = 3  # instruments drawn against the run's length
METER = Quantity("Meter impedance", "ohm", 1e3, 1e9)
LENGTH = Quantity("Run length", "m", 1.0, 1000.0)


class ReadingModel(traitlets.HasTraits):
    """The readings on one pair of one case, with a meter of any resistance beside the case's own.

    Traits
    ------
    pair : the two points
    resistance : of the meter [ohm]
    sheet : expected readings on the pair, renewed with the case, the pair and the meter
    """

    pair = traitlets.Instance(Pair, ("earth", "N"))
    resistance = traitlets.Float(10e6)
    sheet = traitlets.Instance(ReadingSheet)

    def __init__(self, desk: Desk) -> None:
        self.desk = desk
        self._runs: tuple[Run, ...] = ()
        self._along: tuple[object, tuple[Port, ...]] = (None, ())
        super().__init__()
        self.read_case()

    @property
    def run(self) -> Run:
        """The run of the case as it is now."""
        return self._runs[0]

    def read_case(self) -> None:
        """Take over the case that is on the desk; the pair stays where the case still has it."""
        old = self._runs
        fresh = (build_run(self.desk.case, limit) for limit in ("likely", "low", "high"))
        self._runs = tuple(_keeping(run, old[k] if old else None) for k, run in enumerate(fresh))
        self.pairs = tuple(usual_pairs(self.run))
        if self.pair not in self.pairs:
            self.pair = self._first_pair()
        self.renew()

    @traitlets.observe("pair", "resistance")
    def renew(self, _: object = None) -> None:
        """Work out the sheet of the pair again."""
        if not self._runs:
            return
        _, low, high = self._runs
        tools = (*case_instruments(self.desk.case), self.meter)
        self.sheet = reading_sheet(self.run, tools, [self.pair], low=low, high=high)

    @property
    def meter(self) -> Instrument:
        """The meter that the slider sets: a resistance, read to a tenth of a volt."""
        return custom_instrument("your-meter", f"your meter, {show(self.resistance, 'Ω')}",
                                 resistance=self.resistance)

    def set_length(self, text: str) -> None:
        """Change the run's length in the case; refused as the case file would be."""
        self.desk.change({"run.length": text})

    def set_resistance(self, text: str) -> None:
        """Change the meter's resistance; refused outside 1 kΩ to 1 GΩ."""
        self.resistance = custom_instrument(
            "your-meter", "your meter", resistance=si(text, "ohm")).ranges[0].burden.resistance

    def loading(self) -> Figure:
        """Reading against the impedance of the meter, with every instrument marked."""
        low, high = (loading_curve(r, self.pair, IMPEDANCES) for r in self._runs[1:])
        band = np.minimum(low, high), np.maximum(low, high)
        marks = sheet_marks(self.sheet, self.pair)
        return loading_figure(self.pair, IMPEDANCES,
                              loading_curve(self.run, self.pair, IMPEDANCES), marks, band)

    def length(self) -> Figure:
        """Reading against the length of the run, on your meter and some of the case's."""
        reach = round_step(1.6 * self.run.length)
        lengths = reach * np.linspace(0.005, 1.0, 33)
        tools = [t for t in self.sheet.instruments if t.kind in ("digital", "analogue")]
        chosen = [tools[-1], *tools[:CURVES - 1]]
        ports = self._ports(lengths)
        curves = {t.name: voltages_across(t, ports, frequency=self.run.frequency) for t in chosen}
        return length_figure(self.pair, lengths, curves, length=self.run.length,
                             customary=self.desk.customary)

    def rows(self) -> list[tuple[str, ...]]:
        """The sheet of the pair, as the table under the figures shows it."""
        return [_row(r) for r in self.sheet.rows]

    def answer(self) -> str:
        """The pair in one sentence."""
        row = self.sheet.rows[0]
        return (f"{pair_words(self.pair.a, self.pair.b)}: {show(abs(row.unloaded), 'V')} unloaded "
                f"behind {show(abs(row.source_impedance), 'Ω')}; {row.remark}.")

    def text(self) -> str:
        """The same as lines of text."""
        return "\n".join([self.answer(), *(": ".join((r[0], ", ".join(r[1:])))
                                           for r in self.rows())])

    def _ports(self, lengths: Real) -> tuple[Port, ...]:
        """The pair along the lengths; they stay while only the run's own length is moved."""
        content = self.desk.case.content
        key = (self.pair, lengths[-1], content.supply,
               content.run.model_copy(update={"length": 1.0}))
        if self._along[0] != key:
            self._along = key, ports_along(self.run, self.pair, lengths)
        return self._along[1]

    def _first_pair(self) -> Pair:
        """The pair that a first look is about: the highest voltage that little can hold up."""
        def weight(pair: Pair) -> float:
            port = self.run.port(pair.a, pair.b)
            return abs(port.voltage) if abs(port.impedance) > 1e3 and pair.b == "earth" else -1.0
        return max(self.pairs, key=weight)


def _keeping(run: Run, old: Run | None) -> Run:
    """The run with the matrix of the old one, where the section is the same."""
    same = old is not None and run.section == old.section
    return replace(run, capacitance=old.matrix) if same and old else run


_TITLES = ("Instrument", "Reads", "Lowest", "Highest", "Loads it by", "Adds to residual")


def _row(r: SheetRow) -> tuple[str, ...]:
    return (r.instrument.name, r.reading.text, r.low.text, r.high.text,
            show(100 * r.loading_error, "%"), show(abs(r.residual_added), "A"))


class ReadingPanel(Panel):
    """Sliders for run length and meter impedance, the two curves, and the readings of a pair."""

    def build(self) -> Sequence[w.Widget]:
        """The controls, the two curves side by side, and the table."""
        self.model = ReadingModel(self.desk)
        model, desk = self.model, self.desk
        self.pair = w.Dropdown(description="Between", options=self._pairs(), value=model.pair,
                               style={"description_width": "10.5em"}, layout={"width": "36.5em"})
        self.run_length = QuantityBox(LENGTH, model.run.length, model.set_length,
                                      customary=desk.customary)
        self.impedance = QuantityBox(METER, model.resistance, model.set_resistance)
        self.answer, self.table = w.HTML(), w.HTML()
        self.loading = LiveFigure(model.loading())
        self.length = LiveFigure(model.length())
        self.pair.observe(self._picked, "value")
        model.observe(lambda _: self.guarded(self._draw), "sheet")
        self._draw()
        figures = w.HBox([self.loading.widget, self.length.widget])
        return [self.pair, w.HBox([self.run_length, self.impedance], layout={"flex_flow": "wrap"}),
                self.answer, figures, self.table]

    def renew(self) -> None:
        """Show the case as it is now."""
        self.model.read_case()
        self.run_length.show(self.model.run.length)
        self._quiet = True
        self.pair.options, self.pair.value = self._pairs(), self.model.pair
        self._quiet = False

    def figures(self) -> tuple[Figure, ...]:
        """Both curves as they stand."""
        return self.loading.figure, self.length.figure

    def text(self) -> str:
        """The readings of the pair, a line for each instrument."""
        return self.model.text()

    _quiet = False

    def _pairs(self) -> list[tuple[str, Pair]]:
        return [(pair_words(p.a, p.b), p) for p in self.model.pairs]

    def _picked(self, change: dict[str, Pair]) -> None:
        if not self._quiet and change["new"] is not None:
            self.model.pair = change["new"]

    def _draw(self) -> None:
        self.loading.update(self.model.loading())
        self.length.update(self.model.length())
        self.answer.value = said(self.model.answer())
        self.table.value = table_html("Expected readings, if all is well", _TITLES,
                                      self.model.rows())


