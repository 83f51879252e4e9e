"""Limits as printed, and how they hang together."""

from __future__ import annotations

import math

import pytest

from unlanded.errors import Refused
from unlanded.reference import limits
from unlanded.reference.limits import protective_conductor_limit
from unlanded.reference.records import Value


@pytest.mark.parametrize(
    ("name", "printed", "unit"),
    [
        ("PERCEPTION_CURRENT", 0.5e-3, "A"),  # IEC 60479-1:2018 (seen)
        ("LET_GO_CURRENT", 5e-3, "A"),  # IEC 60479-1:2018, curve b (from memory)
        ("BODY_FRONT_RESISTANCE", 500, "Ω"),  # IEC 60990 (seen)
        ("BODY_SHUNT_RESISTANCE", 1500, "Ω"),  # IEC 60990 (seen)
        ("BODY_CAPACITANCE", 0.22e-6, "F"),  # IEC 60990 (seen)
        ("EXTRA_LOW_VOLTAGE_AC", 50, "V"),  # IEC 61243-3:2014 (seen)
        ("EXTRA_LOW_VOLTAGE_DC", 120, "V"),  # IEC 61243-3:2014 (seen)
        ("INTERFERENCE_BOUNDARY", 100e3, "Ω"),  # IEC 61243-3:2014 (seen)
        ("INVOLUNTARY_REACTION_CURRENT", 1e-3, "A"),  # OSHA (seen)
        ("GUARDED_REACTION_CURRENT", 6e-3, "A"),  # OSHA (seen)
        ("INDUCED_TEST_RESISTANCE", 500, "Ω"),  # OSHA (seen)
        ("STANDING_SHARE", 0.30, ""),  # BS 7671:2018, 531.3.2(ii) (seen)
        ("ADDITIONAL_PROTECTION_CURRENT", 30e-3, "A"),  # BS 7671:2018, 415.1.1 (seen)
        ("STORED_CHARGE", 45e-6, "C"),  # IEC 60335-1 (seen)
        ("STORED_ENERGY", 0.35, "J"),  # IEC 60335-1 (seen)
    ],
)
def test_values_as_printed(name, printed, unit):
    value = getattr(limits, name)
    assert value.likely == pytest.approx(printed, rel=1e-12, abs=0)
    assert value.unit == unit
    assert value.source.title


def test_every_value_is_a_record():
    names = [n for n in dir(limits) if n.isupper() and n[0] != "_" and n != "BODY_IMPEDANCE"]
    assert len(names) > 20
    assert all(isinstance(getattr(limits, n), Value) for n in names)


def test_standing_share_of_a_30_ma_device():
    # BS 7671:2018, 531.3.2(ii) (seen): 9 mA for 30 mA.
    allowed = limits.STANDING_SHARE.likely * limits.ADDITIONAL_PROTECTION_CURRENT.likely
    assert allowed == pytest.approx(9e-3, rel=1e-12, abs=0)


def test_severity_rises():
    order = [limits.PERCEPTION_CURRENT, limits.LET_GO_CURRENT, limits.FIBRILLATION_CURRENT]
    assert [v.likely for v in order] == sorted(v.likely for v in order)
    assert limits.LET_GO_CURRENT.low == limits.LET_GO_CURRENT.likely  # the cautious end


def test_body_impedance_falls_with_voltage_and_stays_in_order():
    previous = math.inf
    for voltage in sorted(limits.BODY_IMPEDANCE):
        value = limits.BODY_IMPEDANCE[voltage]
        assert value.low < value.likely < value.high
        assert value.likely < previous
        previous = value.likely
    # IEC 60479-1:2018, 225 V (from memory): 775, 1225, 1900 Ω.
    at = limits.BODY_IMPEDANCE[225.0]
    assert (at.low, at.likely, at.high) == (775, 1225, 1900)


def test_body_impedance_against_the_older_edition():
    # IEC 479-1:1994, table 1 (seen), 5, 50 and 95 % of people. The row of 25 V has stayed; above it
    # the later edition is lower for 5 and 50 %, which is the cautious side.
    older = {25: (1750, 3250, 6100), 50: (1450, 2625, 4375), 75: (1250, 2200, 3500),
             100: (1200, 1875, 3200), 125: (1125, 1625, 2875), 700: (750, 1100, 1550)}
    first = limits.BODY_IMPEDANCE[25.0]
    assert (first.low, first.likely, first.high) == older.pop(25)
    for voltage, (low, likely, _) in older.items():
        value = limits.BODY_IMPEDANCE[float(voltage)]
        assert 0.7 * low < value.low < low
        assert 0.7 * likely < value.likely < likely


@pytest.mark.parametrize(
    ("rated", "permanent", "milliamperes"),
    # IEC 61140 (seen), each side of every corner.
    [(0.1, False, 2), (4, False, 2), (6, False, 3), (10, False, 5), (32, False, 5),
     (1, True, 3.5), (7, True, 3.5), (16, True, 8), (20, True, 10), (63, True, 10)],
)  # fmt: skip
def test_protective_conductor_limit(rated, permanent, milliamperes):
    limit = protective_conductor_limit(rated_current=rated, permanent=permanent)
    assert limit.likely == pytest.approx(milliamperes * 1e-3, rel=1e-12, abs=0)


def test_protective_conductor_limit_refuses_just_past_the_edge():
    assert protective_conductor_limit(rated_current=32.0).likely > 0
    with pytest.raises(Refused, match=r"rated current: must be at most 32 A on a plug; given 32.1"):
        protective_conductor_limit(rated_current=32.1)
    for past in (0.0, -1.0, math.inf, math.nan):
        with pytest.raises(Refused, match="rated current: must be above 0 A"):
            protective_conductor_limit(rated_current=past)
