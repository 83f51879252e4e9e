"""A burden's admittance against circuits worked by hand and a printed input impedance."""

from __future__ import annotations

import math

import numpy as np
import pytest
from numpy.testing import assert_allclose

from unlanded.errors import Refused
from unlanded.physics.burden import Burden

FREQUENCIES = np.array([[16.7, 50.0], [60.0, 10e3]])
S = 2j * np.pi * FREQUENCIES


@pytest.mark.parametrize(("burden", "impedance"), [
    (Burden(3e3), 3e3 + 0 * S),
    (Burden(capacitance=1e-9), 1 / (S * 1e-9)),
    (Burden(0.0, 16.0), S * 16.0),
    (Burden(6e3, 16.0), 6e3 + S * 16.0),
    (Burden(10e6, capacitance=100e-12), 10e6 / (1 + S * 1e-3)),
    (Burden(front_resistance=1e3, capacitance=1e-6), 1e3 + 1 / (S * 1e-6)),
    (Burden(0.0, front_resistance=47.0), 47.0 + 0 * S),
    (Burden(1500.0, capacitance=0.22e-6, front_resistance=500.0), 500 + 1500 / (1 + S * 0.33e-3)),
    (Burden(100.0, 0.1, 1e-6, 10.0), 10 + 1 / (1 / (100 + S * 0.1) + S * 1e-6)),
])
def test_admittance_of_a_circuit(burden, impedance):
    assert_allclose(burden.admittance(FREQUENCIES), 1 / impedance, rtol=1e-12, atol=0)


@pytest.mark.parametrize(("frequency", "printed", "half_digit"), [
    (100.0, 1e6, 0.05e6), (1e3, 850e3, 5e3), (10e3, 160e3, 5e3), (100e3, 16e3, 0.5e3),
])
def test_bench_meter_as_its_maker_prints_it(frequency, printed, half_digit):
    # A maker's table for an input of 1 MΩ beside 100 pF (common practice).
    ohm = 1 / abs(Burden(1e6, capacitance=100e-12).admittance(frequency))
    assert ohm == pytest.approx(printed, rel=half_digit / printed, abs=0)


def test_body_model_is_2000_ohm_at_rest_and_500_above():
    # IEC 60990 (from memory): 1500 Ω beside 0.22 µF, behind 500 Ω.
    body = Burden(1500.0, capacitance=0.22e-6, front_resistance=500.0)
    assert_allclose(1 / body.admittance([1e-3, 1e9]), [2000.0, 500.0], rtol=1e-5, atol=0)


def test_nothing_conducts_nothing():
    assert np.all(Burden().admittance(FREQUENCIES) == 0)
    assert np.all(Burden(front_resistance=1e3).admittance(FREQUENCIES) == 0)


def test_capacitance_beside_a_short_is_shorted():
    assert Burden(0.0, capacitance=1e-6, front_resistance=5.0).admittance(50.0) == 0.2


@pytest.mark.parametrize("word", ["resistance", "inductance", "capacitance", "front_resistance"])
@pytest.mark.parametrize("bad", [-1e-15, math.nan])
def test_each_part_is_at_least_zero(word, bad):
    edge = {"resistance": 1.0, word: 0.0, "front_resistance": 0.0 if word != "resistance" else 1.0}
    assert Burden(**edge)
    with pytest.raises(Refused, match=f"burden: {word.replace('_', ' ')} must be at least 0"):
        Burden(**edge | {word: bad})


@pytest.mark.parametrize("word", ["inductance", "capacitance", "front_resistance"])
def test_only_the_resistance_may_be_infinite(word):
    assert Burden(resistance=math.inf)
    with pytest.raises(Refused, match="must be at least 0 and finite; given inf"):
        Burden(**{word: math.inf})


def test_no_resistance_at_all_is_a_bond():
    assert Burden(1e-9).admittance(50.0) == pytest.approx(1e9, rel=1e-12, abs=0)
    with pytest.raises(Refused, match="a resistance of 0 Ω is a bond"):
        Burden(0.0)
    with pytest.raises(Refused, match="bond the two points"):
        Burden(0.0, capacitance=1e-6)
