"""The divider against printed currents, a complex network solved anew, and its limits."""

from __future__ import annotations

import math

import numpy as np
import pytest
from numpy.testing import assert_allclose

from unlanded.errors import Refused
from unlanded.physics.divider import Thevenin, divider, loading_error, reading


def test_current_of_ten_metres_of_house_wiring():
    # Trade press (common practice): 10 m is about 1 nF and 73 µA at 230 V, 50 Hz. It prints two
    # digits of a figure that is 72.3 µA for exactly 1 nF.
    source = divider(voltage=230.0, coupling=1e-9, to_earth=0.0)
    assert source.current(frequency=50.0) == pytest.approx(73e-6, rel=0.015, abs=0)


def solved(vs: float, cm: float, cg: float, f: float, r: float, cin: float) -> float:
    """Nodal voltage of the same circuit, with the source as a node of its own."""
    w = 2j * math.pi * f
    y = np.array([[w * cm + 1e12, -w * cm], [-w * cm, w * (cm + cg + cin) + 1 / r]])
    return float(abs(np.linalg.solve(y, np.array([vs * 1e12, 0.0]))[1]))


@pytest.mark.parametrize("resistance", [3e3, 100e3, 1e6, 10e6])
@pytest.mark.parametrize("length", [1.0, 15.24, 200.0])
def test_reading_by_nodal_solution(resistance, length):
    cm, cg = 12.5e-12 * length, 63.6e-12 * length
    shown = reading(divider(voltage=230.0, coupling=cm, to_earth=cg),
                    frequency=50.0, resistance=resistance, capacitance=100e-12)
    expected = solved(230.0, cm, cg, 50.0, resistance, 100e-12)
    assert shown == pytest.approx(expected, rel=1e-9, abs=0)


@pytest.mark.parametrize(
    ("length", "resistance", "volts"),
    [(1.0, 10e6, 20.9), (15.24, 1e6, 33.5), (15.24, 3e3, 0.124), (200.0, 100e3, 40.2)],
)
def test_reading_of_a_cord(length, resistance, volts):
    # Second opinion, worked apart: 120 V 60 Hz, 60 pF/m to each side; meters have 100 pF beside.
    source = divider(voltage=120.0, coupling=60e-12 * length, to_earth=60e-12 * length)
    shown = reading(source, frequency=60.0, resistance=resistance,
                    capacitance=100e-12 if resistance >= 1e6 else 0.0)
    assert shown == pytest.approx(volts, rel=0.005, abs=0)


def test_limits():
    source = divider(voltage=100.0, coupling=3e-9, to_earth=1e-9)
    assert source.voltage == pytest.approx(75.0, rel=1e-15, abs=0)
    unloaded = reading(source, frequency=50.0, resistance=math.inf)
    assert unloaded == pytest.approx(75.0, rel=1e-15, abs=0)
    halved = reading(source, frequency=50.0, resistance=math.inf, capacitance=4e-9)
    assert halved == pytest.approx(37.5, rel=1e-15, abs=0)
    # A resistance equal to the source's reactance: 1/√2.
    matched = source.impedance(frequency=50.0)
    error = loading_error(source, frequency=50.0, resistance=matched)
    assert error == pytest.approx(0.5**0.5 - 1, rel=1e-12, abs=0)
    # Into a heavy load the whole short-circuit current flows.
    heavy = reading(source, frequency=50.0, resistance=1.0)
    assert heavy == pytest.approx(source.current(frequency=50.0), rel=1e-9, abs=0)


def test_loading_error_does_not_need_a_voltage():
    source = Thevenin(np.asarray(0.0), np.asarray(1e-9))
    assert loading_error(source, frequency=50.0, resistance=1e6) == pytest.approx(
        -0.700283, rel=1e-6, abs=0
    )  # R / √(R² + X²) − 1 with X = 3.18310 MΩ


def test_an_impedance_sweep_falls_with_the_resistance():
    shown = reading(divider(voltage=230.0, coupling=1e-9, to_earth=1e-9),
                    frequency=50.0, resistance=np.geomspace(1e3, 1e8, 30))
    assert shown.shape == (30,)
    assert np.all(np.diff(shown) > 0)
    assert_allclose(shown[-1], 115.0, rtol=1e-3, atol=0)


EDGE = {"voltage": 0.0, "coupling": 0.0, "to_earth": 1e-30}


@pytest.mark.parametrize(
    ("past", "message"),
    [
        ({"voltage": -1e-9}, "voltage: must be at least 0 V; given -1e-09 V"),
        ({"coupling": -1e-30}, "coupling: must be at least 0 F"),
        ({"to_earth": -1e-30, "coupling": 1.0}, "to_earth: must be at least 0 F"),
        ({"to_earth": 0.0}, "must not both be 0 F"),
        ({"voltage": math.inf}, "voltage: must be a finite number"),
    ],
)
def test_divider_refuses_just_past_the_edge(past, message):
    assert divider(**EDGE).voltage == 0.0
    with pytest.raises(Refused, match=message):
        divider(**EDGE | past)


@pytest.mark.parametrize(
    ("past", "message"),
    [
        ({"resistance": 0.0}, "resistance: must be above 0 Ω; given 0 Ω"),
        ({"resistance": math.nan}, "resistance: must be above 0 Ω"),
        ({"capacitance": -1e-15}, "capacitance: must be at least 0 F"),
        ({"frequency": 0.0}, "frequency: must be above 0 Hz"),
        ({"frequency": "50 Hz"}, "frequency: must be a number"),
    ],
)
def test_reading_refuses_just_past_the_edge(past, message):
    source = divider(voltage=230.0, coupling=1e-9, to_earth=1e-9)
    edge = {"frequency": 1e-3, "resistance": 1e-3, "capacitance": 0.0}
    assert reading(source, **edge) > 0
    with pytest.raises(Refused, match=message):
        reading(source, **edge | past)
