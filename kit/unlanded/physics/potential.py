"""The potential anywhere in a section, for the picture of its field."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

from ..errors import Refused
from .capacitance import TOLERANCE, Solved, solve
from .constants import EPSILON_0
from .multipole import Geometry, Real, reflection
from .section import Section

Complex = NDArray[np.complex128]


def potential_map(section: Section, voltages: ArrayLike, x: ArrayLike, y: ArrayLike) -> Complex:
    """Potential [V] of a section at the points of a grid.

    Parameters
    ----------
    voltages : phasors of the conductors (n,) [V], in the section's order
    x, y : grid lines (k,), (m,) [m]

    Returns phasors (m, k) [V]: a conductor's own voltage inside its metal, 0 in and beyond the
    surround. With no surround the potential at a great distance is what zero total charge gives.
    """
    volts = np.asarray(voltages, dtype=complex)
    if volts.shape != (len(section.conductors),):
        raise Refused("voltages", f"give one for each of {len(section.conductors)} conductors",
                      given=volts.shape)
    geometry = Geometry.of([section])
    solved = solve(geometry, TOLERANCE, section.names)
    charge = solved.matrix[0] @ volts / (2 * np.pi * EPSILON_0 * section.filler_permittivity)
    wall = section.surround
    origin = complex(getattr(wall, "x", 0.0), wall.y) if wall else 0j
    points = np.asarray(x)[None, :] + 1j * np.asarray(y)[:, None] - origin
    # Real and imaginary part of the phasors are two independent electrostatic problems.
    return _map(geometry, solved, points, volts.real, charge.real) + 1j * _map(
        geometry, solved, points, volts.imag, charge.imag
    )


def _map(geometry: Geometry, solved: Solved, points: Complex, volts: Real, charge: Real) -> Real:
    multipole, metal_volts = solved.system.response(charge)
    z, a, b, ratio = (v[0] for v in (geometry.centre, geometry.metal, geometry.cover,
                                     geometry.ratio))
    level = float(np.mean(volts - metal_volts)) if geometry.wall == "none" else 0.0
    by_conductor = [_in_order(multipole, solved, i) for i in range(len(z))]
    out = np.full(points.shape, level)
    # Points in metal, where the series grow without bound, are written over below.
    with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
        for i, orders in enumerate(by_conductor):
            w = points - z[i]
            out += np.real(-charge[i] * np.log(w) + _series(orders, b[i] / w))
            out += _image(geometry, points, i, charge[i], orders)
    rho = reflection(geometry, int(solved.order.max()))[0]
    for i, orders in enumerate(by_conductor):
        w = points - z[i]
        if b[i] > a[i] and abs(ratio[i] - 1) > 1e-9:
            inside = (np.abs(w) < b[i]) & (np.abs(w) > a[i])
            own = volts[i] - charge[i] / ratio[i] * np.log(np.abs(w[inside]) / a[i])
            out[inside] = own + _cover(orders, rho[i, : len(orders)], w[inside], a[i], b[i])
        out[np.abs(w) <= a[i]] = volts[i]
    beyond = points.imag <= 0 if geometry.wall == "plane" else (
        np.abs(points) >= geometry.pipe_radius[0])
    out[beyond] = 0.0
    return out


def _in_order(multipole: Complex, solved: Solved, conductor: int) -> Complex:
    mine = solved.conductor == conductor
    return np.asarray(multipole[mine][np.argsort(solved.order[mine])])


def _series(coefficients: Complex, base: Complex) -> Complex:
    """Σ_m coefficients[m − 1] base^m by Horner's rule."""
    total = np.zeros_like(base)
    for c in coefficients[::-1]:
        total = (total + c) * base
    return total


def _image(geometry: Geometry, points: Complex, i: int, charge: float, orders: Complex) -> Real:
    z, b = geometry.centre[0, i], geometry.cover[0, i]
    if geometry.wall == "none":
        return np.zeros(points.shape)
    if geometry.wall == "plane":
        away = points - np.conj(z)
        return np.real(charge * np.log(away) - _series(np.conj(orders), b / away))
    radius = geometry.pipe_radius[0]
    across = radius**2 - np.conj(z) * points
    return np.real(
        charge * np.log(across / radius) - _series(np.conj(orders), b * points / across)
    )


def _cover(orders: Complex, rho: Real, w: Complex, a: float, b: float) -> Real:
    """Harmonics in a cover: Re Σ P_n [(w/b)^n − t_n (b / conj w)^n], P = (L + conj A)/(1 − t)."""
    t = (a / b) ** (2 * np.arange(1, len(orders) + 1))
    inner: Complex = np.asarray(np.conj(orders) * (1 + 1 / rho) / (1 - t))
    # t_n = (a/b)²ⁿ goes into the base of the second series.
    outside: Complex = np.conj(a**2 / (b * w))
    inward, outward = _series(inner, w / b), _series(inner, outside)
    return np.asarray(inward.real - outward.real)
