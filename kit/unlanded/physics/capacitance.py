"""Capacitance per metre of any section, to a stated tolerance.

The number of multipoles is chosen per conductor from the tightest contact it has; the same
factorisation also gives the answer at three quarters of that number, and their difference is the
error estimate. Where it is too large, the number is raised.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from ..errors import Refused
from .constants import EPSILON_0
from .multipole import Geometry, Index, Real, System, assemble
from .section import Section

TOLERANCE = 5e-4
# An element below this share of its conductors' self-capacitances (under 1 fF/m in any cable) is
# held to the absolute error of an element of that size.
FLOOR = 1e-6
MOST_MULTIPOLES = 400  # of one conductor
_CHUNK = 400_000  # matrix elements assembled at a time, to stay in the processor's cache
_ROUNDS = 8


@dataclass(frozen=True)
class Solved:
    """A converged batch: `matrix` (B, n, n) [F/m], its system and the multipoles in it."""

    matrix: Real
    system: System
    conductor: Index
    order: Index


def capacitance_matrix(section: Section, tolerance: float = TOLERANCE) -> Real:
    """Maxwell capacitance matrix of a section (n, n) [F/m], in the order of its conductors.

    `C[i, j]` is the charge per metre on i for 1 V on j, all others and the surround at 0 V.
    With no surround the total charge is zero and every row sums to zero.

    Parameters
    ----------
    tolerance : largest relative error of an element [1], 1e-10 to 0.1. An element under 1e-6 of
        √(C_ii C_jj) is held to the absolute error of one of that size.

    Raises `Refused` when conductors are so close that the tolerance cannot be met.

    Two bare wires of 1 mm diameter at 10 mm: π ε₀ / acosh(10) = 9.29 pF/m

    >>> from unlanded.physics.section import Conductor, Section
    >>> pair = Section((Conductor("a", 0, 0, 5e-4), Conductor("b", 10e-3, 0, 5e-4)))
    >>> round(float(capacitance_matrix(pair)[0, 0]) * 1e12, 3)
    9.293
    """
    return np.asarray(solve(Geometry.of([section]), tolerance, section.names).matrix[0])


def capacitance_matrices(geometry: Geometry, tolerance: float = TOLERANCE) -> Real:
    """The matrices (B, n, n) [F/m] of a batch of sections; see `capacitance_matrix`.

    Sections that need about as many multipoles are solved together, in the cache's size.
    """
    _check(tolerance)
    count, n = geometry.metal.shape
    names = tuple(str(k) for k in range(n))
    terms = multipole_numbers(geometry, tolerance)
    by_need = np.argsort(terms.max(axis=1), kind="stable")
    out = np.empty((count, n, n))
    start = 0
    while start < count:
        need = 2 * int(terms[by_need[start]].sum()) + n
        which = by_need[start : start + max(1, _CHUNK // need**2)]
        out[which] = solve(geometry.take(which), tolerance, names).matrix
        start += len(which)
    return out


def solve(geometry: Geometry, tolerance: float, names: Sequence[str]) -> Solved:
    """Raise the number of multipoles of a batch until the error estimate meets `tolerance`."""
    _check(tolerance)
    terms = multipole_numbers(geometry, tolerance).max(axis=0)
    for _ in range(_ROUNDS):
        if terms.max() > MOST_MULTIPOLES:
            break
        conductor, order, coarse = _listed(terms)
        system = assemble(geometry, conductor, order, coarse)
        rough, fine = (_grounded(p, geometry) for p in system.inverse_potential_coefficients())
        error, smallest = _error(rough, fine)
        if error <= tolerance:
            return Solved(fine, system, conductor, order)
        # The error of the largest element falls geometrically with the number of orders.
        growth = np.log(smallest * tolerance) / np.log(smallest * min(error, 0.5))
        terms = np.ceil(terms * 1.05 * np.clip(growth, 1.05, 2.0)).astype(np.intp)
    tight = names[int(terms.argmax())]
    raise Refused(
        f'conductor "{tight}"', f"lies too close to its neighbour for a tolerance of {tolerance:g}",
        hint="move it by a thousandth of its radius, or ask for a wider tolerance")


def multipole_numbers(geometry: Geometry, tolerance: float) -> Index:
    """Multipoles that each conductor is first given, (B, n).

    Between two metals of radii a, a' with effective gap g (air, and covers divided by their
    permittivity) the images gather at the distance c = √(2 g a a' / (a + a')) from the surface,
    so orders fall off as exp(−2 m c / a). Touching covers add a cusp of air, which costs orders in
    proportion to the permittivity. Factors fitted to covered pairs; the error estimate decides.
    """
    a, b, ratio = geometry.metal, geometry.cover, geometry.ratio
    slack = (b - a) / np.maximum(ratio, 1.0)
    apart = np.abs(geometry.centre[:, :, None] - geometry.centre[:, None, :])
    air = np.maximum(apart - b[:, :, None] - b[:, None, :], 0.0)
    gap = air + slack[:, :, None] + slack[:, None, :]
    lens = a[:, :, None] * a[:, None, :] / (a[:, :, None] + a[:, None, :])
    bare = (a == b)[:, :, None] | (a == b)[:, None, :]
    stiff = np.maximum(ratio[:, :, None], ratio[:, None, :])
    need = _orders(a[:, :, None], gap, lens, air, b[:, :, None], np.where(bare, 4.0, 1.5) * stiff)
    own = np.arange(a.shape[1])
    need[:, own, own] = 0.0
    most = need.max(axis=2)
    if geometry.wall != "none":
        if geometry.wall == "plane":
            air, lens = geometry.centre.imag - b, a
        else:
            radius = geometry.pipe_radius[:, None]
            air, lens = radius - np.abs(geometry.centre) - b, a * radius / (radius - a)
        air = np.maximum(air, 0.0)
        most = np.maximum(most, _orders(a, air + slack, lens, air, b, 1.5 * ratio))
    # Error falls by e² per a/c orders: 3.15 a/c orders are 5e-4.
    scale = np.log(1 / tolerance) / np.log(1 / TOLERANCE)
    # Many conductors screen each other: smaller elements, and more orders for the same share.
    crowd = 1 + (0.03 if geometry.wall == "none" else 0.12) * min(a.shape[1] - 1, 8)
    return np.asarray(np.ceil(4 + most * scale * crowd), dtype=np.intp)


def _orders(a: Real, gap: Real, lens: Real, air: Real, b: Real, cusp: Real) -> Real:
    with np.errstate(divide="ignore"):
        return np.asarray(3.15 * a / np.sqrt(2 * gap * lens) + cusp / (1 + 4 * cusp * air / b))


def _listed(terms: Index) -> tuple[Index, Index, int]:
    """(conductor, order) of every multipole; the first three quarters of each conductor first."""
    conductor = np.repeat(np.arange(len(terms)), terms)
    order = np.concatenate([np.arange(1, m + 1) for m in terms])
    late = order > np.ceil(0.75 * terms)[conductor]
    rank = np.lexsort((conductor, order, late))
    return conductor[rank], order[rank], int((~late).sum())


def _grounded(inverse: Real, geometry: Geometry) -> Real:
    """C from P⁻¹; without a wall, the part that stays when the total charge is zero."""
    if geometry.wall == "none":
        total = inverse.sum(axis=-1)
        share = total[:, :, None] * total[:, None, :] / total.sum(axis=-1)[:, None, None]
        inverse = inverse - share
    scale = 2 * np.pi * EPSILON_0 * geometry.filler[:, None, None]
    return np.asarray(scale * (inverse + inverse.swapaxes(-1, -2)) / 2)


def _error(rough: Real, fine: Real) -> tuple[float, float]:
    """Estimated error of `fine`, and its smallest element as a share of the self-capacitances.

    Two thirds of what the last quarter of the orders changed. What an element gains is bounded
    by the root of what its two self-capacitances gain; a twentieth of that bound is counted in
    any case, since a small element may stand still at one truncation by chance.
    """
    own = np.sqrt(np.diagonal(fine, axis1=-2, axis2=-1))
    own = own[:, :, None] * own[:, None, :]
    share = np.maximum(np.abs(fine) / own, FLOOR)
    gain = np.abs(fine - rough)
    self_gain = np.sqrt(np.diagonal(gain, axis1=-2, axis2=-1))
    gain = np.maximum(gain, 0.05 * self_gain[:, :, None] * self_gain[:, None, :])
    return float(0.65 * np.max(gain / (share * own))), float(share.min())


def _check(tolerance: float) -> None:
    if not 1e-10 <= tolerance <= 0.1:
        raise Refused("tolerance", "must be from 1e-10 to 0.1", given=f"{tolerance:g}")
