"""Text to SI and back, by tables of literal strings."""

from __future__ import annotations

import math

import pytest

from unlanded.errors import Refused
from unlanded.units import show, show_length, si

ACCEPTED = [
    ("85 m", "m", 85.0), ("150 ft", "m", 45.72), ("280 ft", "m", 85.344), ("1,500 m", "m", 1500.0),
    ("2.5 mm²", "m**2", 2.5e-6), ("2.5 mm2", "m**2", 2.5e-6), ("0.030 in", "m", 7.62e-4),
    ("10 Mohm", "ohm", 1e7), ("3.3 MΩ", "ohm", 3.3e6), ("3 kΩ", "ohm", 3e3),
    ("1 megohm", "ohm", 1e6),
    ("100 pF", "F", 1e-10), ("100 pF/m", "F/m", 1e-10), ("0.26 uF/km", "F/m", 2.6e-10),
    ("0.26 µF/km", "F/m", 2.6e-10), ("50 Hz", "Hz", 50.0), ("2.5 kHz", "Hz", 2500.0),
    ("230 V", "V", 230.0), ("120 Vac", "V", 120.0), ("30 mA", "A", 0.03),
    ("12.1 ohm/km", "ohm/m", 0.0121),
    ("2.5 VA", "W", 2.5), ("30 %", "1", 0.3), ("4.8", "1", 4.8), ("1e3 m", "m", 1000.0),
    ("−3 V", "V", -3.0), ("14 µs", "s", 14e-6),
]
REFUSED = [
    ("85", "m", "needs a unit"), ("m", "m", "must begin with a number"), ("", "m", "must begin"),
    ("85 kg", "m", "must be in m"), ("50 rad/s", "Hz", "must be in Hz"),
    ("3000 rpm", "Hz", "must be in Hz"), ("1,5 m", "m", "comma"), ("1e999 m", "m", "finite"),
    ("nan m", "m", "must begin with a number"), ("85 m; import os", "m", "must be in m"),
    ("3 m**999999999", "m", "must be in m"), ("5 Pa", "1", "pure number"), ("30 ° ", "1", "pure"),
    ("85 furlongs_per_fortnight", "m", "must be in m"),
]


@pytest.mark.parametrize(("text", "unit", "value"), ACCEPTED)
def test_accepted(text: str, unit: str, value: float) -> None:
    assert si(text, unit) == pytest.approx(value, rel=1e-14, abs=0)


@pytest.mark.parametrize(("text", "unit", "rule"), REFUSED)
def test_refused_in_one_sentence(text: str, unit: str, rule: str) -> None:
    with pytest.raises(Refused, match=rule) as caught:
        si(text, unit, place="run length")
    sentence = str(caught.value)
    assert sentence.startswith("run length")
    assert "\n" not in sentence


def test_what_is_not_text_is_refused() -> None:
    with pytest.raises(Refused, match="must be text"):
        si(85, "m")  # type: ignore[arg-type]


@pytest.mark.parametrize(("value", "unit", "digits", "text"), [
    (7.23e-5, "A", 3, "72.3 µA"), (10e6, "Ω", 3, "10 MΩ"), (0.0, "V", 3, "0 V"),
    (math.inf, "Ω", 3, "∞ Ω"), (-math.inf, "Ω", 3, "−∞ Ω"), (math.nan, "V", 3, "– V"),
    (999.6, "V", 3, "1 kV"), (0.9996, "V", 3, "1 V"), (-3.25, "V", 3, "−3.25 V"),
    (1e-18, "F", 3, "0.001 fF"), (0.3, "%", 3, "0.3 %"), (1234.5, "", 3, "1230"),
    (9.95e-3, "A", 2, "10 mA"), (76.666e-3, "A", 3, "76.7 mA"),
])
def test_show(value: float, unit: str, digits: int, text: str) -> None:
    assert show(value, unit, digits) == text


def test_show_length_in_the_readers_own_system() -> None:
    assert show_length(85.344, customary=True) == "280 ft"
    assert show_length(85.344) == "85.3 m"
