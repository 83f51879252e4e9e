"""Residual-current devices: what must not trip them, what must, how fast, and at which waveforms.

Between what must not and what must trip a device lies a band that no standard describes further.
Its shape here is a judgement, until a ramp test on the device itself replaces it.
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass
from typing import Literal, get_args

import numpy as np
from numpy.typing import ArrayLike, NDArray

from ..errors import Mistake, Refused, nearest
from ..units import show
from .records import Source, Value

Kind = Literal["general", "delayed", "personnel", "equipment"]
Waveform = Literal["AC", "A", "F", "B"]
Real = NDArray[np.float64]

_TIMES = Source("IEC 61008-1", "seen", "maximum break and minimum non-actuating times")
_CURVE = Source("UL 943", "seen", "class A; to 264 mA")

NON_OPERATING_SHARE = Value(0.5, "", Source("IEC 61008-1", "from memory"))
LIKELY_TRIP_SHARE = Value(
    0.72, "", Source("shape of the trip band: triangular 0.5, 0.72, 1.0 of the rated current",
                     "judgement"), 0.5, 1.0)

# Residual current as a multiple of the rated one: longest time, by kind; shortest for "delayed".
BREAK_TIME: Mapping[Kind, Mapping[float, Value]] = {
    "general": {1.0: Value(0.3, "s", _TIMES), 2.0: Value(0.15, "s", _TIMES),
                5.0: Value(0.04, "s", _TIMES)},
    "delayed": {1.0: Value(0.5, "s", _TIMES), 2.0: Value(0.2, "s", _TIMES),
                5.0: Value(0.15, "s", _TIMES)},
}
NON_ACTUATING_TIME: Mapping[float, Value] = {
    1.0: Value(0.13, "s", _TIMES), 2.0: Value(0.06, "s", _TIMES), 5.0: Value(0.05, "s", _TIMES),
}

INVERSE_TIME_CURRENT = Value(20e-3, "A", _CURVE)
INVERSE_TIME_EXPONENT = Value(1.43, "", _CURVE)
INVERSE_TIME_FLOOR = Value(20e-3, "s", Source("UL 943", "seen", "not required below; near 300 mA"))

RING_WAVE = Value(200.0, "A", Source("IEC 61008-1", "from memory", "0.5 µs/100 kHz ring wave"))
RING_WAVE_10_MA = Value(25.0, "A", Source("IEC 61008-1", "from memory",
                                          "0.5 µs/100 kHz ring wave, to 10 mA rated current"))
SURGE_DELAYED = Value(3e3, "A", Source("IEC 61008-1", "seen", "8/20 µs surge, type S"))

# By rated current [A]: what must not, and what must trip a device that protects persons.
PERSONNEL: Mapping[float, tuple[float, float, Source]] = {
    6e-3: (4e-3, 6e-3, Source("UL 943", "seen", "class A")),
    20e-3: (15e-3, 20e-3, Source("UL 943C", "seen", "classes C, D and E")),
}
_PERSONNEL_SHAPE = Source("shape of the trip band: triangular, highest in its middle", "judgement")
_EQUIPMENT = Source("equipment protection: trip band taken as 0.5 to 1.0 of the rated current",
                    "judgement")
_RAMP = Source("ramp test of the device, as the case gives it", "seen")


@dataclass(frozen=True)
class Answer:
    """What a waveform type answers to.

    Parameters
    ----------
    words : in a memo's language
    limits : by frequency [Hz], what must not and what must trip it, in rated currents [1]
    source : of both
    """

    words: str
    limits: Mapping[float, tuple[float, float]]
    source: Source


_B = Source("IEC 62423", "from memory", "type B")
ANSWERS: Mapping[Waveform, Answer] = {
    "AC": Answer("sinusoidal residual current of the rated frequency only", {},
                 Source("IEC 61008-1", "from memory", "type AC")),
    "A": Answer("sinusoidal and pulsating direct residual current (from 0.35 to 1.4 of the rated "
                "current at full half waves), with 6 mA smooth direct current besides", {},
                Source("IEC 61008-1", "seen", "type A")),
    "F": Answer("as type A, and composite residual current of 10 Hz to 1 kHz, with 10 mA smooth "
                "direct current besides", {10.0: (0.5, 1.4), 1000.0: (0.5, 1.4)},
                Source("IEC 62423", "from memory", "type F, composite 10, 50 and 1000 Hz")),
    "B": Answer("as type F, sinusoidal residual current to 1 kHz and smooth direct current",
                {50.0: (0.5, 1.0), 150.0: (0.5, 2.4), 400.0: (0.5, 6.0), 1000.0: (1.0, 14.0)},
                _B),
}
POWER_FREQUENCIES = (45.0, 65.0)  # Hz: taken as the rated frequency of every device


@dataclass(frozen=True)
class TripBand:
    """Where one device of its kind trips, as a distribution.

    Triangular with its peak at `likely`, or flat where `likely` is None; one value where low and
    high are the same. In amperes.

    >>> band = TripBand(15e-3, 21.6e-3, 30e-3, Source("an example", "judgement"))
    >>> round(float(band.chance(21.6e-3)), 6)  # (21.6 − 15) / (30 − 15)
    0.44
    """

    low: float
    likely: float | None
    high: float
    source: Source

    def chance(self, current: ArrayLike) -> Real:
        """Chance that a steady residual current [A] trips it; the shape of `current`."""
        i = np.asarray(current, dtype=float)
        if self.low == self.high:
            return (i >= self.low).astype(float)
        x = np.clip(i, self.low, self.high)
        span = self.high - self.low
        if self.likely is None:
            return np.asarray((x - self.low) / span)
        rising = (x - self.low) ** 2 / (span * max(self.likely - self.low, 1e-300))
        falling = 1 - (self.high - x) ** 2 / (span * max(self.high - self.likely, 1e-300))
        return np.asarray(np.where(x < self.likely, rising, falling))


@dataclass(frozen=True)
class Device:
    """A residual-current device.

    Parameters
    ----------
    rated : residual operating current [A], above 0; 6 mA or 20 mA for kind "personnel"
    kind : "general", "delayed" (type S), "personnel" (4 to 6 mA, or 15 to 20 mA) or "equipment"
    waveform : type AC, A, F or B, for kinds "general" and "delayed"; None where not known
    ramp_test : current at which a ramp test tripped it [A]; replaces the judged band
    ramp_step : of that test [A]: it trips somewhere in the last step

    Raises `Refused`.

    >>> Device(30e-3).non_operating, Device(6e-3, "personnel").non_operating
    (0.015, 0.004)
    """

    rated: float
    kind: Kind = "general"
    waveform: Waveform | None = None
    ramp_test: float | None = None
    ramp_step: float = 0.0

    def __post_init__(self) -> None:
        if found := self._mistakes():
            raise Refused.all_of(found).at("device")

    @property
    def non_operating(self) -> float:
        """Current that must not trip it [A]."""
        if self.kind == "personnel":
            return PERSONNEL[self.rated][0]
        return NON_OPERATING_SHARE.likely * self.rated

    @property
    def band(self) -> TripBand:
        """Where it trips: as its ramp test says, or as its class may."""
        if self.ramp_test is not None:
            flat = None if self.ramp_step else self.ramp_test
            return TripBand(self.ramp_test - self.ramp_step, flat, self.ramp_test, _RAMP)
        low, high = self.non_operating, self.rated
        if self.kind == "personnel":
            return TripBand(low, (low + high) / 2, high, _PERSONNEL_SHAPE)
        source = _EQUIPMENT if self.kind == "equipment" else LIKELY_TRIP_SHARE.source
        return TripBand(low, LIKELY_TRIP_SHARE.likely * self.rated, high, source)

    @property
    def outside_its_standard(self) -> bool:
        """Whether the ramp test contradicts what a device of this rating must do."""
        return self.ramp_test is not None and not (
            self.non_operating < self.ramp_test <= self.rated)

    @property
    def sources(self) -> tuple[Source, ...]:
        """Of everything that is said about it."""
        own: tuple[Source, ...]
        if self.kind == "personnel":
            own = (PERSONNEL[self.rated][2], INVERSE_TIME_CURRENT.source)
        else:
            own = (NON_OPERATING_SHARE.source, *((_TIMES,) if self.kind in BREAK_TIME else ()))
        answer = (ANSWERS[self.waveform].source,) if self.waveform else ()
        return (*own, self.band.source, *answer)

    def longest_time(self, current: float) -> float:
        """Longest time to trip that its standard allows at a residual current [A]; [s].

        NaN where it states none: below the current that must trip it, and for "equipment".

        >>> Device(30e-3).longest_time(150e-3)
        0.04
        """
        if self.kind == "personnel":
            return personnel_time(current) if current >= self.rated else math.nan
        return _stepped({m: v.likely for m, v in BREAK_TIME.get(self.kind, {}).items()},
                        current / self.rated)

    def shortest_time(self, current: float) -> float:
        """Time for which a residual current [A] must not trip it; [s]; 0 but for "delayed"."""
        if self.kind != "delayed":
            return 0.0
        times = {m: v.likely for m, v in NON_ACTUATING_TIME.items()}
        return _stepped(times, max(current / self.rated, 1.0))

    def limits_at(self, frequency: float) -> tuple[float, float] | None:
        """What must not and what must trip it [A] at a frequency [Hz]; None where not covered.

        Between the frequencies that a standard gives, its limits are read on straight lines over
        log-log axes.
        """
        if POWER_FREQUENCIES[0] <= frequency <= POWER_FREQUENCIES[1]:
            return self.non_operating, self.rated
        table = ANSWERS[self.waveform].limits if self.waveform else {}
        if not table or not min(table) <= frequency <= max(table):
            return None
        at = np.log(list(table))
        low, high = (float(np.exp(np.interp(math.log(frequency), at, np.log(column))))
                     for column in zip(*table.values(), strict=True))
        return low * self.rated, high * self.rated

    def weight(self, frequency: float) -> float:
        """What a current of this frequency counts, against one of the rated frequency [1].

        From what must not trip it at either; 1 where the standard is silent, which is cautious
        for a nuisance trip and says nothing about protection.
        """
        limits = self.limits_at(frequency)
        return self.non_operating / limits[0] if limits else 1.0

    def _mistakes(self) -> list[Mistake]:
        found = [Mistake(word, "is not known", str(given), nearest(str(given), known))
                 for word, given, known in (("kind", self.kind, get_args(Kind)),
                                            ("waveform", self.waveform or "AC", ANSWERS))
                 if given not in known]
        if not (self.rated > 0 and math.isfinite(self.rated)):
            found.append(Mistake("rated", "must be above 0 A", show(self.rated, "A")))
        elif self.kind == "personnel" and self.rated not in PERSONNEL:
            found.append(Mistake("rated", "must be 6 mA or 20 mA for kind personnel",
                                 show(self.rated, "A")))
        if self.waveform and self.kind not in BREAK_TIME:
            found.append(Mistake("waveform", "goes with kinds general and delayed", self.waveform))
        if self.ramp_test is not None and not 0 <= self.ramp_step < self.ramp_test < math.inf:
            found.append(Mistake("ramp_test", "must be above 0 A and above its step",
                                 f"{show(self.ramp_test, 'A')}, {show(self.ramp_step, 'A')}"))
        return found


def personnel_time(current: float) -> float:
    """Longest time to trip of a device that protects persons, t = (20 mA/I)^1.43 [s].

    `current` is the residual one [A], above 0. Not below 20 ms. Source: UL 943.

    >>> round(personnel_time(10e-3), 3)
    2.694
    """
    if not 0 < current < math.inf:
        raise Refused("residual current", "must be above 0 A", given=f"{current:g} A")
    curve = (INVERSE_TIME_CURRENT.likely / current) ** INVERSE_TIME_EXPONENT.likely
    return float(max(curve, INVERSE_TIME_FLOOR.likely))


def ring_wave(device: Device) -> Value:
    """Peak current of the ring wave that must not trip the device [A]."""
    return RING_WAVE_10_MA if device.rated <= 10e-3 else RING_WAVE


def _stepped(times: Mapping[float, float], multiple: float) -> float:
    """The time of the highest multiple that is reached, with a hair's breadth for rounding."""
    return next((t for m, t in sorted(times.items(), reverse=True) if multiple >= m * (1 - 1e-9)),
                math.nan)
