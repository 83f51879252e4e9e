"""A reading taken on site, as the interval of voltage that it leaves possible."""

from __future__ import annotations

import math
import re
from dataclasses import dataclass
from typing import Literal, get_args

from ..errors import Refused, nearest
from ..physics.burden import Burden
from ..reference.instruments import Instrument
from ..units import si
from .readings import Pair

Action = Literal["neighbours off", "loads off", "far end disconnected"]
ACTIONS: tuple[Action, ...] = get_args(Action)
NOTHING: frozenset[Action] = frozenset()
"""No action: the run as it is described."""

_DECIMALS = re.compile(r"\s*[-+]?[\d,]*\.?(\d*)(?:[eE][-+]?\d+)?\s*(.*)", re.DOTALL)


@dataclass(frozen=True)
class Observation:
    """What an instrument showed on a pair.

    Parameters
    ----------
    instrument, pair : which, and where
    text : as it was written down
    low, high : the voltage that its display stands for lies from low to high, RMS [V]; infinite
        over range or above a threshold, minus infinite at a displayed zero
    half_width : of the accuracy statement there [V]
    burden : what it put between the points
    actions : what was done to the run before the reading
    resistor : added across the pair [ohm], infinite for none
    """

    instrument: Instrument
    pair: Pair
    text: str
    low: float
    high: float
    half_width: float
    burden: Burden
    actions: frozenset[Action] = NOTHING
    resistor: float = math.inf

    def __post_init__(self) -> None:
        for action in self.actions:
            if action not in ACTIONS:
                raise Refused("action", "is not known", given=action, hint=nearest(action, ACTIONS))
        if not self.resistor > 0:
            raise Refused("resistor", "must be above 0 Ω", given=f"{self.resistor:g} Ω")

    @property
    def value(self) -> float:
        """The number shown [V]; NaN where none was."""
        if not (math.isfinite(self.high) and self.high > self.low):
            return math.nan
        return (self.low + self.high) / 2 if math.isfinite(self.low) else 0.0


def observe(
    instrument: Instrument,
    pair: Pair,
    text: str,
    *,
    actions: frozenset[Action] = NOTHING,
    resistor: float = math.inf,
) -> Observation:
    """The reading that `text` stands for: a voltage, "OL", "off scale", "lit" or "not lit".

    The last digit written is the resolution; of a scale, at least a readable part of a division.
    Raises `Refused` where the instrument cannot show that.

    >>> from unlanded.reference.instruments import INSTRUMENTS
    >>> seen = observe(INSTRUMENTS["digital-10M"], Pair("spare@far"), "79.3 V")
    >>> round(seen.low, 2), round(seen.high, 2), round(seen.half_width, 3)
    (79.25, 79.35, 1.093)
    """
    lamp = text in ("lit", "not lit")
    if (instrument.threshold is not None) != lamp or instrument.kind == "body":
        raise Refused(f'instrument "{instrument.key}"', "cannot show this", given=text)
    low, high, at = _interval(instrument, text)
    return Observation(instrument, pair, text, low, high, instrument.accuracy_at(at),
                       instrument.burden_at(at), actions, resistor)


def _interval(instrument: Instrument, text: str) -> tuple[float, float, float]:
    """The interval of voltage, and the voltage that its range and accuracy are taken at."""
    if instrument.threshold is not None:
        on, off = (instrument.threshold, math.inf), (-math.inf, instrument.threshold)
        return (*(on if text == "lit" else off), instrument.threshold)
    top = instrument.ranges[-1].full_scale
    if text in ("OL", "off scale"):
        return top, math.inf, top
    value, resolution = _parsed(text)
    if instrument.kind == "analogue":
        resolution = max(resolution, instrument.range_for(value).resolution)
    low = value - resolution / 2
    return (low if low > 0 else -math.inf), value + resolution / 2, value


def _parsed(text: str) -> tuple[float, float]:
    value = si(text, "V", place="reading")
    if value < 0:
        raise Refused("reading", "must be at least 0 V", given=text)
    digits = _DECIMALS.match(text)
    assert digits is not None
    return value, si(f"1e-{len(digits[1])} {digits[2]}", "V", place="reading")
