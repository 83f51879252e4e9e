"""The arrays of a batch, and how a covered wire answers a field, by a boundary problem anew."""

from __future__ import annotations

import math

import numpy as np
import pytest
from numpy.testing import assert_allclose

from example_sections import MM, crooked
from finite_elements import capacitance_by_finite_elements
from unlanded.physics.capacitance import capacitance_matrix
from unlanded.physics.constants import EPSILON_0
from unlanded.physics.multipole import Geometry, reflection
from unlanded.physics.section import Conductor, Pipe, Plane, Section


def test_geometry_counts_from_the_pipes_centre():
    g = Geometry.of([crooked(Pipe(9 * MM, MM, -0.5 * MM)), crooked(Pipe(10 * MM))])
    assert g.wall == "pipe"
    assert_allclose(g.pipe_radius, [9 * MM, 10 * MM], rtol=0)
    assert_allclose(g.centre[:, 0], np.array([-3 - 0.5j, -2 - 1j]) * MM, rtol=1e-15)


def test_geometry_counts_from_the_planes_height():
    g = Geometry.of([crooked(Plane(-4 * MM)), crooked(Plane(-6 * MM))])
    assert g.wall == "plane"
    assert_allclose(g.centre[:, 0], np.array([-2 + 3j, -2 + 5j]) * MM, rtol=1e-15)
    assert np.isinf(g.pipe_radius).all()


def test_geometry_in_the_open():
    g = Geometry.of([crooked(None, 2.0)] * 3)
    assert g.wall == "none"
    assert g.centre.shape == g.metal.shape == g.cover.shape == g.ratio.shape == (3, 4)
    assert_allclose(g.metal[0], np.array([0.7, 0.9, 0.5, 0.6]) * MM, rtol=1e-15)
    assert_allclose(g.cover[0], np.array([1.4, 1.6, 0.5, 1.5]) * MM, rtol=1e-15)
    assert_allclose(g.ratio[0], [2.5, 1.15, 0.5, 1.75], rtol=1e-15)
    assert_allclose(g.filler, 2.0, rtol=0)


def test_geometry_takes_some_of_a_batch():
    g = Geometry.of([crooked(Pipe((8 + k) * MM), 1 + k) for k in range(5)])
    part = g.take(np.array([3, 1]))
    assert_allclose(part.pipe_radius, [11 * MM, 9 * MM], rtol=1e-15)
    assert_allclose(part.filler, [4.0, 2.0], rtol=0)
    assert_allclose(part.ratio[:, 0], [5 / 4, 5 / 2], rtol=1e-15)
    assert part.wall == "pipe"
    assert_allclose(g.take(slice(1, 3)).filler, [2.0, 3.0], rtol=0)


def answered(metal: float, cover: float, ratio: float, n: int) -> float:
    """ρ from continuity of potential and flux at the cover, by a 3 × 3 solve.

    Outside r^n + ρ b^2n r^-n; in the cover p r^n + q r^-n, zero on the metal. In units of b.
    """
    a = metal / cover
    conditions = np.array([
        [1.0, -1.0, -1.0],         # potential at r = b: ρ − p − q = −1
        [-1.0, -ratio, ratio],     # flux at r = b: −ρ − κ p + κ q = −1
        [0.0, a**n, a**-n],        # metal: p a^n + q a^-n = 0
    ])
    return float(np.linalg.solve(conditions, [-1.0, -1.0, 0.0])[0])


@pytest.mark.parametrize("ratio", [0.2, 1.0, 1.7, 8.0])
@pytest.mark.parametrize("metal", [0.3, 0.7, 0.95])
def test_reflection_by_a_boundary_problem(metal, ratio):
    pair = Section((Conductor("a", 0, 0, metal * MM, MM, max(1.0, ratio)),
                    Conductor("b", 5 * MM, 0, MM)), None, max(1.0, 1 / ratio))
    rho = reflection(Geometry.of([pair]), 6)
    assert rho.shape == (1, 2, 6)
    assert_allclose(rho[0, 0], [answered(metal, 1.0, ratio, n) for n in range(1, 7)], rtol=1e-9)


def test_bare_metal_reflects_everything():
    rho = reflection(Geometry.of([crooked()]), 5)
    assert_allclose(rho[0, 2], -1.0, rtol=1e-15)


def test_a_cover_like_the_filler_reflects_as_its_metal_does():
    pair = Section((Conductor("a", 0, 0, 0.7 * MM, MM, 2.5), Conductor("b", 5 * MM, 0, MM)), None,
                   2.5)
    rho = reflection(Geometry.of([pair]), 5)[0, 0]
    assert_allclose(rho, [-(0.7 ** (2 * n)) for n in range(1, 6)], rtol=1e-13)


@pytest.mark.parametrize("wall", [None, Pipe(8 * MM), Plane(-4 * MM)])
@pytest.mark.parametrize("filler", [3.0, 6.0, 20.0])
def test_covers_softer_than_the_filler(wall, filler):
    # Here the system is not positive definite, and another way of solving it is taken.
    section = crooked(wall, filler)
    peer = capacitance_by_finite_elements(section, accuracy=2e-4)
    assert_allclose(capacitance_matrix(section, 1e-8), peer, rtol=1e-3)


def test_a_cover_that_cancels_its_metal_is_solved_all_the_same():
    # ρ_n = 0 where κ (1 + t) = 1 − t: such an order answers nothing. A thin wire far away then
    # sees the covered one as if only its charge counted, like a wire of radius b e^(−ln(b/a)/κ).
    t = 0.25  # a / b = 1/2, n = 1
    filler = 5.0
    cover = filler * (1 - t) / (1 + t)
    wire = Conductor("a", 0, 0, MM, 2 * MM, cover)
    pair = Section((wire, Conductor("b", 0.4, 0, MM)), None, filler)
    assert abs(reflection(Geometry.of([pair]), 1)[0, 0, 0]) < 1e-15
    effective = 2 * MM * math.exp(-math.log(2) * filler / cover)
    apart = math.log(0.4**2 / (effective * MM))
    c = capacitance_matrix(pair, 1e-9)[0, 0]
    assert c == pytest.approx(2 * math.pi * EPSILON_0 * filler / apart, rel=1e-5, abs=0)
