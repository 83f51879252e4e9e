"""The finite-element peer itself, against closed forms: it may only judge what it can resolve."""

from __future__ import annotations

import math

import numpy as np
import pytest
from numpy.testing import assert_allclose

from finite_elements import VACUUM_PERMITTIVITY, capacitance_by_finite_elements
from unlanded.physics.section import Conductor, Pipe, Plane, Section

# Forms: Smythe, Static and Dynamic Electricity, 4.14 (from memory).
TWO_PI_EPS = 2 * math.pi * VACUUM_PERMITTIVITY
ACCURACIES = (5e-3, 5e-4, 5e-5)


@pytest.mark.parametrize("accuracy", ACCURACIES)
@pytest.mark.parametrize("spacing", [2.02, 2.1, 4.0, 20.0])
def test_two_wires(spacing, accuracy):
    pair = Section((Conductor("a", 0, 0, 1e-3), Conductor("b", spacing * 1e-3, 0, 1e-3)))
    c = capacitance_by_finite_elements(pair, accuracy=accuracy)
    exact = TWO_PI_EPS / 2 / math.acosh(spacing / 2)
    assert_allclose(c, exact * np.array([[1, -1], [-1, 1]]), rtol=accuracy)


@pytest.mark.parametrize("accuracy", ACCURACIES)
@pytest.mark.parametrize("height", [1.02, 2.0, 10.0])
def test_wire_over_plane(height, accuracy):
    wire = Section((Conductor("a", 1e-3, height * 1e-3, 1e-3),), Plane(0.0))
    c = capacitance_by_finite_elements(wire, accuracy=accuracy)
    assert c[0, 0] == pytest.approx(TWO_PI_EPS / math.acosh(height), rel=accuracy, abs=0)


@pytest.mark.parametrize("accuracy", ACCURACIES)
@pytest.mark.parametrize("off", [0.0, 1.5, 2.97])
def test_wire_off_centre_in_a_pipe(off, accuracy):
    wire = Section((Conductor("a", 5e-3, off * 1e-3, 1e-3),), Pipe(4e-3, 5e-3, 0.0))
    c = capacitance_by_finite_elements(wire, accuracy=accuracy)
    exact = TWO_PI_EPS / math.acosh((1 + 16 - off**2) / 8)
    assert c[0, 0] == pytest.approx(exact, rel=accuracy, abs=0)


@pytest.mark.parametrize("accuracy", ACCURACIES)
@pytest.mark.parametrize(("cover", "filler"), [(5.0, 1.0), (8.0, 3.5), (1.0, 5.0)])
def test_covered_wire_on_the_axis_of_a_pipe(cover, filler, accuracy):
    wire = Section((Conductor("a", 0, 0, 1e-3, 2e-3, cover),), Pipe(3e-3), filler)
    c = capacitance_by_finite_elements(wire, accuracy=accuracy)
    exact = TWO_PI_EPS / (math.log(2) / cover + math.log(1.5) / filler)
    assert c[0, 0] == pytest.approx(exact, rel=accuracy, abs=0)
