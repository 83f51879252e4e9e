"""Each inverse against its forward calculation, and worked cases of the trade."""

from __future__ import annotations

import math

import numpy as np
import pytest

from unlanded.errors import Refused
from unlanded.physics.burden import Burden
from unlanded.physics.closed_forms import wire_over_plane
from unlanded.physics.section import Conductor, Plane, Section
from unlanded.study.batch import Ports, RunBatch
from unlanded.study.ends import Bonded, Driven
from unlanded.study.readings import Pair
from unlanded.study.run import Run
from unlanded.study.sizing import (
    Met,
    bleeder,
    by_capacitance,
    by_length,
    by_resistance,
    by_run,
    current_through,
    meter_window,
    most_circuits,
    residual_current,
    solve_for,
    voltage_on,
)
from unlanded.study.spread import within
from unlanded.study.supply import Supply
from unlanded.study.uncertain import UncertainRun

SECTION = Section((Conductor("live", 0, 0.02, 1e-3), Conductor("spare", 0.01, 0.02, 1e-3)),
                  Plane(0))
CM, CG = 12.5e-12, 63.6e-12
RUN = Run(SECTION, 50.0, Supply(230.0, 50.0), {"live": Driven("L")}, {}, (7e-3, 7e-3),
          capacitance=np.array([[CM + CG, -CM], [-CM, CM + CG]]))
FAR = Pair("spare@far")
BODY = Burden(2000.0)


def test_length_for_a_reading_is_that_of_the_divider() -> None:
    tool = Burden(10e6)
    met = solve_for(by_length(RUN, voltage_on(FAR, tool)), 20.0, low=0.1, high=1000.0)
    ((start, length),) = met.stretches
    assert start == 0.1
    # |V| = U Cm / |Cm + Cg − j / (ω l R)| solved for l by hand.
    imaginary = math.sqrt((230 * CM / 20.0) ** 2 - (CM + CG) ** 2)
    assert length == pytest.approx(1 / (2 * math.pi * 50 * 10e6 * imaginary), rel=1e-5, abs=0)
    forward = by_length(RUN, voltage_on(FAR, tool))(np.array([length]))
    assert forward[0] == pytest.approx(20.0, rel=1e-6, abs=0)


@pytest.mark.parametrize(("quantity", "limit"), [
    (current_through(FAR, BODY), 100e-6), (residual_current, 2e-3), (voltage_on(FAR, BODY), 0.1)])
def test_inverse_and_forward_agree(quantity: object, limit: float) -> None:
    result = by_length(RUN, quantity)  # type: ignore[arg-type]
    (length,) = solve_for(result, limit, low=1.0, high=3000.0).crossings
    assert result(np.array([length]))[0] == pytest.approx(limit, rel=1e-6, abs=0)


def test_spacing_and_height() -> None:
    def at_spacing(s: float) -> Run:
        section = Section((Conductor("live", 0, 0.05, 1e-3), Conductor("spare", s, 0.05, 1e-3)),
                          Plane(0))
        return Run(section, 50.0, Supply(230.0, 50.0), {"live": Driven("L")}, {}, (7e-3, 7e-3))

    result = by_run(at_spacing, voltage_on(FAR))
    (spacing,) = solve_for(result, 30.0, low=0.005, high=0.2, scan=17).crossings
    assert abs(at_spacing(spacing).voltage("spare@far")) == pytest.approx(30.0, rel=1e-6, abs=0)

    def at_height(h: float) -> Run:
        section = Section((Conductor("live", 0, h, 1e-3),), Plane(0))
        return Run(section, 50.0, Supply(230.0, 50.0), {"live": Driven("L")}, {}, (7e-3,))

    limit = 50e-6
    met = solve_for(by_run(at_height, residual_current), limit, low=0.002, high=1.0, scan=17)
    ((height, top),) = met.stretches
    assert top == 1.0
    per_metre = wire_over_plane(radius=1e-3, height=height)
    assert 2 * math.pi * 50 * 50 * 230 * float(per_metre) == pytest.approx(limit, rel=1e-3, abs=0)


def test_with_a_coverage_the_answer_is_the_quantile() -> None:
    # V on a low impedance goes as the length: 95 % of draws of a supply within ±10 % stay under
    # 1.09 times the nominal, so the length is 1/1.09 of it.
    uncertain = UncertainRun(RUN, supply=within(1.0, 0.1))
    lengths = [solve_for(by_length(uncertain, voltage_on(FAR, BODY), coverage=c), 0.1, low=1.0,
                         high=3000.0, scan=33).crossings[0] for c in (None, 0.95)]
    assert lengths[0] / lengths[1] == pytest.approx(1.09, rel=2e-3, abs=0)
    sized = by_run(lambda x: UncertainRun(RUN, supply=within(x, 0.1)), voltage_on(FAR),
                   coverage=0.95)(np.array([1.0]))
    assert sized[0] == pytest.approx(1.09 * abs(RUN.voltage("spare@far")), rel=2e-3, abs=0)


def test_answers_say_nowhere_everywhere_and_two() -> None:
    assert solve_for(lambda x: 0 * x + 2, 1.0, low=1.0, high=9.0).nowhere
    assert solve_for(lambda x: 0 * x + 2, 3.0, low=1.0, high=9.0).everywhere
    two = solve_for(lambda x: (x - 3) ** 2, 1.0, low=1.0, high=9.0, at_most=False)
    assert two.crossings == pytest.approx((2.0, 4.0), rel=1e-9, abs=0)
    assert two.words("{:.3g} m".format) == "up to 2 m and from 4 m"
    assert Met(((2.0, 4.0),), 1.0, 9.0).words("{:g}".format) == "from 2 to 4"
    assert Met(((1.0, 9.0),), 1.0, 9.0).words("{:g}".format) == "every value from 1 to 9"


def test_two_crossings_between_two_points_of_the_scan_are_found() -> None:
    narrow = solve_for(lambda x: (x - 3.01) ** 2, 1e-6, low=1.0, high=9.0, scan=9, scale="even")
    assert narrow.crossings == pytest.approx((3.009, 3.011), rel=1e-6, abs=0)


# 114 V open through 91 nF at 60 Hz into a 10 kΩ input: a published case (1,800 ft of conveyor
# wiring, 120 V). Published advice compared: 3.9 kΩ, 10 W works; 15 to 47 kΩ does not.
INPUT = Burden(10e3)


def conveyor() -> Ports:
    z = np.array([1 / (2j * math.pi * 60 * 91e-9)])
    y = complex(INPUT.admittance(60.0))
    return Ports(114 / (1 + y * z), z / (1 + y * z), np.ones(1, dtype=complex))


@pytest.mark.parametrize(("limit", "kilohms", "watts"), [
    (20, 10.8, 1.3), (10, 3.45, 4.2), (7, 2.18, 6.6), (5, 1.47, 9.8)])
def test_bleeder_of_the_conveyor(limit: float, kilohms: float, watts: float) -> None:
    # Worked by R = V_th / (ω √((C V)² − (C V_th)²)) beside the input's 10 kΩ (circuit theory).
    found = bleeder(by_resistance(conveyor()), limit, live_voltage=120.0)
    assert found is not None
    omega_c = 2 * math.pi * 60 * 91e-9
    whole = limit / (omega_c * math.sqrt(114**2 - limit**2))
    assert found.largest == pytest.approx(1 / (1 / whole - 1e-4), rel=1e-6, abs=0)
    assert abs(found.largest - 1e3 * kilohms) <= (5 if kilohms < 10 else 50) + 0.1
    assert abs(120**2 / found.largest - watts) <= 0.05
    assert found.value <= found.largest
    assert found.result <= limit
    assert found.power == 120**2 / found.value
    assert found.power_rating >= 2 * found.power
    assert found.voltage_rating == 200.0


def test_published_advice_on_the_conveyor() -> None:
    # A page's 3.9 kΩ leaves 10.9 V; another's 15 to 47 kΩ leaves 23 to 31 V, above the 20 V at
    # which such an input is sure to be off.
    left = by_resistance(conveyor())(np.array([3.9e3, 15e3, 47e3]))
    for value, printed in zip(left, (10.9, 23.0, 31.0), strict=True):
        assert abs(value - printed) <= 0.05


def test_dummy_resistor_of_a_controllers_manual() -> None:
    # A published case (a programmable controller's manual, outputs that leak): 3 mA into a load of
    # 6 kΩ at 100 V that lets go at 1.5 mA. Printed: under 6 kΩ, 1.7 W, a 5 W resistor.
    load = np.array([6e3 + 0j])
    leaking = Ports(3e-3 * load, load, np.ones(1, dtype=complex))
    found = bleeder(by_resistance(leaking), 1.5e-3 * 6e3, live_voltage=100.0)
    assert found is not None
    assert found.largest == pytest.approx(6e3, rel=1e-6, abs=0)
    assert abs(100**2 / found.largest - 1.7) <= 0.05
    assert found.power_rating == 5.0


def test_bleeder_that_does_not_exist_or_is_not_needed() -> None:
    stiff = Ports(np.array([230 + 0j]), np.array([0.01 + 0j]), np.ones(1, dtype=complex))
    assert bleeder(by_resistance(stiff), 10.0, live_voltage=230.0) is None
    found = bleeder(by_resistance(conveyor()), 40.0, live_voltage=120.0)
    assert found is not None
    assert found.largest == 10e6  # any value up to the largest searched


def test_capacitance_across_the_pair() -> None:
    port = RunBatch.of(RUN).port(FAR.a)
    result = by_capacitance(port, frequency=50.0)
    (found,) = solve_for(result, 5.0, low=1e-12, high=1e-6).crossings
    # 230 Cm l / ((Cm + Cg) l + C) = 5 V.
    assert found == pytest.approx(50 * (230 * CM / 5 - CM - CG), rel=1e-4, abs=0)


def test_how_many_circuits() -> None:
    each = 0.72e-3j
    count = most_circuits(each, 9e-3, standing=4e-3 + 0j)
    assert abs(4e-3 + count * each) <= 9e-3 < abs(4e-3 + (count + 1) * each)
    assert most_circuits(each, 9e-3, standing=10e-3) == -1
    assert most_circuits(1e-3 + 0j, 5e-3) == 5  # just at the limit counts
    with pytest.raises(Refused, match="brings no current"):
        most_circuits(0j, 1e-3)


def test_the_window_of_meters() -> None:
    port = RunBatch.of(RUN).port(FAR.a)
    window = meter_window(port, FAR, RUN, collapse_to=5.0, trip_current=15e-3,
                          source_resistance=1000.0, loading_error=0.05)
    # The coupled 37.8 V behind 3.8 nF falls to 5 V on R = X / √((37.8/5)² − 1).
    open_volts, x = 230 * CM / (CM + CG), 1 / (2 * math.pi * 50 * 50 * (CM + CG))
    assert window.most == pytest.approx(x / math.sqrt((open_volts / 5) ** 2 - 1), rel=1e-5, abs=0)
    assert window.trip == pytest.approx(230 / 15e-3, rel=1e-12, abs=0)
    assert window.loading == pytest.approx(19e3, rel=1e-12, abs=0)
    assert (window.least, window.empty, window.alternatives) == (window.loading, False, ())


def test_an_empty_window_names_the_alternatives() -> None:
    port = RunBatch.of(RUN).port(FAR.a)
    window = meter_window(port, FAR, RUN, collapse_to=0.5, source_resistance=100e3)
    assert window.empty
    assert any("lock the neighbours" in a for a in window.alternatives)
    assert any("known resistor" in a for a in window.alternatives)
    assert any("other end" in a for a in window.alternatives)


def test_the_ends_of_the_window() -> None:
    stiff = Ports(np.array([230 + 0j]), np.array([1e-3 + 0j]), np.ones(1, dtype=complex))
    assert meter_window(stiff, FAR, RUN, collapse_to=5.0).most == 0.0
    weak = Ports(np.array([3 + 0j]), np.array([1e6 + 0j]), np.ones(1, dtype=complex))
    assert math.isinf(meter_window(weak, FAR, RUN, collapse_to=5.0).most)
    # Between line and neutral nothing returns by earth: no trip bound.
    bonded = Run(SECTION, 50.0, Supply(230.0, 50.0), {"live": Driven("L")},
                 {"spare": Bonded("N")}, (7e-3, 7e-3), capacitance=RUN.matrix)
    assert meter_window(weak, Pair("live@far", "spare@far"), bonded, collapse_to=5.0,
                        trip_current=15e-3).trip == 0.0


@pytest.mark.parametrize(("make", "message"), [
    (lambda: solve_for(lambda x: x, 1.0, low=0.0, high=1.0), "above 0 on a log scale"),
    (lambda: solve_for(lambda x: x / 0, 1.0, low=2.0, high=1.0), "low must be below high"),
    (lambda: solve_for(lambda x: x * math.nan, 1.0, low=1.0, high=2.0), "must be finite"),
    (lambda: meter_window(conveyor(), FAR, RUN, collapse_to=0.0), "limits must be above 0"),
])
def test_refusals(make: object, message: str) -> None:
    with pytest.raises(Refused, match=message):
        make()  # type: ignore[operator]
