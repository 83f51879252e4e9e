"""What margin has the device left? The view over `margin_model`."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

import ipywidgets as w

from ..report.words import pair_words
from ..study.readings import Pair
from .live import LiveFigure
from .look import said, table_html
from .margin_model import MarginModel
from .pages import LatePicture, Page, Pages, drawn
from .panel import Panel
from .quantity import Quantity
from .quantity_box import QuantityBox
from .run_model import LENGTH

_WIDE = {"description_width": "10.5em"}


class MarginPanel(Panel):
    """What stands behind the device, added load, the instruments' own part, and a log."""

    pages: Pages

    def build(self) -> Sequence[w.Widget]:
        """The controls, the answer, and pages of pictures and tables."""
        self.model = MarginModel(self.desk)
        model = self.model
        self.run_length = QuantityBox(LENGTH, model.run.length, model.set_length,
                                      customary=self.desk.customary)
        self.leak = w.Dropdown(description="Behind the device", style=_WIDE,
                               layout={"width": "35.4em"})
        self.pieces = QuantityBox(Quantity("Pieces of it", "1", 0.0, 20.0, log=False), 1.0,
                                  model.set_pieces)
        self.pair = w.Dropdown(description="Instrument between", style=_WIDE,
                               layout={"width": "35.4em"})
        self.answer, self.shares, self.limits, self.instruments = (w.HTML() for _ in range(4))
        self.budget, self.added, self.trip_time = LatePicture(), LatePicture(
            "Nothing but the run stands behind the device."), LatePicture()
        self.history = LatePicture("The case has no current log: [log] with its file.")
        self.pages = Pages(self._pages(), self.guarded)
        self._fit()
        self._draw()
        self.leak.observe(self._leak_chosen, "value")
        self.pair.observe(self._pair_chosen, "value")
        model.observe(lambda _: self.guarded(self._draw), "margin")
        return [w.HBox([self.run_length, w.VBox([self.leak, self.pieces])],
                       layout={"flex_flow": "wrap"}), self.answer, self.pages]

    def _pages(self) -> Mapping[str, Page]:
        model, tables = self.model, w.VBox([self.shares, self.limits])
        return {
            "Standing current": Page([w.HBox([self.budget, tables], layout={"flex_flow": "wrap"})],
                                     self._draw_budget),
            "Added load": Page([self.added], lambda: self.added.draw(model.added())),
            "Instruments": Page([self.pair, w.HBox([self.trip_time, self.instruments],
                                                   layout={"flex_flow": "wrap"})],
                                self._draw_trips),
            "Current log": Page([self.history], lambda: self.history.draw(model.log())),
        }

    def renew(self) -> None:
        """Show the case as it is now."""
        self.model.read_case()
        self._fit()

    def live(self) -> Mapping[str, LiveFigure]:
        """The pictures that have been drawn so far."""
        known = {"Standing current": self.budget, "Added load": self.added,
                 "Instruments": self.trip_time, "Current log": self.history}
        return drawn(known)

    def offers(self) -> Sequence[tuple[str, dict[str, Any]]]:
        """The chance of a trip against the chosen load."""
        return self.model.offers()

    def text(self) -> str:
        """The margin, what each contribution brings, and what each instrument adds."""
        return self.model.text()

    _quiet = False

    def _fit(self) -> None:
        """Show the controls that this case has."""
        model, content = self.model, self.desk.case.content
        self.run_length.fit(LENGTH, content.run.length, customary=self.desk.customary)
        self._quiet = True
        pairs = [(pair_words(p.a, p.b), p) for p in model.pairs]
        if [p for _, p in self.pair.options] != [p for _, p in pairs]:
            self.pair.options = pairs
        self.pair.value = model.pair
        if self.leak.options != model.leaks:
            self.leak.options = model.leaks
        for control in (self.leak, self.pieces):
            control.layout.display = "" if model.leak else "none"
        if model.leak:
            self.leak.value = model.leak
            self.pieces.fit(self._pieces_box(), model.pieces, customary=False)
        self._quiet = False

    def _pieces_box(self) -> Quantity:
        """The range stays while the same leak's pieces are moved within it."""
        shown, box = self.pieces.quantity, self.model.pieces_box
        same = getattr(self, "_counted", "") == self.model.leak
        self._counted = self.model.leak
        return shown if same and self.model.pieces <= shown.high else box

    def _leak_chosen(self, change: dict[str, str]) -> None:
        if not self._quiet and change["new"]:
            self.model.leak = change["new"]
            self._fit()
            self.take_away.renew()
            self.guarded(self.pages.draw)

    def _pair_chosen(self, change: dict[str, Pair]) -> None:
        if not self._quiet and change["new"] is not None:
            self.model.pair = change["new"]
            self.guarded(self._draw_trips)

    def _draw(self) -> None:
        self.answer.value = said(self.model.answer())
        self.pages.draw()

    def _draw_budget(self) -> None:
        self.budget.draw(self.model.budget())
        self.shares.value = table_html(self.model.shares())
        self.limits.value = table_html(self.model.limits())

    def _draw_trips(self) -> None:
        self.trip_time.draw(self.model.trip_time())
        self.instruments.value = table_html(self.model.trip_table())
