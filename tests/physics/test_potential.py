"""The potential against a closed form, boundary values, the mean-value property and Gauss's law."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest
from numpy.testing import assert_allclose

from example_sections import MM, built, crooked
from unlanded.errors import Refused
from unlanded.physics.capacitance import capacitance_matrix
from unlanded.physics.constants import EPSILON_0
from unlanded.physics.potential import potential_map
from unlanded.physics.section import Conductor, Pipe, Plane, Section

BUILT = built()
VOLTS = np.array([230.0, -40 + 90j, 115j, 12.0])
WALLS = pytest.mark.parametrize(
    "wall", [None, Pipe(8 * MM), Pipe(8 * MM, 1.5 * MM, -0.7 * MM), Plane(-4 * MM)],
    ids=["open", "pipe", "pipe off centre", "plane"])


def at(section: Section, volts: np.ndarray, points: np.ndarray) -> np.ndarray:
    """The potential at points x + j y [m]: the diagonal of a grid."""
    return np.diagonal(potential_map(section, volts, points.real, points.imag))


def circle(centre: complex, radius: float, count: int) -> np.ndarray:
    return centre + radius * np.exp(2j * math.pi * (np.arange(count) + 0.3) / count)


def test_two_wires():
    # Two line charges at ±c, c² = (s/2)² − a² (Smythe, 4.14, from memory): the potential is
    # ln(distance ratio) of the two, and half the voltage on each wire.
    a, s, volts = MM, 3 * MM, 100.0
    pair = Section((Conductor("a", -s / 2, 0, a), Conductor("b", s / 2, 0, a)))
    c = math.sqrt(s**2 / 4 - a**2)
    x, y = np.linspace(-5.1, 4.9, 21) * MM, np.linspace(-4.05, 3.95, 17) * MM
    z = x + 1j * y[:, None]
    exact = volts / 2 * np.log(abs((z - c) / (z + c))) / math.acosh(s / 2 / a)
    outside = (abs(z - s / 2) > a) & (abs(z + s / 2) > a)
    found = potential_map(pair, [volts / 2, -volts / 2], x, y)
    assert found.shape == (17, 21)
    assert np.abs(found[outside] - exact[outside]).max() < 5e-4 * volts
    assert_allclose(found[abs(z + s / 2) <= a], volts / 2, rtol=1e-15)


def test_coaxial_with_a_cover():
    # A divider of two coaxial layers: ln(r) in each, by its permittivity.
    wire = Section((Conductor("a", MM, 0, MM, 2 * MM, 5.0),), Pipe(4 * MM, MM, 0), 2.0)
    whole = math.log(2) / 5 + math.log(2) / 2
    r = np.array([1.2, 1.9999, 2.0001, 3.0, 3.9]) * MM
    exact = np.where(r < 2 * MM, 1 - np.log(r / MM) / 5 / whole, np.log(4 * MM / r) / 2 / whole)
    assert_allclose(at(wire, np.array([100.0]), MM + 1j * r), 100 * exact, rtol=1e-12)


@WALLS
def test_metal_surfaces_have_their_conductors_potential(wall):
    section = crooked(wall, 1.5)
    for c, v in zip(section.conductors, VOLTS, strict=True):
        just_outside = circle(complex(c.x, c.y), c.radius * (1 + 1e-9), 24)
        found = at(section, VOLTS, just_outside)
        assert np.abs(found - v).max() < 1e-3 * 230


@WALLS
def test_metal_has_its_conductors_potential(wall):
    section = crooked(wall, 1.5)
    for c, v in zip(section.conductors, VOLTS, strict=True):
        inside = circle(complex(c.x, c.y), 0.9 * c.radius, 5)
        assert_allclose(at(section, VOLTS, inside), v, rtol=1e-15)


@pytest.mark.parametrize(("wall", "points", "beyond"), [
    (Pipe(8 * MM, MM, 0), circle(MM + 0j, 8 * MM * (1 - 1e-9), 24), circle(MM + 0j, 8.5 * MM, 5)),
    (Plane(-4 * MM), np.linspace(-9, 9, 24) * MM - 4j * MM * (1 - 1e-9),
     np.array([0, 1]) * MM - 5j * MM),
])
def test_the_wall_is_at_zero(wall, points, beyond):
    section = crooked(wall)
    assert np.abs(at(section, VOLTS, points)).max() < 1e-6 * 230
    assert (at(section, VOLTS, beyond) == 0).all()


@WALLS
@pytest.mark.parametrize("centre", [complex(-1.5, 2.0), complex(2.2, -2.4), complex(4.6, -0.6)])
def test_mean_over_a_circle_in_air_is_the_value_at_its_centre(wall, centre):
    section = crooked(wall, 1.5)
    z = centre * MM
    room = min(abs(z - complex(c.x, c.y)) - c.outer for c in section.conductors)
    mean = at(section, VOLTS, circle(z, 0.6 * room, 64)).mean()
    assert_allclose(mean, at(section, VOLTS, np.array([z]))[0], rtol=1e-10)


@WALLS
def test_potential_and_flux_are_continuous_at_a_cover(wall):
    # The map leaves out harmonics below the tolerance of 5e-4, which do not pass the edge.
    section, step = crooked(wall, 1.5), 1e-4
    for c in section.conductors:
        if c.outer == c.radius:
            continue
        around = [at(section, VOLTS, circle(complex(c.x, c.y), c.outer * (1 + k * step), 16))
                  for k in (-2, -1, 1, 2)]
        edge_in, edge_out = 2 * around[1] - around[0], 2 * around[2] - around[3]
        assert np.abs(edge_in - edge_out).max() < 5e-4 * 230
        flux_in = c.cover_permittivity * (around[1] - around[0])
        flux_out = section.filler_permittivity * (around[3] - around[2])
        assert np.abs(flux_in - flux_out).max() < 5e-3 * np.abs(flux_in).max()


@WALLS
def test_flux_out_of_a_conductor_is_its_charge(wall):
    # Gauss: the radial field around each, from the map alone, against C V.
    section, step = crooked(wall, 1.5), 1e-4
    charge = capacitance_matrix(section, 1e-8) @ VOLTS
    for c, q in zip(section.conductors, charge, strict=True):
        r = c.outer * 1.02
        z = complex(c.x, c.y)
        rise = at(section, VOLTS, circle(z, r * (1 + step), 64)) - at(
            section, VOLTS, circle(z, r * (1 - step), 64))
        flux = -2 * math.pi * EPSILON_0 * section.filler_permittivity * rise.mean() / (2 * step)
        assert_allclose(flux, q, rtol=1e-3)


def test_uncharged_far_away_in_the_open():
    # Total charge is zero: far away the potential is one constant, and shifting every voltage
    # shifts it everywhere.
    section = crooked()
    far = at(section, VOLTS, circle(0j, 50.0, 6))
    assert np.abs(far - far.mean()).max() < 1e-3 * 230
    points = np.array([0.1 + 0.9j, -3 + 2j, 0]) * MM
    assert_allclose(at(section, VOLTS + 100, points), at(section, VOLTS, points) + 100, rtol=1e-9)


@WALLS
def test_potentials_add_up(wall):
    section = crooked(wall)
    x, y = np.linspace(-4, 4, 9) * MM, np.linspace(-3, 4, 8) * MM
    parts = [v * potential_map(section, unit, x, y)
             for v, unit in zip(VOLTS, np.eye(4), strict=True)]
    assert_allclose(potential_map(section, VOLTS, x, y), sum(parts), rtol=1e-9)


@pytest.mark.parametrize("name", ["cord of 3", "control 7, touching the screen", "flat twin",
                                  "5 in metal conduit", "singles lying on a plane"])
def test_between_the_least_and_the_greatest_voltage(name):
    # No extreme in the middle of a field, also where covers touch each other or the wall.
    section = BUILT[name]
    volts = np.linspace(-50.0, 230.0, len(section.conductors))
    x = np.linspace(-10, 10, 41) * MM
    found = potential_map(section, volts, x, x + 0.13 * MM).real
    assert np.isfinite(found).all()
    assert found.min() > -50 - 0.3
    assert found.max() < 230 + 0.3


def test_the_map_moves_with_the_section():
    here = crooked(Pipe(8 * MM))
    there = replace(here.moved(), surround=Pipe(8 * MM, 5 * MM, 0), conductors=tuple(
        replace(c, x=c.x + 5 * MM) for c in here.conductors))
    x, y = np.linspace(-4, 4, 9) * MM, np.linspace(-3, 4, 8) * MM
    assert_allclose(potential_map(there, VOLTS, x + 5 * MM, y), potential_map(here, VOLTS, x, y),
                    rtol=1e-9)


def test_one_voltage_for_each_conductor():
    assert potential_map(crooked(), VOLTS, [0.0], [0.0]).shape == (1, 1)
    for wrong in (VOLTS[:3], [*VOLTS, 0.0], 230.0):
        with pytest.raises(Refused, match="voltages: give one for each of 4 conductors; given"):
            potential_map(crooked(), wrong, [0.0], [0.0])
