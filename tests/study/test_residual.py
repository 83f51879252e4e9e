"""The margin: chance of a trip against closed forms and a plain Monte Carlo, limits, inverses."""

from __future__ import annotations

import math

import numpy as np
import pytest
from scipy import integrate, stats

from unlanded.errors import Refused
from unlanded.physics.section import Conductor, Plane, Section
from unlanded.reference.devices import Device
from unlanded.study.ends import Driven
from unlanded.study.residual import (
    added_pieces,
    longest_run,
    most_pieces,
    recommended_current,
    residual_margin,
)
from unlanded.study.run import Run
from unlanded.study.standing import Leak, capacitive_leak, equipment_leak, resistive_leak
from unlanded.study.supply import Supply

MAINS = Supply(230.0, 50.0)
RCD = Device(30e-3)
PEER = stats.triang(6.6 / 15, loc=15e-3, scale=15e-3)  # 0.5, 0.72 and 1.0 of 30 mA


def heater(current, **more):
    return resistive_leak("heater", 230.0 / current, MAINS, line="L", **more)


def test_recommended_share_as_printed():
    # BS 7671:2018, 531.3.2(ii) (seen): 9 mA behind 30 mA.
    assert recommended_current(RCD) == pytest.approx(9e-3, rel=1e-12, abs=0)
    assert math.isnan(recommended_current(Device(6e-3, "personnel")))


def test_chance_of_alike_loads_against_the_binomial_sum():
    count, use, one = 8, 0.6, 4e-3
    found = residual_margin(RCD, [heater(one, count=count, use=use)], MAINS)
    number = np.arange(count + 1)
    exact = float((stats.binom(count, use).pmf(number) * PEER.cdf(number * one)).sum())
    assert found.chance == pytest.approx(exact, rel=2e-3, abs=0)
    assert abs(found.chance - exact) < 5 * found.chance_error
    assert found.expected == pytest.approx(count * use * one, rel=2e-3, abs=0)
    assert found.chance_all_on == pytest.approx(float(PEER.cdf(count * one)), rel=1e-9, abs=0)
    assert found.arithmetic == pytest.approx(count * one, rel=1e-12, abs=0)


def test_chance_of_an_uncertain_size_against_quadrature():
    leak = equipment_leak("kit", 20e-3, 0.0, low=0.7, high=1.4, line="L")
    found = residual_margin(RCD, [leak], MAINS)
    size = stats.triang(0.3 / 0.7, loc=14e-3, scale=14e-3)
    exact, _ = integrate.quad(lambda i: size.pdf(i) * PEER.cdf(i), 14e-3, 28e-3,
                              points=[15e-3, 20e-3, 21.6e-3])
    assert found.chance == pytest.approx(exact, rel=1e-4, abs=0)


def test_chance_of_an_unknown_angle_against_the_closed_form():
    # Two of a, one in phase with the voltage, the other anywhere to 90°: |sum| = 2a·cos(φ/2).
    a, trips = 10e-3, 18e-3
    device = Device(30e-3, ramp_test=trips)
    leaks = [heater(a), equipment_leak("kit", a, None, line="L")]
    found = residual_margin(device, leaks, MAINS)
    exact = 2 * math.acos(trips / (2 * a)) / (math.pi / 2)
    assert found.chance == pytest.approx(exact, rel=1e-3, abs=0)
    assert found.arithmetic == pytest.approx(2 * a, rel=1e-12, abs=0)
    assert found.credible[1] < 2 * a  # the arithmetic sum overstates


def test_chance_against_plain_monte_carlo():
    leaks = [heater(6e-3, use=0.5),
             equipment_leak("desks", 1.5e-3, None, low=0.5, high=2.0, count=9, use=0.7, line="L"),
             capacitive_leak("cable", 40e-9, MAINS, line="L", low=0.7, high=1.3)]
    found = residual_margin(RCD, leaks, MAINS)
    # The same statement drawn afresh, with numpy's own distributions and a device drawn each time.
    draw = np.random.default_rng(12)
    n = 1_000_000
    desks = (draw.triangular(0.75e-3, 1.5e-3, 3e-3, n) * draw.binomial(9, 0.7, n)
             * np.exp(1j * draw.uniform(0, math.pi / 2, n)))
    cable = 1j * 2 * math.pi * 50 * 40e-9 * 230 * draw.triangular(0.7, 1.0, 1.3, n)
    residual = np.abs(6e-3 * (draw.random(n) < 0.5) + desks + cable)
    tripped = residual >= draw.triangular(15e-3, 21.6e-3, 30e-3, n)
    scatter = math.hypot(tripped.std() / math.sqrt(n), found.chance_error)
    assert abs(found.chance - tripped.mean()) < 4 * scatter
    assert scatter < 0.02 * found.chance
    assert found.expected == pytest.approx(residual.mean(), rel=2e-3, abs=0)
    assert found.credible == pytest.approx(
        tuple(np.percentile(residual, [2.5, 97.5])), rel=1e-2, abs=0)


def test_the_same_seed_gives_the_same_numbers_and_another_agrees():
    leaks = [equipment_leak("desks", 2e-3, None, low=0.5, high=2.0, count=9, use=0.7, line="L")]
    one, same, other = (residual_margin(RCD, leaks, MAINS, seed=s) for s in (1, 1, 2))
    assert one.chance == same.chance
    assert one.chance != other.chance
    assert one.chance == pytest.approx(other.chance, rel=2e-2, abs=0)


def test_margins_count_down_from_each_limit():
    found = residual_margin(RCD, [heater(7e-3)], MAINS)
    assert found.to(found.recommended) == pytest.approx((2e-3, 2e-3), rel=1e-9, abs=0)
    assert found.to(RCD.non_operating) == pytest.approx((8e-3, 8e-3), rel=1e-9, abs=0)
    assert found.chance == 0.0


def test_shares_add_up_to_the_total():
    leaks = [heater(4e-3), capacitive_leak("cable", 60e-9, MAINS, line="L")]
    found = residual_margin(RCD, leaks, MAINS)
    assert sum(s.along for s in found.shares) == pytest.approx(found.expected, rel=1e-12, abs=0)


def test_harmonics_count_by_the_devices_own_weight():
    supply = Supply(230.0, 50.0, harmonics={20: 0.1})
    leak = Leak("filter", {1: 5e-3j, 20: 8e-3j}, "L")
    plain = residual_margin(Device(30e-3, waveform="AC"), [leak], supply)
    assert plain.expected == pytest.approx(math.hypot(5e-3, 8e-3), rel=1e-12, abs=0)
    # IEC 62423 (from memory): a type B must not trip below 1.0 × rated at 1 kHz, twice 0.5.
    lighter = residual_margin(Device(30e-3, waveform="B"), [leak], supply)
    assert lighter.expected == pytest.approx(math.hypot(5e-3, 4e-3), rel=1e-12, abs=0)


def test_a_drives_fast_current_adds_as_a_square():
    drive = Leak("drive", {}, "balanced", fast=12e-3, band=(2e3, 9e3))
    supply = Supply(230.0, 50.0, phases=3)
    found = residual_margin(RCD, [drive, Leak("kit", {1: 5e-3}, "L1")], supply)
    assert found.expected == pytest.approx(13e-3, rel=1e-12, abs=0)
    # A type B must not trip below 1.0 × rated at 1 kHz (from memory): 12 mA count as 6 mA.
    slow = Leak("drive", {1: 5e-3}, "L1", fast=12e-3, band=(1e3, 1e3))
    weighted = residual_margin(Device(30e-3, waveform="B"), [slow], supply)
    assert weighted.expected == pytest.approx(math.hypot(5e-3, 6e-3), rel=1e-12, abs=0)


def test_most_pieces_is_the_last_that_fits():
    found = residual_margin(RCD, [heater(1.4e-3, count=3)], MAINS)
    assert most_pieces(found, "heater", 15e-3) == 10  # 10 × 1.4 = 14 mA, 11 × 1.4 = 15.4 mA
    assert most_pieces(found, "heater", 9e-3) == 6
    many = added_pieces(found, "heater", [0, 7, 8])
    assert [round(m.expected * 1e3, 6) for m in many] == [4.2, 14.0, 15.4]
    with pytest.raises(Refused, match="leak: is not behind this device"):
        added_pieces(found, "lamp", [1])


def test_longest_run_by_hand():
    wire = Section((Conductor("hot", 0.0, 0.01, 1e-3),), Plane(0.0))
    run = Run(wire, 100.0, MAINS, {"hot": Driven("L")}, {}, (7e-3,),
              capacitance=np.array([[100e-12]]))
    # Worked out independently: 1,245.6 m at 100 pF/m, 230 V, 50 Hz, for 9 mA.
    assert longest_run(run, 9e-3) == pytest.approx(1245.6, rel=0.05 / 1245.6, abs=0)
    resistive = 4e-3 + 0j
    left = longest_run(run, 9e-3, others=resistive)
    assert math.hypot(4e-3, left * abs(run.residual) / 100) == pytest.approx(9e-3, rel=1e-6, abs=0)
    per_metre = run.residual / 100
    in_phase = longest_run(run, 9e-3, others=4e-3 * per_metre / abs(per_metre))
    assert in_phase == pytest.approx(5e-3 / abs(per_metre), rel=1e-9, abs=0)
    opposed = longest_run(run, 9e-3, others=-4e-3 * per_metre / abs(per_metre))
    assert opposed == pytest.approx(13e-3 / abs(per_metre), rel=1e-9, abs=0)
    assert longest_run(run, 9e-3, others=10e-3) == 0.0


def test_refuses_nothing_behind():
    with pytest.raises(Refused, match="nothing stands behind the device"):
        residual_margin(RCD, [], MAINS)
