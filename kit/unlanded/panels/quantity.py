"""A labelled entry box for a quantity, with a slider as its handle.

The text in the box is the truth. The slider moves over a grid of round values and never holds a
value of its own: the float sliders of ipywidgets round what they are given and write it back.
"""

from __future__ import annotations

import html
from collections.abc import Callable
from dataclasses import dataclass

import ipywidgets as w
import numpy as np

from ..errors import Refused
from ..units import si
from .desk import written

STEPS = 240  # positions of the handle


@dataclass(frozen=True)
class Quantity:
    """What a box holds.

    Parameters
    ----------
    label : beside the box
    unit : of the value, such as "m" or "ohm"
    low, high : the handle's range; the box may go beyond, as far as the checks allow
    log : whether the handle moves in equal ratios
    """

    label: str
    unit: str
    low: float
    high: float
    log: bool = True

    @property
    def grid(self) -> tuple[float, ...]:
        """The handle's values, rounded to three digits, each once."""
        space = np.geomspace if self.log else np.linspace
        values = space(self.low, self.high, STEPS + 1)
        return tuple(dict.fromkeys(float(f"{v:.3g}") for v in values))


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
        self.quantity = quantity
        self._accept, self._customary, self._quiet = accept, customary, False
        self._grid = np.array(quantity.grid)
        wide = {"description_width": "10.5em"}
        self.text = w.Text(description=quantity.label, continuous_update=False, style=wide,
                           layout={"width": "21em"}, tooltip=_hint(quantity))
        self.slider = w.IntSlider(min=0, max=len(self._grid) - 1, readout=False,
                                  layout={"width": "15em"}, tooltip=f"{quantity.label}, handle")
        self.message = w.HTML()
        self.slider.add_class("unlanded-handle")
        self.show(value)
        self.text.observe(self._typed, "value")
        self.slider.observe(self._moved, "value")
        super().__init__([w.HBox([self.text, self.slider]), self.message])

    def show(self, value: float) -> None:
        """Show a value that came from elsewhere, without telling anybody."""
        self.value = value
        self._quiet = True
        try:
            self.text.value = self._written(value)
            self.slider.value = int(np.abs(np.log(self._grid / value)).argmin()
                                    if self.quantity.log else np.abs(self._grid - value).argmin())
            self.message.value = ""
        finally:
            self._quiet = False

    def _moved(self, change: dict[str, int]) -> None:
        if not self._quiet:
            self._take(self._written(float(self._grid[change["new"]])))

    def _typed(self, change: dict[str, str]) -> None:
        if not self._quiet:
            self._take(change["new"])

    def _take(self, text: str) -> None:
        try:
            value = si(text, self.quantity.unit, place=self.quantity.label)
            self._accept(text)
        except Refused as refusal:
            self.message.value = alert(f"{refusal} Kept {self._written(self.value)}.")
            return
        self.show(value)

    def _written(self, value: float) -> str:
        return written(value, self.quantity.unit, customary=self._customary)


def alert(text: str) -> str:
    """A sentence that a screen reader speaks at once, as HTML."""
    return f'<span role="alert" class="unlanded-alert">{html.escape(text)}</span>'


def _hint(quantity: Quantity) -> str:
    example = {"m": "46 m or 150 ft", "ohm": "3.3 Mohm", "F": "100 pF"}.get(quantity.unit, "")
    return f"{quantity.label}, with its unit{f': {example}' if example else ''}"
