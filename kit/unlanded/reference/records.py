"""The form of every published or trade value: a number never stands without its source."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Literal

from ..errors import Refused
from ..units import show

Standing = Literal["seen", "from memory", "common practice", "judgement"]


@dataclass(frozen=True)
class Source:
    """Where a value comes from, and how sure we are of it.

    `standing` is "seen" (read in a copy of the source), "from memory" (recalled, to be checked
    against the source before it is relied on), "common practice" (of the trade, no source) or
    "judgement" (ours, where no open source was found).
    """

    title: str
    standing: Standing
    clause: str = ""
    year: int | None = None

    def __str__(self) -> str:
        # A standard's number has its year behind a colon; a paper's title does not.
        form = ":{}" if self.title[-1:].isdigit() else " ({})"
        year = form.format(self.year) if self.year else ""
        clause = f", {self.clause}" if self.clause else ""
        mark = {"seen": "", "from memory": " [from memory]",
                "common practice": " [common practice, no source]",
                "judgement": " [judgement, no source]"}[self.standing]
        return f"{self.title}{year}{clause}{mark}"


@dataclass(frozen=True)
class Value:
    """A value in base SI with the range it may lie in and its source.

    `low` and `high` bound what is met in practice; both equal `likely` for an exact value.
    """

    likely: float
    unit: str
    source: Source
    low: float = math.nan
    high: float = math.nan

    def __post_init__(self) -> None:
        if math.isnan(self.low):
            object.__setattr__(self, "low", self.likely)
        if math.isnan(self.high):
            object.__setattr__(self, "high", self.likely)
        if not self.low <= self.likely <= self.high:
            raise Refused("value", "low, likely and high must be in rising order",
                          given=f"{self.low:g}, {self.likely:g}, {self.high:g}")

    def __str__(self) -> str:
        text = show(self.likely, self.unit)
        if self.low < self.high:
            text += f" ({show(self.low, self.unit)} to {show(self.high, self.unit)})"
        return text
