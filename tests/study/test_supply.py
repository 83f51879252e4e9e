"""The phasors of a supply, and what it refuses."""

from __future__ import annotations

import math

import pytest

from unlanded.errors import Refused
from unlanded.study.supply import NEUTRAL, Supply


def test_lines_are_named_by_the_phases():
    named = [Supply(230.0, 50.0, phases=n).lines for n in (1, 2, 3)]
    assert named == [("L",), ("L1", "L2"), ("L1", "L2", "L3")]
    assert NEUTRAL == "N"


def test_three_phases_cancel_and_stand_root_three_apart():
    supply = Supply(230.0, 50.0, phases=3)
    one, two, three = (supply.phasor(line) for line in supply.lines)
    assert abs(one + two + three) < 230 * 1e-14
    assert abs(one - two) == pytest.approx(230 * math.sqrt(3), rel=1e-12, abs=0)
    # L2 lags L1 by a third of a turn.
    assert two.imag == pytest.approx(-230 * math.sqrt(3) / 2, rel=1e-12, abs=0)
    assert three == pytest.approx(two.conjugate(), rel=1e-12, abs=0)


def test_two_phases_are_opposite():
    supply = Supply(120.0, 60.0, phases=2)
    assert supply.phasor("L1") - supply.phasor("L2") == pytest.approx(240.0, rel=1e-12, abs=0)


@pytest.mark.parametrize(("order", "sequence"), [(3, 0), (5, -1), (7, 1), (9, 0)])
def test_harmonics_turn_with_their_order(order, sequence):
    supply = Supply(230.0, 50.0, phases=3, harmonics={3: 0.1, 5: 0.1, 7: 0.1, 9: 0.1})
    turn = supply.phasor("L2", order=order) / supply.phasor("L1", order=order)
    expected = complex(math.cos(sequence * math.tau / 3), -math.sin(sequence * math.tau / 3))
    assert abs(turn - expected) < 1e-13
    assert supply.phasor("L1", order=order) == pytest.approx(23.0, rel=1e-12, abs=0)


def test_an_order_that_is_not_given_is_absent():
    assert Supply(230.0, 50.0, harmonics={3: 0.1}).phasor("L", order=5) == 0


EDGE = {"voltage": 1e-6, "frequency": 1e-6, "harmonics": {2: 0.0, 50: 1.0}}


@pytest.mark.parametrize(("past", "message"), [
    ({"voltage": 0.0}, "supply voltage: must be above 0 V; given 0 V"),
    ({"voltage": math.inf}, "supply voltage: must be above 0 V; given inf V"),
    ({"frequency": -50.0}, "supply frequency: must be above 0 Hz; given -50 Hz"),
    ({"frequency": math.nan}, "supply frequency: must be above 0 Hz"),
    ({"phases": 4}, "supply phases: must be 1, 2 or 3; given 4"),
    ({"resistance": -1e-9}, "supply: resistance and inductance must be at least 0"),
    ({"inductance": math.inf}, "supply: resistance and inductance must be at least 0"),
    ({"inductance": math.nan}, "supply: resistance and inductance must be at least 0"),
    ({"harmonics": {1: 0.5}}, "supply harmonics: are orders from 2 with a share of 0 to 1"),
    ({"harmonics": {3: 1.01}}, "supply harmonics: are orders from 2"),
    ({"harmonics": {3: math.nan}}, "supply harmonics: are orders from 2"),
])
def test_refused_just_past_the_edge(past, message):
    assert Supply(**EDGE).voltage == 1e-6
    with pytest.raises(Refused, match=message):
        Supply(**EDGE | past)


def test_every_mistake_is_told_at_once():
    with pytest.raises(Refused) as caught:
        Supply(0.0, 0.0, phases=5)
    assert [m.place for m in caught.value.mistakes] == [
        "supply voltage", "supply frequency", "supply phases"]
