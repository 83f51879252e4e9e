"""Leakage of equipment as its sources have it."""

from __future__ import annotations

import pytest

from unlanded.errors import Refused
from unlanded.reference.equipment import LIMIT, TYPICAL, equipment, heating_limit


@pytest.mark.parametrize(
    ("name", "low", "high"),
    # Trade tables (common practice, no source): PC 1 to 2 mA, printer 0.5 to 1, copier 0.5 to 1.5.
    [("printer", 0.5, 1.0), ("copier", 0.5, 1.5), ("small portable", 0.5, 0.75),
     ("office kit", 1.0, 3.5)],
)  # fmt: skip
def test_typical_ranges(name, low, high):
    value = equipment(name)
    assert (value.low, value.high) == pytest.approx((low * 1e-3, high * 1e-3), rel=1e-12, abs=0)
    assert value.source.standing == "common practice"


@pytest.mark.parametrize(
    ("name", "milliamperes"),
    # IEC 60335-1, 13.2 and 16.2 (seen); IEC 62368-1 and IEC 60601-1 (from memory).
    [("class II", 0.25), ("class I portable", 0.75), ("class I motor-operated, stationary", 3.5),
     ("class I computer", 3.5), ("medical, class I", 5.0)],
)  # fmt: skip
def test_limits(name, milliamperes):
    assert LIMIT[name].likely == pytest.approx(milliamperes * 1e-3, rel=1e-12, abs=0)
    given = equipment(name)
    assert given.low == 0.0
    assert given.high == LIMIT[name].likely


@pytest.mark.parametrize(
    ("watts", "milliamperes"),
    # IEC 60335-1 (seen): 0.75 mA or 0.75 mA/kW, 5 mA at most.
    [(500, 0.75), (1000, 0.75), (3000, 2.25), (10_000, 5.0)],
)
def test_heating(watts, milliamperes):
    found = heating_limit(power=watts).likely
    assert found == pytest.approx(milliamperes * 1e-3, rel=1e-12, abs=0)


def test_refusals():
    with pytest.raises(Refused, match='did you mean "printer"'):
        equipment("printr")
    with pytest.raises(Refused, match="power: must be above 0 W"):
        heating_limit(power=0.0)
    assert not set(TYPICAL) & set(LIMIT)
