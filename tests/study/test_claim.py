"""A claim's share against the odds, and against the same readings less one."""

from __future__ import annotations

import math
from functools import cache

import pytest

from example_causes import reduced, seen
from unlanded.study.causes import Explanation, explain
from unlanded.study.claim import LEAKS, RESTS, SURE, Claim, chances, claim, leak_limit

WELL = (("digital-10M", "124.1 V"), ("low-impedance", "0.4 V"))
LEAKY = (("digital-10M", "21.3 V"), ("low-impedance", "0.4 V"), ("digital-10M", "21.4 V"))
FED = (("digital-10M", "229.8 V"), ("low-impedance", "228.9 V"))
SLIGHT = (("digital-10M", "1.23 V"), ("low-impedance", "1.2 V"))
SETS = (WELL, LEAKY, FED, SLIGHT)


@cache
def told(*readings: tuple[str, str]) -> Explanation:
    return explain(reduced(), [seen(tool, text) for tool, text in readings])


def test_coupling_takes_the_leakages_that_it_leaves_open_with_it() -> None:
    found = told(*WELL)
    made = claim(found, "spare")
    assert made.causes == ("capacitive coupling",)
    above = 0.0
    for cause in LEAKS:
        sizes, weights = found.sizes("spare", cause)
        above += float(weights[sizes >= made.leak_limit].sum())
    want = found.odds("spare")["capacitive coupling"] + above
    assert above > 0.01
    assert made.share == pytest.approx(want, rel=1e-9, abs=0)


@pytest.mark.parametrize("readings", SETS, ids=str)
def test_a_claim_is_sure_and_no_longer_than_it_must_be(readings: tuple[tuple[str, str], ...]
                                                       ) -> None:
    found = told(*readings)
    made = claim(found, "spare")
    assert made.share >= SURE
    if len(made.causes) > 1:
        fewer = Claim(made.causes[:-1], made.leak_limit, 0.0, ())
        assert chances(found, "spare", fewer)[0] < SURE


def test_a_leak_is_claimed_without_the_coupling() -> None:
    made = claim(told(*LEAKY), "spare")
    assert made.causes == ("leakage to earth",)
    assert not made.open
    assert made.share == pytest.approx(told(*LEAKY).odds("spare")["leakage to earth"], rel=1e-9,
                                       abs=0)


@pytest.mark.parametrize("readings", SETS, ids=str)
def test_without_a_reading_it_is_what_the_others_say(readings: tuple[tuple[str, str], ...]
                                                     ) -> None:
    # Draws made for all the readings stand for those less one: what is looked for is a share
    # far from one half, not its last digit.
    found = told(*readings)
    made = claim(found, "spare")
    for k, share in enumerate(chances(found, "spare", made)[1:]):
        less = told(*(r for j, r in enumerate(readings) if j != k))
        want = chances(less, "spare", made)[0]
        assert share == pytest.approx(want, rel=0.15, abs=0)
        assert (k in made.rests_on) == (want < RESTS)


def test_what_holds() -> None:
    coupled = Claim(("capacitive coupling", "magnetic pick-up"), 4e5, 0.97, ())
    assert coupled.holds("magnetic pick-up", 1.0)
    assert coupled.holds("leakage to earth", 4e5)
    assert not coupled.holds("leakage to a live neighbour", 3.9e5)
    assert not coupled.holds("solid connection", 1.0)
    leak = Claim(("leakage to earth", "capacitive coupling"), 1e3, 0.97, ())
    assert not leak.holds("leakage to a live neighbour", 1e6)
    assert not Claim(("capacitive coupling",), math.inf, 0.97, ()).holds("leakage to earth", 1e7)


def test_one_cause_on_more_than_one_reading_is_decided() -> None:
    one, two = ("solid connection",), ("solid connection", "back-feed through a load")
    assert Claim(one, math.inf, 0.97, ()).decided
    assert not Claim(one, math.inf, 0.97, (1,)).decided
    assert not Claim(two, math.inf, 0.97, ()).decided


def test_the_limit_has_two_digits() -> None:
    limit = leak_limit(told(*WELL), "spare")
    assert limit == pytest.approx(float(f"{limit:.1e}"), rel=1e-12, abs=0)


@pytest.mark.parametrize("shut", [("capacitive coupling",), LEAKS], ids=str)
def test_what_is_not_thought_of_leaves_nothing_open(shut: tuple[str, ...]) -> None:
    found = explain(reduced(), [seen(*r) for r in WELL], shares=dict.fromkeys(shut, 0.0))
    made = claim(found, "spare")
    assert made.leak_limit == math.inf
    assert not made.open
    assert not set(shut) & set(made.causes)
