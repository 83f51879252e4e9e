"""What may stray coupling hold in? The view over `operation_model`."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

import ipywidgets as w

from .live import LiveFigure, side_by_side
from .look import alert, said, table_html
from .operation_model import RESISTOR, Judged, OperationModel
from .panel import Panel
from .quantity_box import QuantityBox
from .run_model import LENGTH
from .work import SETTLED, Work

_WIDE = {"description_width": "10.5em"}


class OperationPanel(Panel):
    """A load with its contacts open: against run length, and with a resistor beside it."""

    def build(self) -> Sequence[w.Widget]:
        """The controls, the two curves side by side, and the tables."""
        self.model = OperationModel(self.desk)
        model = self.model
        self.load = w.Dropdown(description="Load", options=model.loads, value=model.load,
                               style=_WIDE, layout={"width": "35.4em"})
        self.run_length = QuantityBox(LENGTH, model.run.length, model.set_length,
                                      customary=self.desk.customary)
        self.resistor = QuantityBox(RESISTOR, model.resistor, model.set_resistor)
        self.answer, self.states, self.cures, self.others = (w.HTML() for _ in range(4))
        model.judge()
        self.along, self.beside = LiveFigure(model.along()), LiveFigure(model.beside())
        self.work = Work(lambda _: None)
        self.load.observe(self._picked, "value")
        model.observe(lambda _: self.guarded(self._draw), "uncertain")
        model.observe(lambda _: self.guarded(self._draw_beside), "resistor")
        self._draw_judged(None)
        return [self.load, w.HBox([self.run_length, self.resistor], layout={"flex_flow": "wrap"}),
                self.answer, side_by_side(self.along, self.beside), self.states, self.cures,
                self.others]

    def renew(self) -> None:
        """Show the case as it is now."""
        self.model.read_case()
        self.run_length.fit(LENGTH, self.model.run.length, customary=self.desk.customary)
        if self.load.options != self.model.loads:
            self._quiet = True
            self.load.options, self.load.value = self.model.loads, self.model.load
            self._quiet = False

    def live(self) -> Mapping[str, LiveFigure]:
        """Both curves."""
        return {"Against run length": self.along, "With a resistor beside it": self.beside}

    def offers(self) -> Sequence[tuple[str, dict[str, Any]]]:
        """The resistor that is tried."""
        return self.model.offers()

    def text(self) -> str:
        """Every load of the case, its longest run and its first cures."""
        return self.model.text()

    _quiet = False

    def _picked(self, change: dict[str, str]) -> None:
        if not self._quiet and change["new"]:
            self.model.load = change["new"]
            self.guarded(self._draw)

    def _draw(self) -> None:
        """At once what is quick; what is judged over all that is not known follows."""
        self._draw_judged(None)
        self.work.start(lambda _: self.model.judge(), self._draw_judged, self._refused,
                        after=SETTLED)

    def _draw_judged(self, _: Judged | None) -> None:
        model = self.model
        self.along.update(model.along())
        self.answer.value = said(model.answer())
        for table, made in ((self.states, model.states()), (self.cures, model.cures())):
            table.value = table_html(made) if made else said("Working out …")
        others = model.others()
        self.others.value = table_html(others) if others else ""
        self._draw_beside()

    def _draw_beside(self) -> None:
        self.beside.update(self.model.beside())
        self.resistor.show(self.model.resistor)

    def _refused(self, sentence: str) -> None:
        self.message.value = alert(sentence)
