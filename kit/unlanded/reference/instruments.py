"""Instruments as burdens: what each puts between two points, and what it then shows.

The classes of instrument met in the trade, with figures typical of the class; an instrument in
hand is described by `custom_instrument` from its own data sheet.
"""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from decimal import Decimal
from typing import Literal, get_args

from ..errors import Mistake, Refused, nearest
from ..physics.burden import Burden
from .limits import BODY_CAPACITANCE, BODY_FRONT_RESISTANCE, BODY_SHUNT_RESISTANCE
from .records import Source

Responds = Literal["rms", "average"]
Kind = Literal["digital", "analogue", "indicator", "proximity", "body"]

_CLASS = Source("typical of the class of instrument", "common practice")
_NUMBERS = ("digital", "analogue")
_LAMPS = ("indicator", "proximity")


@dataclass(frozen=True)
class Range:
    """One range of an instrument.

    Parameters
    ----------
    full_scale : RMS [V], above 0
    resolution : one count, or the part of a scale division that can be read [V], at least 0
    percent : of the reading [1], 0.01 for 1 %; of the threshold for an indicator
    counts : added to it, in units of `resolution` [1]
    burden : what the instrument puts between the two points on this range
    """

    full_scale: float
    resolution: float
    percent: float
    counts: int
    burden: Burden

    def __post_init__(self) -> None:
        mistakes = []
        if not (self.full_scale > 0 and math.isfinite(self.full_scale)):
            mistakes.append(Mistake("full scale", "must be above 0 V", f"{self.full_scale:g} V"))
        elif not 0 <= self.resolution <= self.full_scale:
            mistakes.append(Mistake("resolution", "must be 0 V to the full scale",
                                    f"{self.resolution:g} V"))
        if not 0 <= self.percent < 1:
            mistakes.append(Mistake("percent", "must be 0 to below 1", f"{self.percent:g}"))
        if not (self.counts >= 0 and math.isfinite(self.counts)):
            mistakes.append(Mistake("counts", "must be at least 0", f"{self.counts:g}"))
        if mistakes:
            raise Refused.all_of(mistakes)


@dataclass(frozen=True)
class Shown:
    """What the instrument shows.

    Parameters
    ----------
    text : as on its face: "79.3 V", "OL", "off scale", "lit", "not lit"; "–" without a display
    value : the number shown, RMS [V]; infinite over range, NaN where no number is shown
    half_width : of the accuracy statement there [V]: it allows value ± half_width. For an
        indicator it is that of the threshold. NaN where there is none.
    """

    text: str
    value: float
    half_width: float


@dataclass(frozen=True)
class Instrument:
    """An instrument, its ranges in rising order.

    Parameters
    ----------
    key : short, such as "digital-10M"
    name : as a memo prints it
    kind : "digital", "analogue", "indicator", "proximity" (no galvanic burden) or "body"
    ranges : at least one
    threshold : what lights an indicator or proximity detector, RMS [V]; None for others
    tolerance : of the burden, ± [1], 0.1 for 10 %; 0 to below 1
    source : of all of it
    note : what an engineer should bear in mind
    responds : to the RMS value, or to the rectified average and scaled for a sine
    """

    key: str
    name: str
    kind: Kind
    ranges: tuple[Range, ...]
    threshold: float | None
    tolerance: float
    source: Source
    note: str = ""
    responds: Responds = "rms"

    def __post_init__(self) -> None:
        object.__setattr__(self, "ranges", tuple(self.ranges))
        mistakes = self._mistakes()
        if mistakes:
            raise Refused.all_of(mistakes).at(f'instrument "{self.key}"')

    def range_for(self, voltage: float) -> Range:
        """The smallest range that holds a settled, loaded voltage, RMS [V]; else the largest.

        On an instrument whose burden depends on the range the voltage does too: the range is
        then found from the largest down, as long as the next holds what is shown.

        >>> INSTRUMENTS["moving-coil"].range_for(120.0).full_scale
        250.0
        """
        voltage = _magnitude(voltage)
        return next((r for r in self.ranges if voltage <= r.full_scale), self.ranges[-1])

    def burden_at(self, voltage: float) -> Burden:
        """What it puts between the two points when it shows `voltage`, RMS [V].

        >>> INSTRUMENTS["moving-coil"].burden_at(120.0).resistance  # 9 kΩ/V × 250 V
        2250000.0
        """
        return self.range_for(voltage).burden

    def accuracy_at(self, voltage: float) -> float:
        """Half width of the accuracy statement at `voltage` [V], a rectangular distribution's a.

        Percent of reading + counts; for an indicator, that of its threshold; NaN for a body.

        >>> round(INSTRUMENTS["digital-10M"].accuracy_at(79.3), 3)  # 1 % of 79.3 V + 3 × 0.1 V
        1.093
        """
        if self.kind == "body":
            return math.nan
        settled = self.range_for(voltage)
        of = voltage if self.threshold is None else self.threshold
        return settled.percent * of + settled.counts * settled.resolution

    def show(self, voltage: float) -> Shown:
        """What it shows with `voltage`, RMS [V], across it: a number as it rounds it, or a lamp.

        "not lit" says only that the voltage is below the threshold.

        >>> INSTRUMENTS["digital-10M"].show(79.3456).text
        '79.3 V'
        >>> INSTRUMENTS["coil-tester"].show(60.0).text
        'not lit'
        """
        voltage = _magnitude(voltage)
        if self.kind == "body":
            return Shown("–", math.nan, math.nan)
        if self.threshold is not None:
            lit = "lit" if voltage >= self.threshold else "not lit"
            return Shown(lit, math.nan, self.accuracy_at(voltage))
        settled = self.range_for(voltage)
        if voltage > settled.full_scale:
            return Shown("OL" if self.kind == "digital" else "off scale", math.inf, math.nan)
        value, text = _rounded(voltage, settled.resolution)
        return Shown(text, value, self.accuracy_at(voltage))

    def _mistakes(self) -> list[Mistake]:
        found = []
        if not self.key.strip() or not self.name.strip():
            found.append(Mistake("name", "key and name must not be empty"))
        if self.kind not in get_args(Kind):
            found.append(Mistake("kind", "is not known", str(self.kind),
                                 nearest(str(self.kind), get_args(Kind))))
        scales = [r.full_scale for r in self.ranges]
        if not scales:
            found.append(Mistake("ranges", "there must be at least one"))
        if scales != sorted(set(scales)):
            found.append(Mistake("ranges", "full scales must rise", ", ".join(map(str, scales))))
        if not 0 <= self.tolerance < 1:
            found.append(Mistake("tolerance", "must be 0 to below 1", f"{self.tolerance:g}"))
        return found + self._kind_mistakes()

    def _kind_mistakes(self) -> list[Mistake]:
        found = []
        if self.kind in _LAMPS:
            if self.threshold is None:
                found.append(Mistake("threshold", f"is needed by kind {self.kind}"))
            elif not (self.threshold > 0 and math.isfinite(self.threshold)):
                found.append(Mistake("threshold", "must be above 0 V", f"{self.threshold:g} V"))
        elif self.threshold is not None:
            found.append(Mistake("threshold", f"does not apply to kind {self.kind}",
                                 f"{self.threshold:g} V"))
        if self.kind in _NUMBERS and any(r.resolution == 0 for r in self.ranges):
            found.append(Mistake("resolution", f"must be above 0 V for kind {self.kind}", "0 V"))
        if self.kind == "proximity" and any(r.burden != Burden() for r in self.ranges):
            found.append(Mistake("burden", "a proximity detector has none",
                                 hint="leave out resistance, capacitance and inductance"))
        return found


def custom_instrument(
    key: str,
    name: str,
    kind: Kind = "digital",
    *,
    resistance: float = math.inf,
    capacitance: float = 0.0,
    inductance: float = 0.0,
    percent: float = 0.0,
    counts: int = 0,
    resolution: float = 0.1,
    full_scale: float = 1000.0,
    threshold: float | None = None,
    tolerance: float = 0.0,
    responds: Responds = "rms",
) -> Instrument:
    """An instrument of one range from its own data sheet; every quantity in SI.

    Parameters
    ----------
    key, name, kind : as in `Instrument`
    resistance : of the input [ohm], above 0
    capacitance : beside it, with the leads [F], at least 0
    inductance : in series with the resistance [H], at least 0
    percent, counts, resolution, full_scale : as in `Range`
    threshold, tolerance, responds : as in `Instrument`

    Raises `Refused` naming the instrument, with everything that is wrong.

    >>> custom_instrument("mine", "my meter", resistance=400e3, resolution=1.0).show(12.6).text
    '13 V'
    """
    try:
        burden = Burden(resistance, inductance, capacitance)
        ranges = (Range(full_scale, resolution, percent, counts, burden),)
    except Refused as refusal:
        raise refusal.at(f'instrument "{key}"') from None
    return Instrument(key, name, kind, ranges, threshold, tolerance,
                      Source("described in the case", "seen"), responds=responds)


def moving_coil(
    key: str,
    name: str,
    *,
    ohm_per_volt: float,
    full_scales: Sequence[float],
    accuracy: float = 0.04,
    tolerance: float = 0.05,
) -> Instrument:
    """A moving-coil meter: on each range its resistance is ohm per volt × full scale.

    Parameters
    ----------
    key, name : as in `Instrument`
    ohm_per_volt : sensitivity on AC [ohm/V], above 0
    full_scales : rising [V]
    accuracy : ± of full scale [1], read to a hundredth of the scale
    tolerance : of the resistance, ± [1]

    Raises `Refused`.

    >>> old = moving_coil("old", "old meter", ohm_per_volt=1000.0, full_scales=[50.0, 250.0])
    >>> old.ranges[1].burden.resistance
    250000.0
    """
    try:
        _require_above_zero("ohm per volt", ohm_per_volt, "Ω/V")
        for v in full_scales:
            _require_above_zero("full scale", v, "V")
        ranges = [Range(v, v / 100, 0.0, round(100 * accuracy), Burden(ohm_per_volt * v))
                  for v in full_scales]
    except Refused as refusal:
        raise refusal.at(f'instrument "{key}"') from None
    return Instrument(
        key, name, "analogue", tuple(ranges), None, tolerance, _CLASS,
        "its resistance rises with the range: turn to a higher one and the reading changes",
        "average",
    )


def _require_above_zero(place: str, value: float, unit: str) -> None:
    if not (value > 0 and math.isfinite(value)):
        raise Refused(place, f"must be above 0 {unit}", given=f"{value:g} {unit}")


def _magnitude(voltage: float) -> float:
    if not (voltage >= 0 and math.isfinite(voltage)):
        raise Refused("voltage", "must be an RMS value of at least 0 V", given=f"{voltage:g} V")
    return voltage


def _rounded(voltage: float, resolution: float) -> tuple[float, str]:
    # As many decimals as one count has: 82.5 V where a scale is read to 2.5 V.
    exponent = Decimal(f"{resolution:.9g}").normalize().as_tuple().exponent
    decimals = max(0, -int(exponent))
    value = round(round(voltage / resolution) * resolution, decimals)
    return value, f"{value:.{decimals}f} V"


def _counting(
    full_scales: Sequence[float], counts_of_scale: int, percent: float, counts: int, burden: Burden
) -> tuple[Range, ...]:
    """Ranges whose count is the decade under full scale / `counts_of_scale`, or just that."""
    return tuple(
        Range(v, 10.0 ** math.ceil(math.log10(v / counts_of_scale) - 1e-9), percent, counts, burden)
        for v in full_scales
    )


_HANDHELD = _counting((6.0, 60.0, 600.0, 1000.0), 6000, 0.01, 3, Burden(10e6, capacitance=100e-12))
_BENCH = _counting((0.2, 2.0, 20.0, 200.0, 750.0), 200_000, 0.002, 100,
                   Burden(1e6, capacitance=100e-12))
_LOW = _counting((600.0, 1000.0), 6000, 0.02, 3, Burden(3e3))
_SCOPE = (Range(1.0, 4e-3, 0.03, 1, Burden(10e6, capacitance=12e-12)),
          Range(10.0, 4e-2, 0.03, 1, Burden(10e6, capacitance=12e-12)),
          Range(300.0, 1.0, 0.03, 1, Burden(10e6, capacitance=12e-12)))
_COIL = (Range(600.0, 0.0, 0.15, 0, Burden(6e3, inductance=16.0)),)
_TWO_POLE = (Range(1000.0, 0.0, 0.15, 0, Burden(200e3)),)
_TWO_POLE_LOADED = (Range(1000.0, 0.0, 0.15, 0, Burden(7e3)),)
_NO_TOUCH = (Range(1000.0, 0.0, 0.8, 0, Burden()),)
_BODY = (
    Range(1000.0, 0.0, 0.0, 0,
          Burden(BODY_SHUNT_RESISTANCE.likely, capacitance=BODY_CAPACITANCE.likely,
                 front_resistance=BODY_FRONT_RESISTANCE.likely)),
)

INSTRUMENTS: Mapping[str, Instrument] = {
    i.key: i
    for i in (
        Instrument("digital-10M", "digital meter, 10 MΩ", "digital", _HANDHELD, None, 0.1, _CLASS,
                   "some models have 5, 9.1 or 11 MΩ; 100 pF includes the leads"),
        Instrument("bench-1M", "bench meter, 1 MΩ", "digital", _BENCH, None, 0.02, _CLASS,
                   "100 pF beside 1 MΩ, without a long lead"),
        Instrument("low-impedance", "low-impedance meter, 3 kΩ", "digital", _LOW, None, 0.2, _CLASS,
                   "cold value: on a live circuit the input heats and its resistance rises; a "
                   "weak real source falls with a phantom"),
        moving_coil("moving-coil", "moving-coil meter, 9 kΩ/V", ohm_per_volt=9e3,
                    full_scales=(10.0, 50.0, 250.0, 1000.0)),
        moving_coil("moving-coil-1k", "moving-coil meter, 1 kΩ/V", ohm_per_volt=1e3,
                    full_scales=(10.0, 50.0, 250.0, 1000.0)),
        Instrument("coil-tester", "coil tester", "indicator", _COIL, 90.0, 0.3, _CLASS,
                   "shows nothing below some 80 to 100 V: a real 60 V may pass unseen; rated for "
                   "seconds of use"),
        Instrument("two-pole", "two-pole tester, 200 kΩ", "indicator", _TWO_POLE, 50.0, 0.2, _CLASS,
                   "above the 100 kΩ that IEC 61243-3 draws the line at: may show interference "
                   "voltage; its lamp for extra-low voltage stands here"),
        Instrument("two-pole-loaded", "two-pole tester, load buttons pressed", "indicator",
                   _TWO_POLE_LOADED, 50.0, 0.2, _CLASS,
                   "7 kΩ: made to trip a 30 mA device when used from line to earth"),
        Instrument("proximity", "non-contact detector", "proximity", _NO_TOUCH, 50.0, 0.0, _CLASS,
                   "senses field, not energy: thresholds from 12 to 90 V are met, and neither "
                   "lamp nor silence proves anything"),
        Instrument("probe-10-1", "oscilloscope with 10:1 probe", "digital", _SCOPE, None, 0.02,
                   _CLASS, "10 MΩ beside 10 to 15 pF; scales are RMS of a sine"),
        Instrument("body", "body model of IEC 60990", "body", _BODY, None, 0.0,
                   BODY_FRONT_RESISTANCE.source,
                   "500 Ω before 1500 Ω beside 0.22 µF: a measuring network, not a person"),
    )
}


def instrument(key: str) -> Instrument:
    """The instrument of that key; unknown ones are refused with the nearest known.

    >>> instrument("body").kind
    'body'
    """
    if key not in INSTRUMENTS:
        raise Refused("instrument", "is not known", given=key, hint=nearest(str(key), INSTRUMENTS))
    return INSTRUMENTS[key]
