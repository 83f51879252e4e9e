"""What was it? The view over `causes_model`."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

import ipywidgets as w

from ..report.tried import SIZED
from ..study.causes import Explanation
from .causes_model import CausesModel
from .live import LiveFigure
from .look import alert, said, sentences_html, table_html
from .pages import LatePicture, Page, Pages, drawn
from .panel import Panel
from .quantity_box import QuantityBox
from .readings_table import ReadingsTable
from .work import Work

_WIDE = {"description_width": "10.5em"}


class CausesPanel(Panel):
    """Readings typed into a table, the odds of their causes, and what to measure next."""

    pages: Pages

    def build(self) -> Sequence[w.Widget]:
        """The readings, what they mean, and pages of pictures and tables."""
        self.model = CausesModel(self.desk)
        model = self.model
        self.readings = ReadingsTable(model)
        self.suspect = w.Dropdown(description="Conductor", options=model.suspects,
                                  style=_WIDE, layout={"width": "20em"})
        self.bar = w.FloatProgress(min=0.0, max=1.0, description="Odds", layout={"width": "20em"})
        self.halt = w.Button(description="Stop", icon="stop", layout={"width": "6em"},
                             tooltip="Stop working out the odds")
        self.again = w.Button(description="Work out the odds", icon="play",
                              layout={"width": "13em"},
                              tooltip="Work out the odds of the causes again")
        self.working = w.HBox([self.bar, self.halt])
        self.sentences, self.odds_table, self.next_table = w.HTML(), w.HTML(), w.HTML()
        self.odds, self.tried = LatePicture(), LatePicture()
        self.predicted = LatePicture("No reading is on this conductor.")
        self.next = LatePicture("No measurement with these instruments would tell the remaining "
                                "causes apart.")
        self.work = Work(self._tell)
        self.halt.on_click(lambda _: self._halt())
        self.again.on_click(lambda _: self._work_out())
        self.suspect.observe(self._looked_at, "value")
        self.pages = Pages(self._pages(), self.guarded)
        self._tell(None)
        model.work_out()
        self._show(None)
        return [self.readings, w.HBox([self.suspect, self.again, self.working]), self.sentences,
                self.pages]

    def _pages(self) -> Mapping[str, Page]:
        model = self.model
        self.cause = w.Dropdown(description="Cause to try", options=list(SIZED),
                                value=model.cause, style=_WIDE, layout={"width": "35.4em"})
        self.size = QuantityBox(model.size_box, model.size, model.set_size)
        self.fits = w.HTML()
        self.cause.observe(self._chosen, "value")
        model.observe(lambda _: self.guarded(self._draw_tried), "size")
        return {
            "Odds": Page([w.HBox([self.odds, self.odds_table], layout={"flex_flow": "wrap"})],
                         lambda: self.odds.draw(model.odds())),
            "Next measurement": Page([self.next, self.next_table],
                                     lambda: self.next.draw(model.next())),
            "Read and predicted": Page([self.predicted],
                                       lambda: self.predicted.draw(model.predicted())),
            "Try a cause": Page([w.HBox([self.cause, self.size], layout={"flex_flow": "wrap"}),
                                 self.fits, self.tried], self._draw_tried),
        }

    def renew(self) -> None:
        """Show the case as it is now; the odds follow when they are worked out."""
        self.model.read_case()
        self.readings.renew()
        if self.suspect.options != self.model.suspects:
            self._quiet = True
            self.suspect.options, self.suspect.value = self.model.suspects, self.model.suspect
            self._quiet = False
        self._draw_tried()
        self._work_out()

    def live(self) -> Mapping[str, LiveFigure]:
        """The pictures that have been drawn so far."""
        known = {"Odds": self.odds, "Next measurement": self.next,
                 "Read and predicted": self.predicted, "Try a cause": self.tried}
        return drawn(known)

    def offers(self) -> Sequence[tuple[str, dict[str, Any]]]:
        """The cause that is tried; the odds are in every memo of a case with readings."""
        return self.model.offers()

    def text(self) -> str:
        """The odds, what they come to, and the next measurement."""
        return self.model.text()

    _quiet = False

    def _work_out(self) -> None:
        self.body.add_class("unlanded-stale")
        self.work.start(self.model.work_out, self._show, self._stopped)

    def _show(self, _: Explanation | None) -> None:
        model, further = self.model, self.model.next_table()
        self.sentences.value = sentences_html(model.said())
        self.odds_table.value = table_html(model.odds_table())
        self.next_table.value = table_html(further) if further else ""
        self.pages.draw()
        if hasattr(self, "body"):
            self.body.remove_class("unlanded-stale")

    def _halt(self) -> None:
        self.work.stop()
        self._stopped("Stopped.")

    def _stopped(self, sentence: str) -> None:
        self._tell(None)
        self.message.value = alert(f"{sentence} The odds below are those of before.")

    def _tell(self, share: float | None) -> None:
        """Show how far the work is; hide the bar when there is none."""
        self.working.layout.display = "none" if share is None else ""
        if share is not None:
            self.bar.value = share

    def _looked_at(self, change: dict[str, str]) -> None:
        if not self._quiet and change["new"]:
            self.model.suspect = change["new"]
            self._show(None)
            self._draw_tried()

    def _chosen(self, change: dict[str, str]) -> None:
        self.model.try_cause(change["new"])
        self._draw_tried()

    def _draw_tried(self) -> None:
        self.size.fit(self.model.size_box, self.model.size, customary=False)
        self.fits.value = said(self.model.tried_words())
        self.tried.draw(self.model.tried())
