"""What will each instrument read here? The view over `readings_model`."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

import ipywidgets as w
import numpy as np

from ..report.pair import YOURS
from ..report.words import pair_words
from ..study.readings import Pair
from .live import LiveFigure, side_by_side
from .look import alert, said, table_html
from .panel import Panel
from .quantity_box import QuantityBox
from .readings_model import METER, Bands, ReadingModel
from .run_model import LENGTH
from .work import SETTLED, Work


class ReadingPanel(Panel):
    """Sliders for run length and meter impedance, the two curves, and the readings of a pair."""

    def build(self) -> Sequence[w.Widget]:
        """The controls, the two curves side by side, and the table."""
        self.model = ReadingModel(self.desk)
        model, desk = self.model, self.desk
        self.pair = w.Dropdown(description="Between", options=self._pairs(), value=model.pair,
                               style={"description_width": "10.5em"}, layout={"width": "35.4em"})
        self.run_length = QuantityBox(LENGTH, model.run.length, model.set_length,
                                      customary=desk.customary)
        self.impedance = QuantityBox(METER, model.resistance, model.set_resistance)
        self.answer, self.table = w.HTML(), w.HTML()
        self.loading, self.length = LiveFigure(model.loading()), LiveFigure(model.length())
        self.work = Work(lambda _: None)
        self.pair.observe(self._picked, "value")
        model.observe(lambda _: self.guarded(self._draw), "sheet")
        model.bands()
        self._draw()
        figures = side_by_side(self.loading, self.length)
        return [self.pair, w.HBox([self.run_length, self.impedance], layout={"flex_flow": "wrap"}),
                self.answer, figures, self.table]

    def renew(self) -> None:
        """Show the case as it is now."""
        self.model.read_case()
        self.run_length.fit(LENGTH, self.model.run.length, customary=self.desk.customary)
        self._quiet = True
        self.pair.options, self.pair.value = self._pairs(), self.model.pair
        self._quiet = False

    def live(self) -> Mapping[str, LiveFigure]:
        """Both curves."""
        return {"Against impedance": self.loading, "Against run length": self.length}

    def offers(self) -> Sequence[tuple[str, dict[str, Any]]]:
        """Both curves and the table."""
        return self.model.offers()

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
        self.length.update(self.model.length())
        self.answer.value = said(self.model.answer())
        self.impedance.show(self.model.resistance)
        self._draw_banded(None)
        self.work.start(lambda _: self.model.bands(), self._draw_banded, self._refused,
                        after=SETTLED)

    def _draw_banded(self, _: Bands | None) -> None:
        """What has a band over all that is not known, which follows a little later."""
        self.loading.update(self.model.loading())
        self.table.value = table_html(self.model.table())
        self._let_drag()

    def _refused(self, sentence: str) -> None:
        self.message.value = alert(sentence)

    def _let_drag(self) -> None:
        """Let the mark of your meter be dragged along the curve."""
        shown = self.loading.figure.points
        mine = [k for k, p in enumerate(shown) if p.texts and p.texts[0].startswith(YOURS)]
        if mine and not (mark := self.loading.mark("points", mine[0])).enable_move:
            mark.enable_move = mark.restrict_x = True
            mark.drag_size = 1.5
            mark.on_drag(lambda _, event: self._dragged(event, ("points", mine[0])))
            mark.on_drag_end(lambda _, event: self._dragged(event, None))

    def _dragged(self, event: dict[str, Any], held: tuple[str, int] | None) -> None:
        """Follow the pointer; the mark under it is left alone until it is let go."""
        self.loading.held = held
        ohms = float(np.clip(event["point"]["x"], METER.low, METER.high))
        self.model.resistance = float(f"{ohms:.3g}")  # as many digits as the box's handle has
        self._draw_banded(None)
