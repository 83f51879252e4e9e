"""Arguments are accepted at the edge and refused by name just past it."""

from __future__ import annotations

import numpy as np
import pytest
from numpy.testing import assert_array_equal

from unlanded.errors import Refused
from unlanded.physics.arguments import (
    checked,
    number,
    require,
    require_above,
    require_above_zero,
    require_permittivity,
)


def test_numbers_and_arrays_pass_unchanged():
    a, b = checked(radius=1, spacing=[[2.0], [3.0]])
    assert a.shape == ()
    assert_array_equal(b, [[2.0], [3.0]])
    assert number("radius", np.float32(0.5)) == 0.5


@pytest.mark.parametrize("given", ["2 mm", [1.0, "b"], [[1.0], [1.0, 2.0]], 1j, object()])
def test_what_is_no_number_is_refused_by_name(given):
    with pytest.raises(Refused, match="radius: must be a number, or an array of them, in base SI"):
        checked(radius=given)


@pytest.mark.parametrize("bad", [np.nan, np.inf, -np.inf])
def test_first_number_that_is_not_finite_is_told(bad):
    with pytest.raises(Refused, match=f"spacing: must be a finite number; given {bad:g}"):
        checked(radius=1.0, spacing=[1.0, bad, 2.0])


def test_shapes_must_broadcast():
    assert len(checked(radius=np.ones((3, 1)), spacing=np.ones(4))) == 2
    with pytest.raises(Refused, match=r"broadcast together; given radius \(3,\), spacing \(4,\)"):
        checked(radius=np.ones(3), spacing=np.ones(4))


def test_lengths_are_above_zero():
    require_above_zero("radius", np.array([1e-30, 1.0]))
    with pytest.raises(Refused, match="radius: must be above 0 m; given 0 m"):
        require_above_zero("radius", np.array([1.0, 0.0]))


def test_lengths_are_above_a_bound_that_broadcasts():
    value, bound = np.array([[3.0], [2.0]]), np.array([1.0, 2.0])
    require_above("spacing", value + 1e-9, bound, "two radii")
    with pytest.raises(Refused, match="spacing: must be above two radii = 2 m; given 2 m"):
        require_above("spacing", value, bound, "two radii")


def test_permittivity_is_at_least_that_of_vacuum():
    require_permittivity(np.asarray(1.0))
    with pytest.raises(Refused, match=r"permittivity: must be at least 1; given 0\.999"):
        require_permittivity(np.asarray(0.999))


def test_unit_follows_the_value():
    with pytest.raises(Refused, match="frequency: must be above 0 Hz; given -50 Hz"):
        require(np.asarray(False), "frequency", "must be above 0 Hz", np.asarray(-50.0), "Hz")
