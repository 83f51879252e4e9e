"""The reading sheet against hand-worked circuits, and its curves and bands."""

from __future__ import annotations

import math

import numpy as np
import pytest

from unlanded.errors import Refused
from unlanded.physics.burden import Burden
from unlanded.physics.section import Conductor, Plane, Section
from unlanded.reference.instruments import INSTRUMENTS, Instrument, custom_instrument, moving_coil
from unlanded.study.ends import Bonded, Driven, Ends, Through
from unlanded.study.readings import (
    Pair,
    SheetRow,
    length_curve,
    loading_curve,
    reading_sheet,
    usual_pairs,
)
from unlanded.study.run import Run
from unlanded.study.supply import Supply

# A live and a spare conductor over earth, with capacitances that can be divided by hand:
# Cm = 12.5 pF/m between them and Cg = 63.6 pF/m from each to earth.
PAIR = Section((Conductor("live", 0, 0.02, 1e-3), Conductor("spare", 0.01, 0.02, 1e-3)), Plane(0))
CM, CG = 12.5e-12, 63.6e-12
MATRIX = np.array([[CM + CG, -CM], [-CM, CM + CG]])
FAR = Pair("spare@far")


def run_of(length: float, *, far: Ends | None = None, voltage: float = 230.0) -> Run:
    return Run(PAIR, length, Supply(voltage, 50.0), {"live": Driven("L")}, far or {},
               (7.41e-3, 7.41e-3), capacitance=MATRIX)


def row_of(run: Run, tool: Instrument, pair: Pair = FAR) -> SheetRow:
    (row,) = reading_sheet(run, [tool], [pair]).rows
    return row


@pytest.mark.parametrize("length", [0.3048, 1.0, 15.24, 50.0, 200.0])
@pytest.mark.parametrize(("resistance", "capacitance"),
                         [(10e6, 100e-12), (1e6, 100e-12), (100e3, 0.0), (3e3, 0.0)])
def test_phantom_readings_are_those_of_the_divider(
    length: float, resistance: float, capacitance: float
) -> None:
    # Circuit theory: V = V_s jωCm / (jω(Cm + Cg + Cin) + 1/Rin), with all C over the length.
    tool = custom_instrument("t", "t", resistance=resistance, capacitance=capacitance)
    omega = 2 * math.pi * 50
    whole = omega * (length * (CM + CG) + capacitance) - 1j / resistance
    by_hand = 230 * omega * length * CM / abs(whole)
    row = row_of(run_of(length), tool)
    assert abs(row.voltage) == pytest.approx(by_hand, rel=2e-6, abs=0)


def test_the_source_behind_an_open_conductor_is_the_divider() -> None:
    row = row_of(run_of(50.0), INSTRUMENTS["digital-10M"])
    assert abs(row.unloaded) == pytest.approx(230 * CM / (CM + CG), rel=1e-5, abs=0)
    assert row.source_capacitance == pytest.approx(50 * (CM + CG), rel=1e-5, abs=0)
    assert abs(row.source_impedance) == pytest.approx(
        1 / (2 * math.pi * 50 * 50 * (CM + CG)), rel=1e-5, abs=0)
    assert row.loading_error == pytest.approx(abs(row.voltage) / abs(row.unloaded) - 1,
                                              rel=1e-12, abs=0)
    assert row.remark.startswith("capacitive; falls to")


def test_a_low_impedance_instrument_adds_its_current_to_earth_to_the_residual() -> None:
    # From the line itself to earth: 230 V over 3 kΩ is 76.7 mA, and all of it returns by earth.
    row = row_of(run_of(50.0), INSTRUMENTS["low-impedance"], Pair("live@near"))
    assert abs(row.residual_added) * 1e3 == pytest.approx(76.7, rel=0.05 / 76.7, abs=0)
    # From line to neutral the same current comes back by the neutral.
    neutral = row_of(run_of(50.0), INSTRUMENTS["low-impedance"], Pair("live@near", "N"))
    assert abs(neutral.current) * 1e3 == pytest.approx(76.7, rel=0.05 / 76.7, abs=0)
    assert abs(neutral.residual_added) < 1e-9 * abs(neutral.current)


def test_the_sheet_agrees_with_a_solve_that_has_the_instrument_built_in() -> None:
    tool = INSTRUMENTS["digital-10M"]
    burden = tool.ranges[0].burden
    built = run_of(80.0, far={"spare": Through(burden, "earth")})
    row = row_of(run_of(80.0), tool)
    assert abs(row.voltage) == pytest.approx(abs(built.voltage("spare@far")), rel=1e-9, abs=0)
    assert abs(row.residual_added) == pytest.approx(
        abs(built.residual - run_of(80.0).residual), rel=1e-6, abs=0)


def test_a_moving_coil_meter_settles_on_the_range_that_holds_its_own_reading() -> None:
    # 1 kΩ/V on 15.24 m: unloaded 37.8 V would ask for the 50 V range (50 kΩ), which pulls it down
    # to 0.7 V; so the 10 V range (10 kΩ) holds it, and shows 0.14 V.
    meter = moving_coil("m", "m", ohm_per_volt=1e3, full_scales=[10.0, 50.0, 250.0])
    row = row_of(run_of(15.24), meter)
    by_hand = 230 * CM / abs(CM + CG - 1j / (2 * math.pi * 50 * 15.24 * 10e3))
    assert abs(row.voltage) == pytest.approx(by_hand, rel=1e-5, abs=0)
    # On the line the whole 230 V stays, and only the 250 V range holds it.
    line = row_of(run_of(15.24), meter, Pair("live@near"))
    assert abs(line.current) == pytest.approx(230 / 250e3, rel=1e-9, abs=0)


def test_the_band_holds_the_limits_of_inputs_burden_and_accuracy() -> None:
    tool = custom_instrument("t", "t", resistance=10e6, percent=0.01, counts=3, resolution=0.1,
                             tolerance=0.1)
    low = Run(PAIR, 50.0, Supply(230.0, 50.0), {"live": Driven("L")}, {}, (7e-3, 7e-3),
              capacitance=0.5 * MATRIX)
    (row,) = reading_sheet(run_of(50.0), [tool], [FAR], low=low).rows

    def loaded(capacitance: float, resistance: float) -> float:
        x = 1 / (2 * math.pi * 50 * 50 * capacitance)
        return 230 * CM / (CM + CG) * resistance / math.hypot(resistance, x)

    least = loaded(0.5 * (CM + CG), 9e6)
    most = loaded(CM + CG, 11e6)
    assert row.low.text == f"{least - 0.01 * least - 0.3:.1f} V"
    assert row.high.text == f"{most + 0.01 * most + 0.3:.1f} V"


def test_an_indicator_may_light_within_its_tolerance() -> None:
    tester = custom_instrument("t", "t", "indicator", resistance=200e3, threshold=230.0,
                               percent=0.15)
    row = row_of(run_of(50.0), tester, Pair("live@near"))
    assert (row.reading.text, row.low.text, row.high.text) == ("lit", "not lit", "lit")


def test_a_non_contact_detector_has_rows_only_with_earth() -> None:
    sheet = reading_sheet(run_of(50.0), [INSTRUMENTS["proximity"]],
                          [FAR, Pair("live@far", "spare@far")])
    assert [r.pair for r in sheet.rows] == [FAR]
    assert sheet.rows[0].current == 0


def test_a_body_model_shows_its_current() -> None:
    row = row_of(run_of(200.0), INSTRUMENTS["body"])
    # The model's 2 kΩ hardly load the source: the current is ωCm V l = 181 µA.
    assert row.reading.text == "181 µA"


def test_usual_pairs_leave_out_what_is_one_node() -> None:
    pairs = list(usual_pairs(run_of(50.0)))
    assert Pair("live@near") in pairs
    assert Pair("spare@near", "N") in pairs  # no conductor brings the neutral
    assert Pair("spare@near", "L") not in pairs  # the live conductor is the line
    bonded = run_of(50.0, far={"spare": Bonded("earth")})
    assert Pair("spare@far") not in list(usual_pairs(bonded))
    assert len(pairs) == len(set(pairs))


def test_length_curve_reaches_from_nothing_to_the_unloaded_voltage() -> None:
    tool = custom_instrument("t", "t", resistance=10e6)
    lengths = np.array([0.3048, 15.24, 50.0, 500.0])
    volts = length_curve(run_of(50.0), FAR, tool, lengths)
    by_hand = 230 * CM / np.abs(CM + CG - 1j / (2 * np.pi * 50 * lengths * 10e6))
    np.testing.assert_allclose(volts, by_hand, rtol=1e-5)


def test_loading_curve_is_the_divider() -> None:
    ohms = np.geomspace(1e3, 1e9, 7)
    volts = loading_curve(run_of(50.0), FAR, ohms)
    by_hand = 230 * CM / np.abs(CM + CG - 1j / (2 * np.pi * 50 * 50 * ohms))
    np.testing.assert_allclose(volts, by_hand, rtol=1e-5)


@pytest.mark.parametrize(("tools", "pairs", "message"), [
    ([], None, "at least one is needed"),
    (["digital-10M", "digital-10M"], None, "each key only once"),
    (["digital-10M"], [Pair("spar@far")], 'did you mean "spare@far"'),
    (["digital-10M"], [Pair("live@near", "L")], "are the same node"),
])
def test_refusals(tools: list[str], pairs: list[Pair] | None, message: str) -> None:
    with pytest.raises(Refused, match=message):
        reading_sheet(run_of(50.0), [INSTRUMENTS[t] for t in tools], pairs)


def test_no_voltage_gives_no_loading_error() -> None:
    run = run_of(50.0, far={"spare": Bonded("earth")})
    row = row_of(run, custom_instrument("t", "t", resistance=1e6), Pair("N", "live@near"))
    assert math.isfinite(row.loading_error)
    silent = Run(PAIR, 50.0, Supply(230.0, 50.0), {"spare": Bonded("N")}, {}, (7e-3, 7e-3),
                 capacitance=MATRIX)
    quiet = row_of(silent, custom_instrument("t", "t", resistance=1e6), Pair("live@far"))
    assert math.isnan(quiet.loading_error)
    assert quiet.remark == "at one potential: nothing to read"


def test_burden_is_kept_out_of_the_run() -> None:
    run = run_of(50.0)
    before = run.voltage("spare@far")
    run.connect(Burden(3e3), "spare@far")
    assert run.voltage("spare@far") == before


def test_ranges_are_tried_from_the_largest_down() -> None:
    # Both the 50 V and the 250 V range could hold this source: 100 V behind 1/(ωC), shown as 93 V
    # on 2.5 MΩ and as 47 V on 500 kΩ. A meter used from the top stays on the 250 V range.
    meter = moving_coil("m", "m", ohm_per_volt=10e3, full_scales=[50.0, 250.0])
    length = 1 / (2 * math.pi * 50 * (CM + CG) * 940e3)
    voltage = 100.0 * (CM + CG) / CM
    row = row_of(run_of(length, voltage=voltage), meter)
    on_250 = 100.0 * 2.5e6 / math.hypot(2.5e6, 940e3)
    on_50 = 100.0 * 500e3 / math.hypot(500e3, 940e3)
    assert on_50 < 50.0 < on_250
    assert abs(row.voltage) == pytest.approx(on_250, rel=1e-5, abs=0)
