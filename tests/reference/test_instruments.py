"""Instruments: their burdens against printed figures, and what they show, digit by digit."""

from __future__ import annotations

import math

import pytest

from unlanded.errors import Refused
from unlanded.physics.burden import Burden
from unlanded.reference.instruments import (
    INSTRUMENTS,
    Instrument,
    Range,
    custom_instrument,
    instrument,
    moving_coil,
)

KEYS = {"digital-10M", "bench-1M", "low-impedance", "moving-coil", "coil-tester", "two-pole",
        "proximity", "probe-10-1", "body"}  # fmt: skip


def impedance(key: str, frequency: float) -> float:
    return float(abs(1 / INSTRUMENTS[key].ranges[0].burden.admittance(frequency)))


@pytest.mark.parametrize(
    ("frequency", "printed", "half_digit"),
    # A maker's table for a bench meter on AC volts (common practice).
    [(100, 1e6, 5e3), (1e3, 850e3, 5e3), (10e3, 160e3, 5e3), (100e3, 16e3, 0.5e3)],
)
def test_bench_meter_as_printed(frequency, printed, half_digit):
    found = impedance("bench-1M", frequency)
    assert found == pytest.approx(printed, rel=half_digit / printed, abs=0)


def test_coil_tester_draws_what_the_trade_says():
    # From memory: 10 to 20 mA at 120 V 60 Hz, 30 to 60 mA at 480 V.
    assert 10e-3 < 120 / impedance("coil-tester", 60) < 20e-3
    assert 30e-3 < 480 / impedance("coil-tester", 60) < 60e-3
    assert 5e3 < impedance("coil-tester", 50) < 15e3


def test_two_pole_testers_lie_each_side_of_the_boundary():
    # IEC 61243-3:2014 (seen): 100 kΩ divides the types. With the load buttons pressed the
    # tester trips a 30 mA device at 230 V (from memory).
    assert impedance("two-pole", 50) > 100e3 > impedance("two-pole-loaded", 50)
    assert 230 / impedance("two-pole-loaded", 50) > 30e-3
    assert 230 / impedance("two-pole", 50) < 3.5e-3


def test_body_model_between_its_limits():
    # IEC 60990 (seen): 500 Ω before 1500 Ω beside 0.22 µF, so 2000 Ω at DC and 500 Ω at the top.
    assert impedance("body", 1e-3) == pytest.approx(2000, rel=1e-6, abs=0)
    assert impedance("body", 1e9) == pytest.approx(500, rel=1e-6, abs=0)
    # Its corner frequency, 1 / (2 π 1500 Ω 0.22 µF): 500 + 750 − j750 Ω.
    corner = 1 / (2 * math.pi * 1500 * 0.22e-6)
    assert impedance("body", corner) == pytest.approx(math.hypot(1250, 750), rel=1e-12, abs=0)


def test_moving_coil_resistance_follows_the_range():
    meter = INSTRUMENTS["moving-coil"]
    for r in meter.ranges:
        assert r.burden.resistance == pytest.approx(9e3 * r.full_scale, rel=1e-12, abs=0)
    # Service manuals (common practice): 1000 Ω/V on 250 V is 250 kΩ.
    assert INSTRUMENTS["moving-coil-1k"].burden_at(200.0).resistance == 250e3


def test_proximity_detector_has_no_burden():
    assert complex(INSTRUMENTS["proximity"].ranges[0].burden.admittance(50.0)) == 0


def test_catalogue_is_keyed_and_sourced():
    assert set(INSTRUMENTS) >= KEYS
    for key, found in INSTRUMENTS.items():
        assert found.key == key
        assert instrument(key) is found
        assert found.source.title
        assert found.note
    with pytest.raises(Refused, match=r'instrument: is not known; given digital-10.*"digital-10M"'):
        instrument("digital-10")


@pytest.mark.parametrize(
    ("key", "voltage", "text"),
    [
        ("digital-10M", 0.0, "0.000 V"),
        ("digital-10M", 0.1234, "0.123 V"),
        ("digital-10M", 6.0, "6.000 V"),
        ("digital-10M", 6.001, "6.00 V"),
        ("digital-10M", 79.3456, "79.3 V"),
        ("digital-10M", 600.0, "600.0 V"),
        ("digital-10M", 600.4, "600 V"),
        ("digital-10M", 1000.0, "1000 V"),
        ("digital-10M", 1000.5, "OL"),
        ("bench-1M", 37.7777, "37.778 V"),
        ("low-impedance", 0.124, "0.1 V"),
        ("low-impedance", 0.04, "0.0 V"),
        ("moving-coil", 82.3, "82.5 V"),
        ("moving-coil", 7.04, "7.0 V"),
        ("moving-coil", 231.0, "230.0 V"),
        ("moving-coil", 1001.0, "off scale"),
        ("probe-10-1", 230.4, "230 V"),
        ("coil-tester", 89.999, "not lit"),
        ("coil-tester", 90.0, "lit"),
        ("two-pole", 49.0, "not lit"),
        ("proximity", 120.0, "lit"),
        ("body", 10.0, "–"),
    ],
)
def test_what_is_shown(key, voltage, text):
    assert INSTRUMENTS[key].show(voltage).text == text


def test_shown_number_and_half_width():
    # ±(1.0 % of reading + 3 counts) on the 600.0 V range: 2.3 V at 200 V.
    shown = INSTRUMENTS["digital-10M"].show(200.04)
    assert shown.value == 200.0
    assert shown.half_width == pytest.approx(0.01 * 200.04 + 0.3, rel=1e-12, abs=0)
    # ±4 % of full scale wherever the pointer stands.
    coil = INSTRUMENTS["moving-coil"]
    assert coil.accuracy_at(60.0) == pytest.approx(0.04 * 250, rel=1e-12, abs=0)
    assert coil.accuracy_at(240.0) == pytest.approx(0.04 * 250, rel=1e-12, abs=0)
    # A threshold's own uncertainty, whatever the voltage.
    lamp = INSTRUMENTS["coil-tester"].show(10.0)
    assert math.isnan(lamp.value)
    assert lamp.half_width == pytest.approx(0.15 * 90, rel=1e-12, abs=0)
    over = INSTRUMENTS["digital-10M"].show(2000.0)
    assert over.value == math.inf
    assert math.isnan(over.half_width)
    assert math.isnan(INSTRUMENTS["body"].show(5.0).half_width)


@pytest.mark.parametrize("key", INSTRUMENTS)
def test_rounding_never_moves_a_reading_more_than_half_a_count(key):
    found = INSTRUMENTS[key]
    for k in range(200):
        voltage = 0.013 * 1.055**k
        if found.kind in ("digital", "analogue") and voltage <= found.ranges[-1].full_scale:
            count = found.range_for(voltage).resolution
            shown = found.show(voltage)
            assert abs(shown.value - voltage) <= 0.5 * count * (1 + 1e-9)
            assert float(shown.text.removesuffix(" V")) == shown.value
        else:
            assert found.show(voltage).text in ("OL", "off scale", "lit", "not lit", "–")


@pytest.mark.parametrize(
    ("voltage", "full_scale"),
    [(0.0, 10.0), (10.0, 10.0), (10.001, 50.0), (250.0, 250.0), (251.0, 1000.0), (5e3, 1000.0)],
)
def test_range_is_the_smallest_that_holds(voltage, full_scale):
    found = INSTRUMENTS["moving-coil"]
    assert found.range_for(voltage).full_scale == full_scale
    assert found.burden_at(voltage) == found.range_for(voltage).burden


def test_voltages_that_are_no_rms_value_are_refused():
    assert INSTRUMENTS["digital-10M"].show(0.0).value == 0
    for past in (-1e-9, math.nan, math.inf):
        with pytest.raises(Refused, match="voltage: must be an RMS value of at least 0 V"):
            INSTRUMENTS["digital-10M"].show(past)


def test_custom_instrument_carries_what_it_was_given():
    found = custom_instrument("mine", "my tester", "indicator", resistance=5e3, inductance=10.0,
                              capacitance=1e-9, percent=0.1, full_scale=690.0, threshold=24.0,
                              tolerance=0.2)
    assert found.ranges == (Range(690.0, 0.1, 0.1, 0, Burden(5e3, 10.0, 1e-9)),)
    assert (found.threshold, found.tolerance) == (24.0, 0.2)
    assert found.show(24.0).text == "lit"
    assert found.accuracy_at(24.0) == pytest.approx(2.4, rel=1e-12, abs=0)


EDGE = {"resistance": 1e6, "full_scale": 600.0, "resolution": 0.1, "percent": 0.0, "counts": 0,
        "tolerance": 0.0}  # fmt: skip


@pytest.mark.parametrize(
    ("past", "message"),
    [
        ({"full_scale": 0.0}, "full scale: must be above 0 V; given 0 V"),
        ({"full_scale": math.inf}, "full scale: must be above 0 V"),
        ({"resolution": -0.1}, "resolution: must be 0 V to the full scale; given -0.1 V"),
        ({"resolution": 600.1}, "resolution: must be 0 V to the full scale"),
        ({"resolution": 0.0}, "resolution: must be above 0 V for kind digital"),
        ({"percent": -1e-9}, "percent: must be 0 to below 1"),
        ({"percent": 1.0}, "percent: must be 0 to below 1; given 1"),
        ({"counts": -1}, "counts: must be at least 0; given -1"),
        ({"tolerance": 1.0}, "tolerance: must be 0 to below 1"),
        ({"tolerance": math.nan}, "tolerance: must be 0 to below 1"),
        ({"resistance": -1.0}, "burden: resistance must be at least 0"),
        ({"kind": "digitl"}, 'kind: is not known; given digitl.*"digital"'),
        ({"kind": "indicator"}, "threshold: is needed by kind indicator"),
        ({"kind": "indicator", "threshold": 0.0}, "threshold: must be above 0 V"),
        ({"threshold": 50.0}, "threshold: does not apply to kind digital"),
        ({"kind": "proximity", "threshold": 50.0}, "burden: a proximity detector has none"),
    ],
)
def test_custom_instrument_refuses_just_past_the_edge(past, message):
    assert custom_instrument("mine", "my meter", **EDGE).show(600.0).text == "600.0 V"
    with pytest.raises(Refused, match=f'instrument "mine", {message}'):
        custom_instrument("mine", "my meter", **EDGE | past)


def test_all_mistakes_of_an_instrument_are_told_at_once():
    with pytest.raises(Refused) as refusal:
        custom_instrument("mine", " ", "digital", threshold=5.0, tolerance=2.0)
    assert [m.place for m in refusal.value.mistakes] == [
        'instrument "mine", name', 'instrument "mine", tolerance', 'instrument "mine", threshold',
    ]


def test_ranges_must_rise():
    low, high = (Range(v, 0.1, 0.01, 3, Burden(1e6)) for v in (6.0, 60.0))
    known = INSTRUMENTS["digital-10M"]

    def built(*ranges: Range) -> Instrument:
        return Instrument("k", "n", "digital", ranges, None, 0.0, known.source)

    assert built(low, high).range_for(7.0) is high
    for wrong in ((high, low), (low, low)):
        with pytest.raises(Refused, match="ranges: full scales must rise"):
            built(*wrong)
    with pytest.raises(Refused, match="ranges: there must be at least one"):
        built()


def test_moving_coil_refuses_what_cannot_be():
    meter = moving_coil("m", "meter", ohm_per_volt=1e-9, full_scales=[50.0])
    assert meter.ranges[0].full_scale == 50.0
    with pytest.raises(Refused, match='instrument "m", ohm per volt: must be above 0 Ω/V'):
        moving_coil("m", "meter", ohm_per_volt=0.0, full_scales=[50.0])
    with pytest.raises(Refused, match='instrument "m", full scale: must be above 0 V'):
        moving_coil("m", "meter", ohm_per_volt=1e3, full_scales=[-50.0])
