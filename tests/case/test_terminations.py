"""The ends of a case: words, joins and loads."""

from __future__ import annotations

import math

import pytest

from case_text import changed, refusals, site
from unlanded.case.loading import read_case
from unlanded.case.terminations import Load

QUAY = site("tern-quay")
MOTOR = 'power = "120 W", power_factor = 0.85, voltage = "230 V"'


def load(written: str) -> Load:
    case = read_case(changed(QUAY, (MOTOR, written)))
    found = case.content.run.ends.far["brown"].load
    assert found is not None
    return found


def test_a_nameplate_is_a_resistance_and_reactance_in_series() -> None:
    burden = load(MOTOR).burden(frequency=50.0)
    power = 230.0**2 * complex(burden.admittance(50.0)).conjugate()
    assert power.real == pytest.approx(120.0, rel=1e-12, abs=0)
    assert power.real / abs(power) == pytest.approx(0.85, rel=1e-12, abs=0)
    assert power.imag > 0  # a motor takes reactive power


def test_apparent_power_is_the_size_of_power() -> None:
    burden = load('apparent_power = "1.2 VA", power_factor = 0.4, voltage = "230 V"'
                  ).burden(frequency=50.0)
    power = 230.0**2 * complex(burden.admittance(50.0)).conjugate()
    assert abs(power) == pytest.approx(1.2, rel=1e-12, abs=0)
    assert power.real == pytest.approx(0.48, rel=1e-12, abs=0)


def test_an_inductance_alone_is_not_an_open_end() -> None:
    admittance = complex(load('inductance = "0.8 H"').burden(frequency=50.0).admittance(50.0))
    assert admittance.imag == pytest.approx(-1 / (2 * math.pi * 50 * 0.8), rel=1e-12, abs=0)


def test_a_capacitance_alone_is_that() -> None:
    admittance = complex(load('capacitance = "100 nF"').burden(frequency=50.0).admittance(50.0))
    assert admittance == pytest.approx(2j * math.pi * 50 * 100e-9, rel=1e-12, abs=0)


@pytest.mark.parametrize(("written", "says"), [
    ('resistance = "0 ohm"', "load: a resistance of 0 Ω is a bond. (bond the two points)"),
    ('inductance = "0 H"', "load: a resistance of 0 Ω is a bond."),
    ('front_resistance = "1 ohm"', "load: says nothing: give an impedance, or power, or"),
    ('voltage = "230 V"', "load.voltage: goes with power or apparent_power, and neither is given."),
    ('resistance = "1 ohm", power_factor = 0.5', "load.power_factor: goes with power or"),
    (f'{MOTOR}, resistance = "1 ohm"', "load: is described twice: give an impedance, or power,"),
    (f'{MOTOR}, apparent_power = "1 VA"', "load: is described twice"),
    ('power = "120 W"', "load.voltage: is missing: the power belongs to a rated voltage."),
    ('power = "1 W", power_factor = 0, voltage = "1 V"',
     "load.power_factor: must be above 0 where power is given."),
    ('power = "1 W", power_factor = 1.01, voltage = "1 V"', "load.power_factor: must be 0 to 1;"),
    ('resistence = "1 ohm"', 'is not a key that belongs here. (did you mean "resistance"?)'),
])  # fmt: skip
def test_a_mistake_in_a_load_is_told_at_it(written: str, says: str) -> None:
    said = refusals(changed(QUAY, (MOTOR, written)))
    assert any(f"run.ends.far.brown.{says}" in s or says in s for s in said)
    assert all(s.startswith("c.toml line ") for s in said)


@pytest.mark.parametrize(("written", "says"), [
    ('"live"', "is not a word of the supply of this case; given live. (known: L, N, earth, open)"),
    ('"L1"', 'is not a word of the supply of this case; given L1. (did you mean "L"?)'),
    ("5", "is not a word of the supply of this case; given 5. (known: L, N, earth, open)"),
    ('["L"]', "is not a word of the supply of this case; given a list."),
    ("{}", 'must be one of: a word of the supply, {joined = "…"}, or {load = {…}, to = "…"}.'),
    ('{at = "L", joined = "blue"}', "must be one of: a word of the supply, {joined"),
    ('{joined = "blu"}', '.joined: is not a core of this case; given blu. (did you mean "blue"?)'),
    ('{joined = "brown"}', "cannot be connected to itself; given brown."),
    ('{load = {resistance = "1 ohm"}}', ".to: goes with a load, and a load with what it is"),
    ('{load = {resistance = "1 ohm"}, to = "brown"}', "cannot be connected to itself; given brown"),
    ('{load = {resistance = "1 ohm"}, to = "grey"}', ".to: is not a core or supply word of this"),
])  # fmt: skip
def test_a_mistake_at_an_end_is_told_at_its_core(written: str, says: str) -> None:
    (said,) = refusals(changed(QUAY, ('brown = "L"', f"brown = {written}")))
    assert "run.ends.near.brown" in said
    assert says in said


def test_an_unknown_core_at_an_end_is_refused() -> None:
    (said,) = refusals(changed(QUAY, ('brown = "L"', 'bron = "L"')))
    assert 'run.ends.near.bron: is not a core of this case; given bron. (did you mean "bro' in said


@pytest.mark.parametrize("to", ["N", "earth", "L", "blue"])
def test_a_load_may_lead_to_a_core_or_the_supply(to: str) -> None:
    load = f'black = {{load = {{resistance = "1 kohm"}}, to = "{to}"}}'
    assert refusals(changed(QUAY, ("green-yellow = \"open\"", load))) == []
