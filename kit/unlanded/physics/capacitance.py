"""Capacitance per metre of any section, to a stated tolerance.

The number of multipoles is chosen per conductor from the tightest contact it has; the same
factorisation also gives the answer at three quarters and at nine tenths of that number, and what
the last multipoles changed is the measure of the error. Where it is too large, more are taken.
"""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence
from dataclasses import dataclass

import numpy as np

from ..errors import Refused
from .constants import EPSILON_0
from .multipole import Geometry, Index, Real, System, assemble, diagonal
from .section import Section

TOLERANCE = 5e-4
# An element below this share of its conductors' self-capacitances (under 1 fF/m in any cable) is
# held to the absolute error of an element of that size.
FLOOR = 1e-6
MOST_MULTIPOLES = 500  # of one conductor: from 512 the binomials leave the range of a float
_CHUNK = 500_000  # matrix elements assembled at a time, to stay in the processor's cache
# Cut at these shares of its orders the series lacks so much, and in full it lacks about such a
# part of that at most: fitted to three thousand trials on random sections, in which the largest
# error accepted at 0.05 % was 0.042 %.
_CUTS = {0.75: 0.65, 0.9: 1.6}
_ROUNDS = 8
_CONTACT = 1e-12  # of a radius: closer is counted as that close


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
    terms = multipole_numbers(geometry, tolerance)
    out = np.empty((*geometry.metal.shape, geometry.metal.shape[1]))
    pending = np.arange(len(out))
    for _ in range(_ROUNDS):
        if terms[pending].max() > MOST_MULTIPOLES:
            break
        failed = []
        for which in _groups(terms, pending):
            solved, error = _truncated(geometry.take(which), terms[which].max(axis=0))
            out[which] = solved.matrix
            lacking = error > tolerance
            growth = _growth(solved.matrix[lacking], error[lacking], tolerance)
            failed.append(which[lacking])
            terms[failed[-1]] = np.ceil(terms[failed[-1]] * growth[:, None])
        pending = np.concatenate(failed)
        if not len(pending):
            return out
    tight = pending[terms[pending].max(axis=1).argmax()]
    raise _too_close(str(terms[tight].argmax()), tolerance)


def solve(geometry: Geometry, tolerance: float, names: Sequence[str]) -> Solved:
    """Raise the number of multipoles of a batch until the error estimate meets `tolerance`."""
    _check(tolerance)
    terms = multipole_numbers(geometry, tolerance).max(axis=0)
    for _ in range(_ROUNDS):
        if terms.max() > MOST_MULTIPOLES:
            break
        solved, error = _truncated(geometry, terms)
        if error.max() <= tolerance:
            return solved
        growth = _growth(solved.matrix, error, tolerance)
        terms = np.ceil(terms * growth.max()).astype(np.intp)
    raise _too_close(names[int(terms.argmax())], tolerance)


def _groups(terms: Index, pending: Index) -> Iterator[Index]:
    """The pending sections in groups that need about as many multipoles, of the cache's size."""
    n = terms.shape[1]
    by_need = pending[np.argsort(terms[pending].sum(axis=1), kind="stable")[::-1]]
    while len(by_need):
        unknowns = 2 * int(terms[by_need[0]].sum()) + n
        size = max(1, _CHUNK // unknowns**2)
        yield by_need[:size]
        by_need = by_need[size:]


def _truncated(geometry: Geometry, terms: Index) -> tuple[Solved, Real]:
    """The batch with `terms` (n,) multipoles at its conductors, with its estimated errors (B,)."""
    conductor, order, coarse = _listed(terms)
    system = assemble(geometry, conductor, order, coarse)
    *rough, fine = _grounded(system.inverse_potential_coefficients(), geometry)
    return Solved(fine, system, conductor, order), _error(rough, fine)


def _growth(matrix: Real, error: Real, tolerance: float) -> Real:
    """How many times more multipoles would bring each `error` (B,) to `tolerance` (B,)."""
    share = _shares(matrix)
    smallest = np.min(_sizes(matrix, share) / share, axis=(-1, -2))
    # What covers that touch leave after m orders is about exp(−c √m) of the largest element; the
    # power would be 2, and a half more makes three in four meet the tolerance at the next trial.
    excess = np.clip(error, tolerance, 0.5)
    growth = np.log(smallest * tolerance) / np.log(smallest * excess)
    return np.asarray(np.clip(growth**2.5, 1.1, 2.5))


def _too_close(name: str, tolerance: float) -> Refused:
    return Refused(
        f'conductor "{name}"', f"lies too close to its neighbour for a tolerance of {tolerance:g}",
        hint="move it by a thousandth of its radius, or ask for a wider tolerance")


def multipole_numbers(geometry: Geometry, tolerance: float) -> Index:
    """Multipoles that each conductor is first given, (B, n).

    Between two metals of radii a, a' with effective gap g (air, and covers divided by their
    permittivity) the images gather at the distance c = √(2 g a a' / (a + a')) from the surface,
    so orders fall off as exp(−2 m c / a). Touching covers add a cusp of air, which costs orders in
    proportion to the permittivity. Factors fitted to covered pairs; the error estimate decides.
    """
    a, b, ratio = geometry.metal, geometry.cover, geometry.ratio
    bend, slack = 1 / a, (b - a) / np.maximum(ratio, 1.0)
    cusp = np.where(a == b, 5.0, 1.5)
    one, other = np.s_[:, :, None], np.s_[:, None, :]
    apart = np.abs(geometry.centre[one] - geometry.centre[other])
    touching = b[one] + b[other]
    stiff = np.maximum(cusp[one], cusp[other]) * np.maximum(ratio[one], ratio[other])
    need = _orders(a[one], b[one], bend[one] + bend[other], apart - touching,
                   slack[one] + slack[other], stiff)
    diagonal(need)[...] = 0.0
    most = need.max(axis=2)
    if geometry.wall != "none":
        air = geometry.centre.imag - b
        if geometry.wall == "pipe":
            radius = geometry.pipe_radius[:, None]
            bend, air = bend - 1 / radius, radius - np.abs(geometry.centre) - b
        most = np.maximum(most, _orders(a, b, bend, air, slack, 1.5 * ratio))
    # Error falls by e² per a/c orders: 3.15 a/c orders are 5e-4.
    scale = math.log(tolerance) / math.log(TOLERANCE)
    # The more conductors and the farther they stand apart, the better the farthest are screened
    # from each other: the smaller the smallest element, the more orders to the same share of it.
    far = np.maximum((apart / touching).max(axis=(1, 2)), 1.0)
    screened = 0.75 * (far - 1) if geometry.wall == "none" else 1.5 * (far - 1) ** 1.5
    crowd = np.minimum(0.9 + screened, min(0.5 * a.shape[1] - 0.1, 2.75))
    return np.asarray(np.ceil(4 + most * scale * crowd[:, None]), dtype=np.intp)


def _orders(a: Real, b: Real, bend: Real, air: Real, slack: Real, cusp: Real) -> Real:
    """With the bends 1/a of both metals added up, and `slack` that of the covers' gap."""
    air = np.maximum(air, _CONTACT * b)
    tight = 3.15 * a * np.sqrt(0.5 * bend / (air + slack))
    return np.asarray(tight + cusp / (1 + 4 * cusp * air / b))


def _listed(terms: Index) -> tuple[Index, Index, tuple[int, ...]]:
    """(conductor, order) of every multipole, and how many come before each cut.

    They are listed by the share order / terms, so that a cut is a number of them.
    """
    conductor = np.repeat(np.arange(len(terms)), terms)
    before = np.cumsum(terms) - terms
    order = np.arange(1, len(conductor) + 1) - before[conductor]
    share = order / terms[conductor]
    rank = share.argsort(kind="stable")
    cuts = share[rank].searchsorted(list(_CUTS), side="right")
    return conductor[rank], order[rank], tuple(cuts.tolist())


def _grounded(inverse: Real, geometry: Geometry) -> Real:
    """C from P⁻¹ (cuts, B, n, n); with no wall, the part that stays at zero total charge."""
    if geometry.wall == "none":
        total = inverse.sum(axis=-1, keepdims=True)
        share = total * total.swapaxes(-1, -2) / total.sum(axis=-2, keepdims=True)
        inverse = inverse - share
    scale = 2 * np.pi * EPSILON_0 * geometry.filler[:, None, None]
    return np.asarray(scale * (inverse + inverse.swapaxes(-1, -2)) / 2)


def _error(rough: Sequence[Real], fine: Real) -> Real:
    """Estimated error of each matrix (B,): the worst element's, by the worst of the cuts."""
    lacking = [part * np.abs(fine - cut) for part, cut in zip(_CUTS.values(), rough, strict=True)]
    worst = np.maximum(*lacking) / _sizes(fine, _shares(fine))
    return np.asarray(worst.max(axis=(-1, -2)))


def _shares(matrix: Real) -> Real:
    """√(C_ii C_jj) of every element (B, n, n)."""
    own = np.sqrt(np.diagonal(matrix, axis1=-2, axis2=-1))
    return np.asarray(own[:, :, None] * own[:, None, :])


def _sizes(matrix: Real, share: Real) -> Real:
    """What the error of every element is relative to (B, n, n)."""
    return np.asarray(np.maximum(np.abs(matrix), FLOOR * share))


def _check(tolerance: float) -> None:
    if not 1e-10 <= tolerance <= 0.1:
        raise Refused("tolerance", "must be from 1e-10 to 0.1", given=f"{tolerance:g}")
