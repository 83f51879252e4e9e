"""What the next measurement would tell."""

from __future__ import annotations

import math
from functools import cache

import numpy as np
import pytest

from example_causes import FAR, OMEGA, reduced, seen
from unlanded.reference.instruments import INSTRUMENTS
from unlanded.study.causes import Explanation, explain
from unlanded.study.next_reading import (
    Candidate,
    next_readings,
    simplest,
    usual_candidates,
)

TOOLS = tuple(INSTRUMENTS[k] for k in ("digital-10M", "low-impedance", "coil-tester", "proximity",
                                       "body"))
DIGITAL, LOW, COIL = TOOLS[:3]


@cache
def connected() -> Explanation:
    return explain(reduced(), [seen("digital-10M", "229.8 V"), seen("low-impedance", "228.9 V")])


@cache
def nothing_read() -> Explanation:
    return explain(reduced(), [])


def test_candidates_are_usable_and_each_once() -> None:
    made = usual_candidates(nothing_read(), TOOLS)
    assert len(made) == len(set(made))
    assert all(c.instrument.kind != "body" for c in made)
    assert any(math.isfinite(c.resistor) for c in made)
    assert not any(math.isfinite(c.resistor) for c in made if c.instrument == LOW)


def test_switching_the_load_off_tells_a_connection_from_a_back_feed() -> None:
    best = next_readings(connected(), usual_candidates(connected(), TOOLS))[0]
    assert best.candidate.actions == {"loads off"}
    # 80 : 20 before; a reading that told them apart surely would give the entropy, 0.72 bit.
    assert 0.5 < best.bits < 0.73
    low, _, high = best.predicted["back-feed through a load"]
    assert high < best.predicted["solid connection"][0]
    assert low < 230 * 2 / 3.5 < high


def test_information_is_never_negative_nor_more_than_is_not_known() -> None:
    odds = np.array([s for s in nothing_read().odds("spare").values() if s > 0])
    entropy = -(odds * np.log2(odds)).sum()
    for p in next_readings(nothing_read(), usual_candidates(nothing_read(), TOOLS)):
        assert -1e-9 <= p.bits <= entropy


def test_a_reading_that_has_been_taken_tells_little_more() -> None:
    found = explain(reduced(), [seen("digital-10M", "124.1 V")])
    first, again = (next_readings(e, [Candidate(DIGITAL, FAR)])[0].bits
                    for e in (nothing_read(), found))
    assert again < first / 4


def test_what_could_trip_the_device_comes_last_and_is_not_allowed() -> None:
    made = next_readings(nothing_read(), [Candidate(LOW, FAR), Candidate(DIGITAL, FAR)],
                         non_operating=15e-3)
    assert [p.allowed for p in made] == [True, False]
    # 230 V on 3 kΩ is 77 mA, wherever the conductor is fed: connected (8.4 %) or by a small load.
    assert 0.1 < made[1].trip_chance < 0.25
    assert made[0].trip_chance == 0.0


def test_predictions_are_those_of_the_divider() -> None:
    p = next_readings(nothing_read(), [Candidate(DIGITAL, FAR, resistor=100e3)])[0]
    low, middle, high = p.predicted["capacitive coupling"]
    want = 230 * OMEGA * 2e-9 / abs(1j * OMEGA * 3.6e-9 + 1 / 10e6 + 1e-5)
    assert middle == pytest.approx(want, rel=0.03, abs=0)
    assert low < middle < high


def test_costs_turn_the_order() -> None:
    candidates = [Candidate(DIGITAL, FAR, frozenset({"loads off"})), Candidate(DIGITAL, FAR)]
    plain = next_readings(connected(), candidates)[0]
    dear = next_readings(connected(), candidates, costs={"loads off": 1e6})[0]
    assert plain.candidate.actions
    assert not dear.candidate.actions


def test_an_idle_action_is_not_suggested() -> None:
    made = next_readings(nothing_read(), usual_candidates(nothing_read(), TOOLS))
    kept = simplest(made)
    assert kept
    for tool in TOOLS:
        own = [p for p in kept if p.candidate.instrument == tool]
        plain = [p for p in own if not p.candidate.actions and math.isinf(p.candidate.resistor)]
        assert len(plain) <= 2


def test_a_voltage_over_every_range_is_not_suggested() -> None:
    from unlanded.reference.instruments import custom_instrument

    small = custom_instrument("small", "small", resistance=1e6, full_scale=100.0, counts=1)
    assert not next_readings(connected(), [Candidate(small, FAR)])[0].allowed
