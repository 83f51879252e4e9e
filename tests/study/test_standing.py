"""Standing current: sums of phasors against published values, and draws against distributions."""

from __future__ import annotations

import cmath
import math

import numpy as np
import pytest
from scipy import stats

from unlanded.errors import Refused
from unlanded.physics.section import Conductor, Plane, Section
from unlanded.study.ends import Bonded, Driven
from unlanded.study.run import Run
from unlanded.study.standing import (
    Leak,
    bank,
    capacitive_leak,
    capacitive_residual,
    drawn,
    equipment_leak,
    resistive_leak,
    run_leak,
    without_line,
)
from unlanded.study.supply import Supply

MAINS = Supply(230.0, 50.0)
THREE = Supply(230.0, 50.0, phases=3)


def total(leaks, supply, points=None):
    rows = bank(leaks, supply)
    points = np.full((1, rows.dimensions), 0.5) if points is None else points
    return drawn(rows, points)[0].sum(axis=2)


@pytest.mark.parametrize(
    ("leak", "milliamperes", "half_digit"),
    [
        # Worked out independently: 100 pF/m reaches 9 mA, 30 % of 30 mA, at 1,245.6 m.
        (capacitive_leak("cable", 1245.6 * 100e-12, MAINS, line="L"), 9.000, 0.0005),
        # Published (trade body): 10 m of house wiring is 1 nF and 73 µA; the exact value is 72.3.
        (capacitive_leak("house", 1e-9, MAINS, line="L"), 0.0723, 0.00005),
        # 3 kΩ on 230 V draws 76.7 mA (a low-impedance meter, line to earth).
        (resistive_leak("meter", 3e3, MAINS, line="L"), 76.7, 0.05),
        # A reported case: 37 kΩ of all circuits together is 6.2 mA.
        (resistive_leak("damp", 37e3, MAINS, line="L"), 6.2, 0.05),
    ],
)
def test_single_leaks(leak, milliamperes, half_digit):
    found = 1e3 * abs(total([leak], MAINS)[0, 0])
    assert found == pytest.approx(milliamperes, rel=half_digit / milliamperes, abs=0)


def test_neutral_current_of_unequal_lines_as_a_textbook_has_it():
    # Hughes, Electrical and Electronic Technology, three-phase chapter (from memory): 10, 8 and
    # 5 kW on the lines of a 400 V system, unity power factor: 43.3, 34.6, 21.65 A, neutral 18.9 A.
    volts = 400 / math.sqrt(3)
    supply = Supply(volts, 50.0, phases=3)
    leaks = [resistive_leak(line, volts**2 / watts, supply, line=line)
             for line, watts in (("L1", 10e3), ("L2", 8e3), ("L3", 5e3))]
    lines = [abs(leak.phasors[1]) for leak in leaks]
    for found, printed, half in zip(lines, (43.3, 34.6, 21.65), (0.05, 0.05, 0.005), strict=True):
        assert found == pytest.approx(printed, rel=half / printed, abs=0)
    assert abs(total(leaks, supply)[0, 0]) == pytest.approx(18.9, rel=0.05 / 18.9, abs=0)


def test_three_balanced_lines_cancel_and_a_lost_one_leaves_one_lines_current():
    c, v = 50e-9, 230.0
    lines = [v * cmath.exp(-2j * math.pi * k / 3) for k in range(3)]
    one = 2 * math.pi * 50 * c * v
    whole = capacitive_residual(capacitances=[c] * 3, voltages=lines, frequency=50.0)
    assert abs(whole) < 1e-15 * one * 10
    lost = capacitive_residual(capacitances=[c] * 3, voltages=[*lines[:2], 0], frequency=50.0)
    assert abs(lost) == pytest.approx(one, rel=1e-12, abs=0)


def test_a_balanced_filter_cancels_at_the_first_order_and_adds_at_the_third():
    supply = Supply(230.0, 50.0, phases=3, harmonics={3: 0.05, 5: 0.04})
    leak = capacitive_leak("filter", 1e-6, supply, line="balanced")
    first, third, fifth = np.abs(total([leak], supply)[:, 0])
    assert first < 1e-12 * abs(leak.phasors[1])
    assert third == pytest.approx(3 * abs(leak.phasors[3]), rel=1e-12, abs=0)
    assert fifth < 1e-12 * abs(leak.phasors[5])


def test_resistive_and_capacitive_parts_add_in_quadrature():
    parts = [capacitive_leak("c", 40e-9, MAINS, line="L"),
             resistive_leak("r", 1e5, MAINS, line="L")]
    expected = math.hypot(2 * math.pi * 50 * 40e-9 * 230, 230 / 1e5)
    assert abs(total(parts, MAINS)[0, 0]) == pytest.approx(expected, rel=1e-12, abs=0)


def three_cores(**near):
    cores = tuple(Conductor(name, x, 0.01, 1e-3) for name, x in
                  (("one", -0.005), ("two", 0.0), ("three", 0.005)))
    return Run(Section(cores, Plane(0.0)), 20.0, THREE,
               {n: Driven(line) for n, line in near.items()}, {}, (7e-3,) * 3)


def test_the_runs_own_matrix_gives_its_residual():
    # The sum of jωC_ij·V_j over all live cores, worked out here from the matrix alone.
    run = three_cores(one="L1", two="L2", three="L3")
    volts = np.array([THREE.phasor(line) for line in THREE.lines])
    by_hand = 2j * math.pi * 50 * run.length * (run.matrix @ volts).sum()
    # Series impedance, left out by hand, is a few milliohms against megohms.
    assert run_leak("run", run).phasors[1] == pytest.approx(by_hand, rel=1e-6, abs=0)
    assert abs(by_hand) > 0  # cores that are not alike do not cancel


def test_a_lost_line_leaves_its_core_open():
    run = three_cores(one="L1", two="L2", three="L3")
    lost = without_line(run, "L2")
    floating = lost.voltage("two@near")
    c = run.matrix[1]
    v = [THREE.phasor("L1"), THREE.phasor("L3")]
    # A floating core takes no charge: Σ C_2j·V_j = 0.
    assert floating == pytest.approx(-(c[0] * v[0] + c[2] * v[1]) / c[1], rel=1e-6, abs=0)
    assert abs(lost.residual) > abs(run.residual)
    with pytest.raises(Refused, match="line: is not one of the supply; given L4"):
        without_line(run, "L4")


def test_run_leak_takes_its_limits_from_the_ends_of_the_inputs():
    run = three_cores(one="L1")
    low, high = (Run(run.section, 20.0, THREE, run.near, {}, run.resistance, k * run.matrix)
                 for k in (0.7, 1.4))
    leak = run_leak("run", run, low, high)
    assert (leak.low, leak.high) == pytest.approx((0.7, 1.4), rel=1e-6, abs=0)


def test_draws_follow_their_distributions():
    u = np.linspace(0.0005, 0.9995, 1000)
    leak = equipment_leak("kit", 1e-3, None, low=0.5, high=2.0, line="L")
    rows = bank([leak], MAINS)
    points = np.full((1000, rows.dimensions), 0.5)
    points[:, rows.columns[0, 0]] = u
    peer = stats.triang(0.5 / 1.5, loc=0.5e-3, scale=1.5e-3)
    np.testing.assert_allclose(np.abs(drawn(rows, points)[0][0, :, 0]), peer.ppf(u), rtol=1e-9)
    points = np.full((1000, rows.dimensions), 0.5)
    points[:, rows.columns[0, 1]] = u
    np.testing.assert_allclose(np.angle(drawn(rows, points)[0][0, :, 0]), u * math.pi / 2,
                               rtol=1e-9)


@pytest.mark.parametrize(("count", "use"), [(1, 0.3), (6, 0.7), (40, 0.05), (3, 0.0), (3, 1.0)])
def test_number_on_is_binomial(count, use):
    leak = resistive_leak("kit", 1e5, MAINS, line="L", count=count, use=use)
    rows = bank([leak], MAINS)
    u = np.linspace(0.0005, 0.9995, 1000)
    points = np.full((1000, rows.dimensions), 0.5)
    points[:, rows.columns[0, 3]] = u
    assert drawn(rows, points)[1][:, 0].mean() == pytest.approx(
        stats.binom(count, use).ppf(u).mean(), rel=1e-12, abs=0)


def test_pieces_shared_out_over_lines():
    leak = resistive_leak("kit", 1e5, THREE, line="spread", count=7)
    rows = bank([leak], THREE)
    assert rows.count.tolist() == [3, 2, 2]
    # 3, 2 and 2 equal phasors leave one of them.
    assert abs(total([leak], THREE)[0, 0]) == pytest.approx(230 / 1e5, rel=1e-12, abs=0)


def test_an_unknown_line_is_any_of_the_supply():
    leak = resistive_leak("kit", 1e5, THREE)
    rows = bank([leak], THREE)
    points = np.full((3, rows.dimensions), 0.5)
    points[:, rows.columns[0, 2]] = [0.1, 0.5, 0.9]
    found = drawn(rows, points)[0][0, :, 0]
    expected = [THREE.phasor(line) / 1e5 for line in THREE.lines]
    np.testing.assert_allclose(found, expected, rtol=1e-12)


def test_refusals():
    with pytest.raises(Refused, match='"kit": its line is not one of the supply'):
        bank([Leak("kit", {1: 1e-3}, "L4")], THREE)
    with pytest.raises(Refused, match='"kit", use: must be 0 to 1'):
        Leak("kit", {1: 1e-3}, use=1.01)
    with pytest.raises(Refused, match='"kit", size: must rise'):
        Leak("kit", {1: 1e-3}, low=1.01)
    with pytest.raises(Refused, match="resistance must be above 0"):
        resistive_leak("kit", 0.0, MAINS)


def test_an_earthed_core_does_not_leak():
    cores = (Conductor("hot", 0.0, 0.01, 1e-3), Conductor("cpc", 0.005, 0.01, 1e-3))
    run = Run(Section(cores, Plane(0.0)), 20.0, MAINS, {"cpc": Bonded("earth")}, {}, (7e-3,) * 2)
    assert run_leak("run", run).phasors[1] == 0
