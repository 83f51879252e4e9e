"""A labelled entry box for a quantity, with a slider as its handle.

The text in the box is the truth. The slider moves over a grid of round values and never holds a
value of its own: the float sliders of ipywidgets round what they are given and write it back.
"""

from __future__ import annotations

from collections.abc import Callable

import ipywidgets as w
import numpy as np

from ..errors import Refused
from .look import alert
from .quantity import Quantity, written


class QuantityBox(w.VBox):  # type: ignore[misc]
    """The box, its handle and its message.

    Parameters
    ----------
    quantity : what it holds
    value : in base SI
    accept : called with each new value as text; what it refuses is told, the old value stays
    customary : lengths in feet
    """

    def __init__(
        self,
        quantity: Quantity,
        value: float,
        accept: Callable[[str], None],
        *,
        customary: bool = False,
    ) -> None:
        self._accept, self._quiet = accept, False
        self.text = w.Text(continuous_update=False, style={"description_width": "10.5em"},
                           layout={"width": "20em"})
        self.slider = w.IntSlider(min=0, max=1, readout=False, layout={"width": "15em"})
        self.message = w.HTML()
        self.slider.add_class("unlanded-handle")
        self.text.observe(self._typed, "value")
        self.slider.observe(self._moved, "value")
        super().__init__([w.HBox([self.text, self.slider]), self.message])
        self.fit(quantity, value, customary=customary)

    def fit(self, quantity: Quantity, value: float, *, customary: bool) -> None:
        """Take another label, range or system of units, and show a value of it."""
        if (quantity, customary) != (getattr(self, "quantity", None), self._customary):
            self.quantity, self._customary = quantity, customary
            self._grid = np.array(quantity.grid(customary=customary))
            self.text.description, self.text.tooltip = quantity.label, quantity.hint
            self.slider.tooltip = f"{quantity.label}: handle, moved by arrow keys too"
            self._quiet = True
            try:
                self.slider.max = len(self._grid) - 1
            finally:
                self._quiet = False
        self.show(value)

    def show(self, value: float) -> None:
        """Show a value that came from elsewhere, without telling anybody."""
        self.value = value
        self._quiet = True
        try:
            self.text.value = self._written(value)
            self.slider.value = self._nearest(value)
            self.message.value = ""
        finally:
            self._quiet = False

    _customary = False

    def _nearest(self, value: float) -> int:
        apart = (np.abs(np.log(self._grid / value)) if self.quantity.log and value > 0
                 else np.abs(self._grid - value))
        return int(apart.argmin())

    def _moved(self, change: dict[str, int]) -> None:
        if not self._quiet:
            self._take(self._written(float(self._grid[change["new"]])))

    def _typed(self, change: dict[str, str]) -> None:
        if not self._quiet:
            self._take(change["new"])

    def _take(self, text: str) -> None:
        try:
            value = self.quantity.si(text)
            self._accept(text)
        except Refused as refusal:
            self.message.value = alert(f"{refusal} Kept {self._written(self.value)}.")
            return
        self.show(value)

    def _written(self, value: float) -> str:
        return written(value, self.quantity.unit, customary=self._customary)
