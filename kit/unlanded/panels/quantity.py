"""What an entry box holds, and the round values that its handle moves over. No widget is here."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from ..errors import Refused
from ..units import FOOT, show, si

STEPS = 240  # positions of the handle
_HINTS = {"m": "46 m or 150 ft", "ohm": "3.3 Mohm", "F": "100 pF", "1": "a whole number"}


@dataclass(frozen=True)
class Quantity:
    """What a box holds.

    Parameters
    ----------
    label : beside the box
    unit : of the value, such as "m" or "ohm"; "1" for a whole number
    low, high : the handle's range; the box may go beyond, as far as the checks allow
    log : whether the handle moves in equal ratios
    """

    label: str
    unit: str
    low: float
    high: float
    log: bool = True

    def grid(self, *, customary: bool = False) -> tuple[float, ...]:
        """The handle's values in base SI: round to three digits as they are shown, each once.

        >>> [round(v / FOOT, 9) for v in Quantity("Run", "m", 1, 100).grid(customary=True)[:3]]
        [3.28, 3.34, 3.41]
        """
        size = FOOT if self.unit == "m" and customary else 1.0
        if self.unit == "1":
            step = max(1, round((self.high - self.low) / STEPS))
            return tuple(float(n) for n in range(int(self.low), int(self.high) + 1, step))
        space = np.geomspace if self.log else np.linspace
        values = space(self.low / size, self.high / size, STEPS + 1)
        return tuple(dict.fromkeys(float(f"{v:.3g}") * size for v in values))

    def si(self, text: str) -> float:
        """The value that a text says, in base SI; refused in one sentence."""
        value = si(text, self.unit, place=self.label)
        if self.unit == "1" and (value != round(value) or value < 0):
            raise Refused(self.label, "must be a whole number", given=text)
        return value

    @property
    def hint(self) -> str:
        """What may be typed into the box."""
        example = _HINTS.get(self.unit, "")
        return f"{self.label}, with its unit: {example}" if example else self.label


def written(value: float, unit: str, *, customary: bool = False) -> str:
    """A quantity as a case file and an entry box take it.

    >>> written(45.72, "m"), written(45.72, "m", customary=True), written(3.3e6, "ohm")
    ('45.72 m', '150 ft', '3.3 Mohm')
    >>> written(0.005, "m"), written(0.00508, "m", customary=True), written(12, "1")
    ('5 mm', '0.2 in', '12')
    """
    if unit == "1":
        return f"{value:.0f}"
    if unit != "m":
        return show(value, unit, 6)
    if customary:
        return f"{value / FOOT:.6g} ft" if value >= 0.3 else f"{value / 0.0254:.6g} in"
    return f"{value:.6g} m" if value >= 0.1 else f"{value * 1e3:.6g} mm"
