"""Trip by measurement: what practice knows, and the verdicts at their edges."""

from __future__ import annotations

import math
from pathlib import Path

import pytest

from unlanded.case.build import build_run, case_instruments
from unlanded.case.loading import load_case
from unlanded.reference.devices import Device
from unlanded.reference.instruments import custom_instrument
from unlanded.study.ends import Driven
from unlanded.study.readings import Pair, reading_sheet
from unlanded.study.residual import residual_margin
from unlanded.study.run import Run
from unlanded.study.standing import resistive_leak, run_leak
from unlanded.study.supply import Supply
from unlanded.study.trip import measured_trips, verdict

MILL = Path(__file__).resolve().parents[2] / "workbook" / "sites" / "alder-mill.toml"


@pytest.fixture(scope="module")
def mill():
    case = load_case(MILL)
    run, low, high = (build_run(case, limit) for limit in ("likely", "low", "high"))
    sheet = reading_sheet(run, case_instruments(case), low=low, high=high)
    margin = residual_margin(Device(6e-3, "personnel"), [run_leak("cord", run, low, high)],
                             run.supply)
    trips = measured_trips(sheet, margin, runs=(low, high))
    return {(t.pair.a, t.pair.b, t.instrument.key): t for t in trips}


@pytest.mark.parametrize(
    ("tool", "expected"), [("low-impedance", "will"), ("coil-tester", "will"),
                           ("digital-10M", "will not"), ("two-pole", "will not")])
def test_line_to_earth_as_practice_knows(mill, tool, expected):
    # Common practice: a low-impedance meter or a coil tester from line to earth trips a 4 to 6 mA
    # device, a digital meter does not.
    assert mill["black@near", "earth", tool].verdict == expected
    assert mill["black@far", "earth", tool].verdict == expected


@pytest.mark.parametrize("tool", ["low-impedance", "coil-tester", "digital-10M"])
@pytest.mark.parametrize(
    ("a", "b"), [("black@near", "N"), ("black@near", "white@near"), ("black@far", "green@far")])
def test_line_to_neutral_or_to_an_open_core_does_not(mill, tool, a, b):
    trip = mill[a, b, tool]
    assert trip.verdict == "will not"
    assert trip.highest < 0.1e-3
    assert math.isnan(trip.longest)


def test_three_kilohm_at_120_volts_is_40_milliamperes_and_within_0_371_seconds(mill):
    # UL 943 (seen): T = (20/I)^1.43, at 40 mA 0.371 s.
    trip = mill["black@near", "earth", "low-impedance"]
    assert trip.added == pytest.approx(40e-3, rel=1e-3, abs=0)
    assert trip.longest == pytest.approx(0.371, rel=0.0005 / 0.371 + 1.43e-3, abs=0)


@pytest.mark.parametrize(
    ("ohms", "volts", "milliamperes", "half"),
    # Worked out independently (line to earth): 7 kΩ, 100 kΩ, 200 kΩ, 1 MΩ.
    [(7e3, 230, 33, 0.5), (7e3, 120, 17, 0.5), (100e3, 230, 2.3, 0.05), (200e3, 230, 1.15, 0.005),
     (3e3, 277, 92, 0.5), (1e6, 230, 0.23, 0.005)],
)  # fmt: skip
def test_what_an_instrument_adds(ohms, volts, milliamperes, half):
    trip, = trips_of(volts, custom_instrument("tool", "tool", resistance=ohms), [])
    assert 1e3 * trip.added == pytest.approx(milliamperes, rel=half / milliamperes, abs=0)


def trips_of(volts, tool, leaks, device=None):
    from unlanded.physics.section import Conductor, Plane, Section

    supply = Supply(volts, 50.0)
    wire = Section((Conductor("hot", 0.0, 0.01, 1e-3),), Plane(0.0))
    run = Run(wire, 0.1, supply, {"hot": Driven("L")}, {}, (1e-3,))
    margin = residual_margin(device or Device(30e-3), [run_leak("run", run), *leaks], supply)
    return measured_trips(reading_sheet(run, [tool], [Pair("hot@near")]), margin)


def test_standing_current_and_instrument_add_as_phasors():
    # A reported ramp test: 15 mA and two leaks of 3 to 4 mA read 22.3 mA, so all were in phase.
    tool = custom_instrument("half", "half test", resistance=230 / 15e-3)
    leaks = [resistive_leak(name, 230 / 3.65e-3, Supply(230.0, 50.0), line="L")
             for name in ("one", "two")]
    trip, = trips_of(230.0, tool, leaks)
    assert trip.expected == pytest.approx(22.3e-3, rel=0.05 / 22.3, abs=0)
    assert trip.verdict == "may"


def test_the_tolerance_of_the_instrument_decides():
    sure = custom_instrument("a", "a", resistance=230 / 31e-3, tolerance=0.02)
    unsure = custom_instrument("b", "b", resistance=230 / 31e-3, tolerance=0.05)
    assert trips_of(230.0, sure, [])[0].verdict == "will"
    assert trips_of(230.0, unsure, [])[0].verdict == "may"


def test_verdicts_at_their_edges():
    device = Device(30e-3)
    assert verdict(device, 14.99e-3, 14.99e-3, frequency=50.0) == "will not"
    assert verdict(device, 14.99e-3, 15e-3, frequency=50.0) == "may"
    assert verdict(device, 29.99e-3, 40e-3, frequency=50.0) == "may"
    assert verdict(device, 30e-3, 40e-3, frequency=50.0) == "will"


def test_a_ramp_test_narrows_the_verdict_and_a_frequency_may_be_uncovered():
    tested = Device(30e-3, ramp_test=22e-3)
    assert verdict(tested, 22e-3, 22e-3, frequency=50.0) == "will"
    assert verdict(tested, 20e-3, 21.9e-3, frequency=50.0) == "will not"
    assert verdict(Device(30e-3, waveform="A"), 1.0, 1.0, frequency=400.0) \
        == "not covered by the standard"
    assert verdict(Device(30e-3, waveform="B"), 0.19, 0.2, frequency=400.0) == "will"
