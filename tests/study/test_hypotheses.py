"""Causes, their variants, and what is thought of them beforehand."""

from __future__ import annotations

import pytest

from unlanded.errors import Refused
from unlanded.study.hypotheses import (
    CAUSES,
    SHARES,
    Variant,
    prior_shares,
    size_at,
    size_range,
    variants,
)


def test_shares_add_up_to_one_and_so_do_those_of_the_variants() -> None:
    assert sum(v.likely for v in SHARES.values()) == pytest.approx(1.0, rel=1e-12, abs=0)
    found = variants(("L1", "L2", "L3"), ("L1", "L2"))
    for cause in CAUSES:
        whole = sum(v.share for v in found if v.cause == cause)
        assert whole == pytest.approx(1.0, rel=1e-12, abs=0), cause


def test_own_shares_replace_some_and_all_are_scaled() -> None:
    made = prior_shares({"solid connection": 0.62})
    assert made["solid connection"] == pytest.approx(0.62 / 1.5, rel=1e-12, abs=0)
    assert sum(made.values()) == pytest.approx(1.0, rel=1e-12, abs=0)


@pytest.mark.parametrize(("given", "words"), [
    ({"solid conection": 0.1}, "did you mean"), ({"solid connection": -0.1}, "at least 0"),
    (dict.fromkeys(CAUSES, 0.0), "must not all be 0"),
])
def test_shares_that_are_none_are_refused(given: dict[str, float], words: str) -> None:
    with pytest.raises(Refused, match=words):
        prior_shares(given)


def test_what_actions_do_to_each_cause() -> None:
    off, loads, open_far = (frozenset({a}) for a in
                            ("neighbours off", "loads off", "far end disconnected"))
    fed = Variant("back-feed through a load", "L", "far", own=False)
    assert not fed.joined(loads)
    assert not fed.joined(open_far)
    assert fed.joined(off)
    assert fed.live(off)
    assert not Variant("solid connection", "L", "near").live(off)
    assert not Variant("magnetic pick-up", "earth", "near").live(loads)


def test_variants_look_alike_until_an_action_tells_them_apart() -> None:
    near, far = (Variant("solid connection", "L", end) for end in ("near", "far"))
    plain = frozenset()
    assert near.look([plain]) == far.look([plain])
    assert near.look([frozenset({"far end disconnected"})]) != far.look(
        [frozenset({"far end disconnected"})])


def test_induced_voltage_grows_with_length_and_frequency() -> None:
    one = size_range("magnetic pick-up", omega=314.159265, length=100.0)
    assert one is not None
    # ω M I length at the likely values: 314.16 × 0.2 µH/m × 10 A × 100 m
    assert one.likely == pytest.approx(0.0628318, rel=1e-5, abs=0)
    assert size_range("solid connection", omega=314.0, length=100.0) is None
    assert float(size_at(0.0, one)) == pytest.approx(one.low, rel=1e-12, abs=0)
    assert float(size_at(1.0, one)) == pytest.approx(one.high, rel=1e-12, abs=0)
