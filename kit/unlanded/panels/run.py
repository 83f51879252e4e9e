"""What is the run, in cross-section and along its length? The view over `run_model`."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from typing import Any

import ipywidgets as w

from ..report.figure import Figure
from .live import LiveFigure
from .look import said, table_html
from .panel import Panel
from .quantity import Quantity
from .quantity_box import QuantityBox
from .run_model import EARTHED, LENGTH, NOTHING, PIPE, SCREEN, SURFACE, RunModel, Spacing

_WIDE = {"style": {"description_width": "10.5em"}, "layout": {"width": "35.4em"}}


class RunPanel(Panel):
    """Sliders for run length and spacing, the section with its potential, and the matrix."""

    def build(self) -> Sequence[w.Widget]:
        """The controls, the section, the matrix and the formulas beside it."""
        self.model = RunModel(self.desk)
        model, customary = self.model, self.desk.customary
        self.run_length = QuantityBox(LENGTH, model.run.length, model.set_length,
                                      customary=customary)
        self.surround = w.Dropdown(description="Surround",
                                   options=[NOTHING, SURFACE, PIPE, SCREEN], **_WIDE)
        self.earthed = w.Dropdown(description="Screen earthed at", options=list(EARTHED), **_WIDE)
        self.spacing = QuantityBox(Quantity("Spacing", "m", 1e-3, 1.0), 0.01, model.set_spacing,
                                   customary=customary)
        self._fit()
        self.answer, self.matrix, self.near = w.HTML(), w.HTML(), w.HTML()
        self.section = LiveFigure(model.section(), height=400)
        model.observe(lambda _: self.guarded(self._draw), "run")
        self.surround.observe(self._choosing(model.set_surround), "value")
        self.earthed.observe(self._choosing(model.set_earthed), "value")
        self._draw()
        controls = w.HBox([self.run_length, w.VBox([self.surround, self.earthed, self.spacing])],
                          layout={"flex_flow": "wrap"})
        return [controls, self.answer, w.HBox([self.section.view, self.matrix],
                                              layout={"flex_flow": "wrap"}), self.near]

    def renew(self) -> None:
        """Show the case as it is now."""
        self.model.read_case()
        self.run_length.fit(LENGTH, self.model.run.length, customary=self.desk.customary)
        self._fit()

    def live(self) -> Mapping[str, LiveFigure]:
        """The section."""
        return {"Section": self.section}

    def figures(self) -> tuple[Figure, ...]:
        """The section, as fine as on paper."""
        return (self.model.section(detail=150),)

    def offers(self) -> Sequence[tuple[str, dict[str, Any]]]:
        """The formulas; section and matrix are in every memo."""
        return self.model.offers()

    def text(self) -> str:
        """The run in one sentence, the matrix, and the formulas beside it."""
        return self.model.text()

    _quiet = False

    def _fit(self) -> None:
        """Show the controls that this case has, with ranges of its own size."""
        spacing = self.model.spacing
        self._quiet = True
        for box, choice in ((self.surround, self.model.surround),
                            (self.earthed, self.model.earthed)):
            box.layout.display = "none" if choice is None else ""
            if choice is not None:
                box.value = choice
        self._quiet = False
        self.spacing.layout.display = "none" if spacing is None else ""
        if isinstance(spacing, Spacing):
            self.spacing.fit(spacing.quantity, spacing.value, customary=self.desk.customary)

    def _choosing(self, accept: Callable[[str], None]) -> Callable[[dict[str, str]], None]:
        def chosen(change: dict[str, str]) -> None:
            if not self._quiet:
                self.guarded(lambda: accept(change["new"]))
                self._fit()
        return chosen

    def _draw(self) -> None:
        self.section.update(self.model.section())
        self.answer.value = said(self.model.answer())
        self.matrix.value = table_html(self.model.matrix())
        self.near.value = table_html(self.model.formulas())
