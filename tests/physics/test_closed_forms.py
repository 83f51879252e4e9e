"""Closed forms against published digits, a conformal map, and image sums written anew."""

from __future__ import annotations

import math

import numpy as np
import pytest
from numpy.testing import assert_allclose

from unlanded.errors import Refused
from unlanded.physics.capacitance import capacitance_matrix
from unlanded.physics.closed_forms import (
    coaxial,
    coaxial_two_layers,
    covered_pair_series,
    off_centre_in_screen,
    screened_three_core,
    screened_two_core,
    two_unequal_wires,
    two_wires,
    wire_over_plane,
)
from unlanded.physics.constants import EPSILON_0, MU_0
from unlanded.physics.section import Conductor, Section

MIL = 25.4e-6


def test_constants_give_the_speed_of_light():
    # 299 792 458 m/s, exact by definition of the metre. The printed eps0 and mu0 have 11 digits.
    speed = (EPSILON_0 * MU_0) ** -0.5
    assert speed == pytest.approx(299_792_458, rel=1e-10, abs=0)


def test_two_wires_as_printed_by_paul():
    # Paul, Analysis of Multiconductor Transmission Lines, 2nd ed. 2007, problem 4.2 (seen):
    # r = 7.5 mil, s = 50 mil, C = 14.8 pF/m. Tolerance: half the last digit.
    c = two_wires(radius=7.5 * MIL, spacing=50 * MIL)
    assert c == pytest.approx(14.8e-12, rel=0.05 / 14.8, abs=0)


@pytest.mark.parametrize(("spacing_cm", "diameter_mm"), [(0.5, 0.985), (1.5, 2.95), (5.0, 9.85)])
def test_two_wires_of_12_pf_per_metre(spacing_cm, diameter_mm):
    # Jackson, Classical Electrodynamics, 3rd ed., problem 1.7 (from memory): the diameters that
    # give 12 pF/m. They come from the wide-spacing formula, 1 % from the exact one.
    c = two_wires(radius=diameter_mm / 2 * 1e-3, spacing=spacing_cm * 1e-2)
    assert c == pytest.approx(12e-12, rel=0.01, abs=0)


def test_log_ratio_as_printed_for_an_overhead_line():
    # Grainger and Stevenson, Power System Analysis (from memory): r = 0.0462 ft, D = 24.8 ft,
    # 8.8466e-12 F/m to neutral with eps0 printed as 8.85e-12. Half the last digit.
    c = coaxial(inner=0.0462, outer=24.8) * 8.85e-12 / EPSILON_0
    assert c == pytest.approx(8.8466e-12, rel=0.00005 / 8.8466, abs=0)


def test_screened_pair_as_printed_by_paul():
    # Paul, problems 5.10 and 5.11 (seen): r = 0.1905 mm, wires 2 r off the axis of a screen of
    # 4 r, image formulas: C = [[52.8, −10.73], ...] pF/m, so 42.07 per wire with both at the
    # same voltage. Half the last digits, 0.05 + 0.005.
    r = 0.1905e-3
    each = screened_two_core(radius=r, offset=2 * r, screen_radius=4 * r)
    assert each == pytest.approx(42.07e-12, rel=0.055 / 42.07, abs=0)


# The circles |z − 1| / |z + 1| = k are equipotentials of two opposite line charges at ±1, and
# between two of them C = 2 π eps / |ln(k1 / k2)|: every exact case in one family.


def circle(k: float) -> tuple[float, float]:
    """Centre and radius of the circle; k below 1 lies right of the plane x = 0."""
    return (1 + k * k) / (1 - k * k), 2 * k / abs(1 - k * k)


def between(k1: float, k2: float) -> float:
    return 2 * math.pi * EPSILON_0 / abs(math.log(k1 / k2))


@pytest.mark.parametrize("k", [0.99, 0.9, 0.5, 0.1, 1e-3, 1e-6])
def test_equal_wires_and_plane_by_conformal_map(k):
    x, a = circle(k)
    # Forming the circle loses digits where the wires nearly touch; 1e-9 is asked of the form.
    assert two_wires(radius=a, spacing=2 * x) == pytest.approx(between(k, 1 / k), rel=1e-9, abs=0)
    assert wire_over_plane(radius=a, height=x) == pytest.approx(between(k, 1), rel=1e-9, abs=0)


@pytest.mark.parametrize(("k1", "k2"), [(0.9, 1.05), (0.5, 7.0), (0.01, 1.5), (1e-5, 1e4)])
def test_unequal_wires_by_conformal_map(k1, k2):
    (x1, a1), (x2, a2) = circle(k1), circle(k2)
    c = two_unequal_wires(radius_a=a1, radius_b=a2, spacing=x1 - x2)
    assert c == pytest.approx(between(k1, k2), rel=1e-9, abs=0)


@pytest.mark.parametrize(("k1", "k2"), [(0.1, 0.2), (0.5, 0.55), (0.001, 0.9), (0.8, 0.99)])
def test_off_centre_by_conformal_map(k1, k2):
    (x1, a), (x2, b) = circle(k1), circle(k2)
    c = off_centre_in_screen(radius=a, screen_radius=b, offset=x2 - x1)
    assert c == pytest.approx(between(k1, k2), rel=1e-9, abs=0)


def test_nearly_touching_wires_keep_their_digits():
    # acosh(1 + t) → √(2t) as t → 0; t = 1e-12 here, so the next term is 1e-13 away. Powers of
    # two make the gap itself exact.
    t = 2.0**-40
    c = two_wires(radius=1.0, spacing=2.0 + 2 * t)
    assert c == pytest.approx(math.pi * EPSILON_0 / math.sqrt(2 * t), rel=1e-11, abs=0)


def test_limits_join_up():
    pair = two_wires(radius=1e-3, spacing=7e-3)
    unequal = two_unequal_wires(radius_a=1e-3, radius_b=1e-3, spacing=7e-3)
    assert unequal == pytest.approx(pair, rel=1e-12, abs=0)
    centred = coaxial(inner=1e-3, outer=5e-3, permittivity=2.3)
    assert off_centre_in_screen(
        radius=1e-3, screen_radius=5e-3, offset=0.0, permittivity=2.3
    ) == pytest.approx(centred, rel=1e-12, abs=0)
    # A very large second wire is a plane.
    wall = two_unequal_wires(radius_a=1e-3, radius_b=1e5, spacing=1e5 + 4e-3)
    assert wall == pytest.approx(wire_over_plane(radius=1e-3, height=4e-3), rel=1e-6, abs=0)


@pytest.mark.parametrize("between_mm", [1.0, 2.0, 4.0])
def test_two_equal_layers_are_one(between_mm):
    c = coaxial_two_layers(inner=1e-3, between=between_mm * 1e-3, outer=4e-3,
                           inner_permittivity=3.0, outer_permittivity=3.0)
    whole = coaxial(inner=1e-3, outer=4e-3, permittivity=3.0)
    assert c == pytest.approx(whole, rel=1e-12, abs=0)


def test_layers_are_in_series():
    c = coaxial_two_layers(inner=1e-3, between=2e-3, outer=5e-3,
                           inner_permittivity=4.0, outer_permittivity=2.0)
    inside = coaxial(inner=1e-3, outer=2e-3, permittivity=4.0)
    outside = coaxial(inner=2e-3, outer=5e-3, permittivity=2.0)
    assert 1 / c == pytest.approx(1 / inside + 1 / outside, rel=1e-12, abs=0)


def in_screen(positions: np.ndarray, radius: float, screen: float) -> np.ndarray:
    """Each core's charge per volt with all at 1 V, by thin line charges and their images."""
    n = len(positions)
    potential = np.empty((n, n))
    for i, z in enumerate(positions):
        for j, w in enumerate(positions):
            image = screen**2 / np.conj(w)
            to_wire = radius if i == j else abs(z - w)
            potential[i, j] = math.log(abs(z - image) * abs(w) / (screen * to_wire))
    return 2 * math.pi * EPSILON_0 * np.linalg.solve(potential, np.ones(n))


@pytest.mark.parametrize(("cores", "form"), [(2, screened_two_core), (3, screened_three_core)])
def test_screened_cores_by_sums_of_images(cores, form):
    a, c, r = 0.69e-3, 1.6e-3, 3.3e-3
    positions = c * np.exp(2j * np.pi * np.arange(cores) / cores)
    each = form(radius=a, offset=c, screen_radius=r)
    assert_allclose(in_screen(positions, a, r), each, rtol=1e-12, atol=0)


@pytest.mark.parametrize(
    ("form", "offset", "low_by"),
    [(screened_two_core, 1.39e-3, 0.054), (screened_three_core, 1.39e-3 * 2 / 3**0.5, 0.096)],
)
def test_screened_cores_are_low_where_covers_touch(form, offset, low_by):
    # How low the docstrings say: second opinion, full solutions 188.9 and 162.9 pF/m.
    full = {0.054: 188.9e-12, 0.096: 162.9e-12}[low_by]
    each = form(radius=0.69e-3, offset=offset, screen_radius=offset + 1.69e-3, permittivity=5.0)
    assert each == pytest.approx(full * (1 - low_by), rel=1e-3, abs=0)


def test_covered_pair_without_cover():
    bare = two_wires(radius=1e-3, spacing=5e-3)
    for cover_radius, permittivity in ((2e-3, 1.0), (1e-3, 5.0)):
        c = covered_pair_series(radius=1e-3, cover_radius=cover_radius, spacing=5e-3,
                                cover_permittivity=permittivity)
        assert c == pytest.approx(bare, rel=1e-12, abs=0)


@pytest.mark.parametrize(
    ("spacing", "low_by"),
    [(2.78e-3, 0.35), (3.5e-3, 0.115), (5e-3, 0.034), (10e-3, 0.005), (50e-3, 0.0001)],
)
def test_covered_pair_is_low_by_what_its_docstring_says(spacing, low_by):
    wires = [Conductor(n, x, 0.0, 0.69e-3, 1.39e-3, 5.0) for n, x in (("a", 0.0), ("b", spacing))]
    full = capacitance_matrix(Section(tuple(wires)))[0, 0]
    c = covered_pair_series(radius=0.69e-3, cover_radius=1.39e-3, spacing=spacing,
                            cover_permittivity=5.0)
    assert full > c
    # The engine itself promises 5e-4.
    assert c == pytest.approx(full * (1 - low_by), rel=max(0.1 * low_by, 6e-4), abs=0)


def test_arrays_broadcast():
    radius, spacing = np.array([1e-3, 2e-3])[:, None], np.array([5e-3, 6e-3, 7e-3])
    c = two_wires(radius=radius, spacing=spacing)
    assert c.shape == (2, 3)
    assert c[1, 2] == pytest.approx(two_wires(radius=2e-3, spacing=7e-3), rel=1e-15, abs=0)


def test_filling_scales_in_proportion():
    for form, sizes in (
        (two_wires, {"radius": 1e-3, "spacing": 5e-3}),
        (two_unequal_wires, {"radius_a": 1e-3, "radius_b": 2e-3, "spacing": 5e-3}),
        (wire_over_plane, {"radius": 1e-3, "height": 5e-3}),
        (coaxial, {"inner": 1e-3, "outer": 5e-3}),
        (off_centre_in_screen, {"radius": 1e-3, "screen_radius": 5e-3, "offset": 1e-3}),
        (screened_two_core, {"radius": 1e-3, "offset": 2e-3, "screen_radius": 5e-3}),
        (screened_three_core, {"radius": 1e-3, "offset": 2e-3, "screen_radius": 5e-3}),
    ):
        ratio = form(**sizes, permittivity=4.8) / form(**sizes)
        assert ratio == pytest.approx(4.8, rel=1e-12, abs=0)


# (function, arguments at the edge, what takes it just past, name, rule)
JUST = 1 + 1e-12
REFUSALS = [
    (two_wires, {"radius": 1.0, "spacing": 2 * JUST}, {"spacing": 2.0}, "spacing", "2 × radius"),
    (two_wires, {"radius": 1.0, "spacing": 3.0, "permittivity": 1.0}, {"permittivity": 0.999},
     "permittivity", "at least 1"),
    (two_wires, {"radius": 1e-300, "spacing": 3.0}, {"radius": 0.0}, "radius", "above 0 m"),
    (two_unequal_wires, {"radius_a": 1.0, "radius_b": 2.0, "spacing": 3 * JUST}, {"spacing": 3.0},
     "spacing", r"radius_a \+ radius_b"),
    (wire_over_plane, {"radius": 1.0, "height": JUST}, {"height": 1.0}, "height", "above radius"),
    (coaxial, {"inner": 1.0, "outer": JUST}, {"outer": 1.0}, "outer", "above inner"),
    (coaxial_two_layers,
     {"inner": 1.0, "between": 1.0, "outer": 2.0, "inner_permittivity": 1.0,
      "outer_permittivity": 1.0}, {"between": 0.999}, "between", "at least inner"),
    (coaxial_two_layers,
     {"inner": 1.0, "between": 2.0, "outer": 2.0, "inner_permittivity": 1.0,
      "outer_permittivity": 1.0}, {"between": 2.001}, "between", "at most outer"),
    (coaxial_two_layers,
     {"inner": 1.0, "between": 2.0, "outer": 2.0, "inner_permittivity": 1.0,
      "outer_permittivity": 1.0}, {"outer_permittivity": 0.5}, "outer_permittivity", "at least 1"),
    (off_centre_in_screen, {"radius": 1.0, "screen_radius": 3 * JUST, "offset": 2.0},
     {"screen_radius": 3.0}, "screen_radius", r"radius \+ offset"),
    (off_centre_in_screen, {"radius": 1.0, "screen_radius": 3.0, "offset": 0.0},
     {"offset": -1e-9}, "offset", "at least 0 m"),
    (screened_two_core, {"radius": 1.0, "offset": JUST, "screen_radius": 3.0}, {"offset": 1.0},
     "offset", "above radius"),
    (screened_two_core, {"radius": 1.0, "offset": 2.0, "screen_radius": 3 * JUST},
     {"screen_radius": 3.0}, "screen_radius", r"radius \+ offset"),
    (screened_three_core, {"radius": 1.0, "offset": 2 / 3**0.5 * JUST, "screen_radius": 3.0},
     {"offset": 2 / 3**0.5 / JUST}, "offset", "2 × radius / √3"),
    (covered_pair_series,
     {"radius": 1.0, "cover_radius": 2.0, "spacing": 4.0, "cover_permittivity": 5.0},
     {"spacing": 4 / JUST}, "spacing", "at least 2 × cover_radius"),
    (covered_pair_series,
     {"radius": 1.0, "cover_radius": 1.0, "spacing": 4.0, "cover_permittivity": 5.0},
     {"cover_radius": 0.999}, "cover_radius", "at least radius"),
    (covered_pair_series,
     {"radius": 1.0, "cover_radius": 1.0, "spacing": 2 * JUST, "cover_permittivity": 5.0},
     {"spacing": 2.0}, "spacing", "above 2 × radius"),
]  # fmt: skip


@pytest.mark.parametrize(("form", "edge", "past", "name", "rule"), REFUSALS)
def test_impossible_geometry_is_refused_just_past_the_edge(form, edge, past, name, rule):
    assert form(**edge) > 0
    with pytest.raises(Refused, match=f"{name}: must be .*{rule}.*; given"):
        form(**edge | past)


def test_what_is_no_number_is_refused_by_name():
    with pytest.raises(Refused, match=r"spacing: must be a number.*'5 mm'"):
        two_wires(radius=1e-3, spacing="5 mm")
    with pytest.raises(Refused, match="spacing: must be a finite number; given inf"):
        two_wires(radius=1e-3, spacing=math.inf)
    with pytest.raises(Refused, match="radius: must be a finite number; given nan"):
        two_wires(radius=math.nan, spacing=1.0)
    with pytest.raises(Refused, match=r"arguments: must have shapes.*radius \(2,\)"):
        two_wires(radius=[1e-3, 2e-3], spacing=[1.0, 1.0, 1.0])


def test_the_first_bad_one_of_an_array_is_told():
    with pytest.raises(Refused, match=r"above 2 × radius = 0.004 m; given 0.003 m"):
        two_wires(radius=[1e-3, 2e-3, 3e-3], spacing=3e-3)
