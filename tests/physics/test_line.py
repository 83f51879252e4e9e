"""The exact line against its closed form and its differential equation; how well π sections do."""

from __future__ import annotations

import numpy as np
import pytest
from numpy.testing import assert_allclose

from exact_line import ladder_chain, port_admittance, terminal_voltages
from unlanded.errors import Refused
from unlanded.physics.capacitance import capacitance_matrix
from unlanded.physics.inductance import (
    earth_return_distance,
    earth_return_resistance,
    inductance_matrix,
)
from unlanded.physics.layouts import Core, laid_up
from unlanded.physics.line import LUMPING_ERROR, MOST_SECTIONS, exact_chain, sections_needed
from unlanded.physics.section import Pipe, Plane, Section

# 1.5 mm² under PVC, in a steel conduit, on a tray, and hanging 1 m above a floor.
CORES = laid_up(("a", "b", "c", "d"), Core(0.69e-3, 1.39e-3, 5.0))
SURROUNDS = {"conduit": Pipe(6e-3), "tray": Plane(-6e-3), "hanging": Plane(-1.0)}


def cable(surround, frequency):
    """Series impedance and shunt admittance per metre of four cores."""
    section = Section(CORES, SURROUNDS[surround])
    distance = earth_return_distance(resistivity=100.0, frequency=frequency)
    omega = 2 * np.pi * frequency
    inductance = inductance_matrix(section, return_distance=distance)
    resistance = 12.1e-3 * np.eye(4) + earth_return_resistance(frequency=frequency)
    return resistance + 1j * omega * inductance, 1j * omega * capacitance_matrix(section)


@pytest.mark.parametrize("length", [1.0, 5e3, 200e3])
def test_single_line_is_hyperbolic(length):
    z, y = 0.1 + 0.4j * 1e-3 * 314, 1e-9 + 1j * 314 * 60e-12
    gamma, characteristic = np.sqrt(z * y), np.sqrt(z / y)
    cosh, sinh = np.cosh(gamma * length), np.sinh(gamma * length)
    chain = exact_chain(np.array([[z]]), np.array([[y]]), length=length)
    assert_allclose(chain, [[cosh, -characteristic * sinh], [-sinh / characteristic, cosh]],
                    rtol=1e-12, atol=0)


def test_lossless_line_rises_toward_its_open_end():
    # Ferranti: V_far / V_near = 1 / cos(β l).
    length, wave = 3e3, 2 * np.pi * 2500 * np.sqrt(0.25e-6 * 111e-12)
    z, y = 2j * np.pi * 2500 * 0.25e-6, 2j * np.pi * 2500 * 111e-12
    ports = port_admittance(exact_chain(np.array([[z]]), np.array([[y]]), length=length))
    rise = terminal_voltages(ports, {0: 1.0})[1]
    assert_allclose(rise, 1 / np.cos(wave * length), rtol=1e-12, atol=0)


@pytest.mark.parametrize("surround", SURROUNDS)
def test_chain_solves_the_lines_equations(surround):
    from scipy.integrate import solve_ivp

    series, shunt = cable(surround, 2500.0)
    length = 3e3
    # Volts and milliamperes per column, so that the integrator's tolerance fits both.
    scale = np.diag(np.repeat([1.0, 1e-3], 4))
    system = np.block([[np.zeros((4, 4)), -series], [-shunt, np.zeros((4, 4))]])
    scaled = np.linalg.inv(scale) @ system @ scale
    walked = solve_ivp(lambda _, u: (scaled @ u.reshape(8, 8)).ravel(), (0.0, length),
                       np.eye(8, dtype=complex).ravel(), method="DOP853", rtol=1e-11, atol=1e-13)
    chain = np.linalg.inv(scale) @ exact_chain(series, shunt, length=length) @ scale
    assert_allclose(walked.y[:, -1].reshape(8, 8), chain, rtol=1e-7, atol=0)


def test_chain_of_two_lengths_is_the_product():
    series, shunt = cable("conduit", 2500.0)
    whole = exact_chain(series, shunt, length=3e3)
    parts = exact_chain(series, shunt, length=2e3) @ exact_chain(series, shunt, length=1e3)
    assert_allclose(parts, whole, rtol=1e-10, atol=0)


def test_line_is_reciprocal():
    ports = port_admittance(exact_chain(*cable("tray", 2500.0), length=4e3))
    assert_allclose(ports, ports.T, rtol=1e-9, atol=0)


# The terminals of a neighbour fed at the near end, one core earthed there, two open at both.
HELD = {0: 230.0, 1: 0.0}
CASES = [(50.0, 10.0), (50.0, 400.0), (50.0, 5e3), (50.0, 40e3),
         (2500.0, 20.0), (2500.0, 400.0), (2500.0, 2e3), (2500.0, 5e3)]


def terminals(chain):
    """All voltages, and all currents, at both ends."""
    ports = port_admittance(chain)
    voltages = terminal_voltages(ports, HELD)
    currents = ports @ voltages
    return voltages, currents[list(HELD)]


@pytest.mark.parametrize("surround", SURROUNDS)
@pytest.mark.parametrize(("frequency", "length"), CASES)
def test_sections_keep_their_promise(surround, frequency, length):
    series, shunt = cable(surround, frequency)
    count = sections_needed(series[None], shunt[None], length=length)
    exact = terminals(exact_chain(series, shunt, length=length))
    lumped = terminals(ladder_chain(series, shunt, length=length, sections=count))
    fine = terminals(ladder_chain(series, shunt, length=length, sections=100))
    for value, true, ladder in zip(lumped, exact, fine, strict=True):
        largest = np.abs(true).max()
        assert np.abs(value - true).max() <= LUMPING_ERROR * largest
        assert np.abs(value - ladder).max() <= LUMPING_ERROR * largest


def test_promise_is_not_bought_dearly():
    # At 2.5 kHz over 5 km, half the sections would break it for the self-terms of B.
    series, shunt = cable("conduit", 2500.0)
    count = sections_needed(series[None], shunt[None], length=5e3)
    assert 20 < count <= MOST_SECTIONS
    exact = terminals(exact_chain(series, shunt, length=5e3))[1]
    half = terminals(ladder_chain(series, shunt, length=5e3, sections=count // 2))[1]
    assert np.abs(half - exact).max() > LUMPING_ERROR * np.abs(exact).max()


def test_error_falls_as_the_square_of_the_sections():
    series, shunt = cable("conduit", 2500.0)
    exact = terminals(exact_chain(series, shunt, length=2e3))[0]
    errors = [np.abs(terminals(ladder_chain(series, shunt, length=2e3, sections=k))[0] - exact)
              .max() for k in (10, 20)]
    assert errors[0] / errors[1] == pytest.approx(4.0, rel=0.01, abs=0)


def test_the_worst_of_several_frequencies_decides():
    both = [np.stack(pair) for pair in zip(cable("tray", 50.0), cable("tray", 2500.0), strict=True)]
    alone = sections_needed(*(m[1:] for m in both), length=2e3)
    assert sections_needed(*both, length=2e3) == alone > 1


def test_refused_just_past_the_most_sections():
    # θ = 0.01 per metre²: √(θ / 6e-4) sections, so 50 reach to 12.247 m.
    series, shunt = np.array([[[0.1j]]]), np.array([[[0.1j]]])
    edge = MOST_SECTIONS * np.sqrt(6 * LUMPING_ERROR) / 0.1
    assert sections_needed(series, shunt, length=edge * 0.9999) == MOST_SECTIONS
    with pytest.raises(Refused, match="too long electrically: it would take 51 sections"):
        sections_needed(series, shunt, length=edge * 1.0001)
