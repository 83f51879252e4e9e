"""The run of a case against the same run put together by hand, and what the demo sites show."""

from __future__ import annotations

import math

import pytest
from numpy.testing import assert_allclose

from case_text import NAMES, SITES, changed, site
from unlanded.case.build import USUAL_INSTRUMENTS, build_run, case_instruments
from unlanded.case.loading import load_case, read_case
from unlanded.case.sections import Limit
from unlanded.physics.burden import Burden
from unlanded.physics.capacitance import capacitance_matrix
from unlanded.physics.section import Conductor, Section
from unlanded.reference.instruments import INSTRUMENTS
from unlanded.study.ends import Bonded, Driven, Through
from unlanded.study.readings import Pair, reading_sheet
from unlanded.study.run import Run
from unlanded.study.supply import Supply

LIMITS: tuple[Limit, ...] = ("low", "likely", "high")


def by_hand(permittivity: float) -> Run:
    """The run of Tern Quay from its numbers."""
    overall = math.sqrt(2.5e-6 / math.pi / 0.75)
    b = overall + 0.8e-3
    corner = math.sqrt(2) * b
    places = {"brown": (corner, 0.0), "blue": (0.0, corner), "green-yellow": (-corner, 0.0),
              "black": (0.0, -corner)}
    section = Section(tuple(Conductor(name, x, y, 0.980 * overall, b, permittivity)
                            for name, (x, y) in places.items()))
    size = 230.0**2 * 0.85 / 120.0
    motor = Burden(0.85 * size, math.sqrt(1 - 0.85**2) * size / (100 * math.pi))
    return Run(section, 85.0, Supply(230.0, 50.0),
               {"brown": Driven("L"), "blue": Bonded("N"), "green-yellow": Bonded("earth")},
               {"brown": Through(motor, "blue")}, (7.98e-3,) * 4)


@pytest.mark.parametrize(("limit", "permittivity"), [("low", 3.5), ("likely", 4.8), ("high", 6.5)])
def test_the_run_is_that_put_together_by_hand(limit: Limit, permittivity: float) -> None:
    run, hand = build_run(load_case(SITES / "tern-quay.toml"), limit), by_hand(permittivity)
    assert_allclose(run.matrix, hand.matrix, rtol=1e-9)
    assert run.resistance == pytest.approx(hand.resistance, rel=1e-12, abs=0)
    for point in ("black@near", "black@far", "brown@far", "blue@far"):
        assert run.voltage(point) == pytest.approx(hand.voltage(point), rel=1e-9, abs=0)
        assert run.impedance(point) == pytest.approx(hand.impedance(point), rel=1e-9, abs=0)


@pytest.mark.parametrize("name", NAMES)
def test_every_demo_site_solves_at_every_limit(name: str) -> None:
    case = load_case(SITES / f"{name}.toml")
    for limit in LIMITS:
        run = build_run(case, limit)
        cores = len(run.section.names)
        assert_allclose(run.matrix[:cores, :cores], capacitance_matrix(run.section), rtol=1e-12)
        size = case.content.supply.voltage
        for point in run.points:
            assert math.isfinite(abs(run.voltage(point)))
            # nothing here resonates: no point stands above the supply, its source's drop aside
            assert abs(run.voltage(point)) < 1.001 * size


@pytest.mark.parametrize("name", NAMES)
def test_the_readings_of_a_demo_site_fit_what_it_describes(name: str) -> None:
    case = load_case(SITES / f"{name}.toml")
    low, likely, high = (build_run(case, limit) for limit in LIMITS)
    known = {i.key: i for i in (*INSTRUMENTS.values(), *case_instruments(case))}
    assert case.content.readings
    for reading in case.content.readings:
        (row,) = reading_sheet(likely, [known[reading.instrument]], [Pair(reading.a, reading.b)],
                               low=low, high=high).rows
        assert row.low.value <= float(reading.shows.removesuffix(" V")) <= row.high.value


def test_alder_mill_shows_what_the_trade_has_seen() -> None:
    """Three-core cord, two cores open, 25 ft on an earthed steel table, 0.2 in off it.

    Common practice, no source: an unloaded open core sits at about 80 to 85 % of the line; a
    10 MΩ meter shows some 70 to 80 V of 122 V, a low-impedance one about 0.1 V.
    """
    case = read_case(changed(site("alder-mill"), ('voltage = "120 V"', 'voltage = "122 V"')))
    run = build_run(case)
    assert 0.80 <= abs(run.voltage("white@far")) / 122.0 <= 0.85
    digital, low = INSTRUMENTS["digital-10M"], INSTRUMENTS["low-impedance"]
    assert 70.0 <= abs(run.connect(digital.burden_at(80.0), "white@far").voltage) <= 80.0
    assert low.show(abs(run.connect(low.burden_at(1.0), "white@far").voltage)).text == "0.1 V"


def test_alder_mill_tests_its_device() -> None:
    run = build_run(load_case(SITES / "alder-mill.toml"))
    effect = run.connect(INSTRUMENTS["low-impedance"].burden_at(120.0), "black@near")
    assert abs(effect.residual_added) > 6e-3  # 120 V / 3 kΩ is 40 mA


def test_instruments_are_those_listed_and_the_cases_own() -> None:
    keys = [i.key for i in case_instruments(load_case(SITES / "larkmoor.toml"))]
    assert keys == ["digital-10M", "low-impedance", "moving-coil", "two-pole", "van-meter"]
    heron = case_instruments(load_case(SITES / "heron-house.toml"))
    assert tuple(i.key for i in heron) == USUAL_INSTRUMENTS
