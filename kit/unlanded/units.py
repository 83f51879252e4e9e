"""Units meet the user at the door: text in, base-SI floats inside, text out.

pint parses and converts. It is imported on first use, because it costs as much as numpy.
"""

from __future__ import annotations

import math
import re
from functools import cache
from typing import TYPE_CHECKING

from .errors import Refused

if TYPE_CHECKING:
    from pint import UnitRegistry

FOOT = 0.3048  # metres, exact by definition

_NUMBER = re.compile(r"([-+−]?(?:\d+(?:\.\d*)?|\.\d+)(?:[eE][-+−]?\d+)?)\s*(.*)", re.DOTALL)
_GROUPED = re.compile(r"[-+−]?\d{1,3}(?:,\d{3})+(?![\d,])")
# A unit is letters, signs and small powers; anything else never reaches pint's parser.
_UNIT = re.compile(r"[A-Za-zµμΩΩ°%²³·⋅*/^ \-()0-9]{1,40}")
_ALIASES = (
    "@alias ohm = Ohm = OHM = ohms = Ohms",
    "@alias hertz = hz = HZ",
    "@alias volt = Vac = Vrms = VAC",
    "@alias foot = Ft = FT",
    "megohm = 1e6 ohm = Mohm = megohms = MOhm",
)
# pint counts radians and the like as pure numbers: 50 rad/s must not pass for 50 Hz.
_COUNTED = ("radian", "count", "bit", "percent")
_PREFIXES = {-15: "f", -12: "p", -9: "n", -6: "µ", -3: "m", 0: "", 3: "k", 6: "M", 9: "G", 12: "T"}
_UNPREFIXED = ("%", "°", "°C", "", "mm²", "ft", "in", "mil")


def si(text: str, unit: str, *, place: str = "value") -> float:
    """The number of `unit`s that `text` means; `text` must carry its own unit.

    `unit` is a unit such as "m", "F/m" or "ohm"; "1" asks for a pure number, which may be
    written plainly or in per cent. Raises `Refused` naming `place`.

    >>> si("150 ft", "m")
    45.72
    >>> si("100 pF/m", "F/m")
    1e-10
    >>> si("30 %", "1")
    0.3
    """
    number, unit_text = _split(text, place, unit)
    if unit == "1":
        if unit_text not in ("", "%"):
            raise Refused(place, "must be a pure number or a percentage", given=text)
        return number / 100 if unit_text == "%" else number
    if not unit_text:
        raise Refused(place, "needs a unit", given=text, hint=f'write for example "{text} {unit}"')
    return _convert(number, unit_text, unit, text, place)


def _split(text: str, place: str, unit: str) -> tuple[float, str]:
    if not isinstance(text, str):
        raise Refused(
            place,
            "must be text, a number with its unit",
            given=repr(text),
            hint=f'write "{text} {unit}" in quotes' if unit != "1" else "",
        )
    stripped = text.strip()
    if _GROUPED.match(stripped):
        stripped = stripped.replace(",", "")
    match = _NUMBER.fullmatch(stripped)
    if match is None:
        raise Refused(place, "must begin with a number, then its unit", given=text)
    if "," in stripped:
        raise Refused(
            place,
            "has a comma that could be read two ways",
            given=text,
            hint="use a point for decimals (1.5); commas only group thousands (1,500)",
        )
    number = float(match[1].replace("−", "-"))
    if not math.isfinite(number):
        raise Refused(place, "must be a finite number", given=text)
    return number, match[2].strip()


def _convert(number: float, unit_text: str, unit: str, text: str, place: str) -> float:
    registry = _registry()
    wanted = registry.Unit(unit)
    mistake = Refused(place, f"must be in {unit} or a unit that converts to it", given=text)
    if _UNIT.fullmatch(unit_text) is None:
        raise mistake
    try:
        given = registry.parse_units(unit_text)
    except Exception:  # pint raises its own, and tokenizer and attribute errors, for odd text
        raise mistake from None
    root = str(registry.get_root_units(given)[1])
    if given.dimensionality != wanted.dimensionality or any(word in root for word in _COUNTED):
        raise mistake
    try:
        value = float(registry.Quantity(number, given).to(wanted).magnitude)
    except Exception:  # an overflowing conversion is as much a mistake as a wrong unit
        raise mistake from None
    if not math.isfinite(value):
        raise Refused(place, "must be a finite number", given=text)
    # pint multiplies binary prefix factors: 45.72000000000001 is 45.72, and 15 digits say so.
    return float(f"{value:.15g}")


@cache
def _registry() -> UnitRegistry[float]:
    import pint

    registry: UnitRegistry[float] = pint.UnitRegistry()
    for alias in _ALIASES:
        registry.define(alias)
    registry.preprocessors.append(
        lambda s: re.sub(r"\b(mm|cm|m|in|ft)([23])\b", r"\1**\2", s.replace("μ", "µ"))
    )
    return registry


def show(value: float, unit: str = "", digits: int = 3) -> str:
    """`value` in base SI as a reader wants it: engineering prefix, `digits` significant digits.

    >>> show(7.23e-5, "A"), show(10e6, "Ω"), show(0.0, "V"), show(float("inf"), "Ω")
    ('72.3 µA', '10 MΩ', '0 V', '∞ Ω')
    """
    if math.isnan(value):
        return f"– {unit}".strip()
    if math.isinf(value):
        return f"{'−' if value < 0 else ''}∞ {unit}".strip()
    if value == 0:
        return f"0 {unit}".strip()
    rounded = float(f"{value:.{digits - 1}e}")
    power = 0 if unit in _UNPREFIXED else 3 * math.floor(math.log10(abs(rounded)) / 3 + 1e-12)
    power = min(12, max(-15, power))
    scaled = rounded / 10.0**power
    decimals = max(0, digits - 1 - math.floor(math.log10(abs(scaled)) + 1e-12))
    number = f"{scaled:.{decimals}f}"
    if "." in number:
        number = number.rstrip("0").rstrip(".")
    return f"{number.replace('-', '−')} {_PREFIXES[power]}{unit}".strip()


def show_length(metres: float, *, customary: bool = False, digits: int = 3) -> str:
    """A length in the reader's own system: metres with a prefix, or feet.

    >>> show_length(45.72), show_length(45.72, customary=True)
    ('45.7 m', '150 ft')
    """
    return show(metres / FOOT, "ft", digits) if customary else show(metres, "m", digits)
