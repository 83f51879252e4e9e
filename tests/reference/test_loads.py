"""Thresholds against their clauses, and the trade's formula against its worked results."""

from __future__ import annotations

import math

import pytest

from unlanded.errors import Refused
from unlanded.reference.loads import THRESHOLDS, longest_control_cable, threshold


def test_contactor_and_relay() -> None:
    # IEC 60947-4-1, 8.2.1.2 (from memory): an AC contactor drops out between 75 and 20 % of rated
    # voltage. IEC 61810-1 (from memory): a relay releases at not less than 15 %; data of a plug-in
    # relay for general use (seen) say 20 %. Contactors and relays operate from 85 % (seen).
    contactor, relay = threshold("contactor"), threshold("relay")
    assert contactor.volts(contactor.off_at, 230.0) == pytest.approx(46.0, rel=1e-12, abs=0)
    assert contactor.volts(contactor.on_at, 230.0) == pytest.approx(172.5, rel=1e-12, abs=0)
    assert relay.volts(relay.off_at, 230.0) == pytest.approx(34.5, rel=1e-12, abs=0)
    assert relay.volts(relay.on_at, 230.0) == pytest.approx(195.5, rel=1e-12, abs=0)


@pytest.mark.parametrize(("key", "off", "milliamperes", "on"), [
    # IEC 61131-2, operating ranges of AC inputs (from memory). Data of two cards for 100 to 240 V
    # (seen) name the same corners: off to 20 V and to 40 V, on from 79 V; under 3 mA at 40 V and
    # over 6 mA at 164 V; under 5 mA at 40 V and over 7 mA at 159 V, 60 Hz; 1 mA of leakage allowed.
    ("input 120 V type 1", 20, 1, 79), ("input 120 V type 2", 20, 4, 74),
    ("input 120 V type 3", 20, 2.5, 74), ("input 230 V type 1", 40, 1, 164),
    ("input 230 V type 2", 40, 5, 159), ("input 230 V type 3", 40, 3, 159),
])
def test_inputs(key: str, off: float, milliamperes: float, on: float) -> None:
    kind = threshold(key)
    assert (kind.off_at.likely, kind.on_at.likely) == (off, on)
    assert kind.off_current is not None
    assert kind.off_current.likely == pytest.approx(milliamperes * 1e-3, rel=1e-12, abs=0)


def test_every_threshold_is_in_order_and_sourced() -> None:
    for kind in THRESHOLDS.values():
        assert 0 < kind.off_at.likely < kind.on_at.likely
        assert kind.off_at.source.standing in ("from memory", "common practice")
        assert kind.off_at.unit == kind.on_at.unit == (
            "A" if kind.measure == "lamp current" else kind.off_at.unit)


@pytest.mark.parametrize(("volts", "metres"), [(110, 910), (240, 191)])
def test_longest_control_cable_as_published(volts: float, metres: float) -> None:
    # A maker's note on control relays (seen): drop-out 25 %, 4.5 VA hold, 0.26 µF/km, 50 Hz, worked
    # with π = 3.142.
    found = longest_control_cable(hold_power=4.5, drop_out=0.25, voltage=volts, frequency=50.0,
                                  capacitance=0.26e-9)
    assert abs(found * math.pi / 3.142 - metres) <= 0.5


def test_refusals() -> None:
    with pytest.raises(Refused, match='did you mean "contactor"'):
        threshold("contacter")
    with pytest.raises(Refused, match="needs the rated voltage"):
        threshold("relay").volts(threshold("relay").off_at, None)
    with pytest.raises(Refused, match="must be above 0"):
        longest_control_cable(hold_power=0.0, drop_out=0.25, voltage=110, frequency=50,
                              capacitance=1e-10)
