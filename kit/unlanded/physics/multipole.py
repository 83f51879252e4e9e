"""The multipole system of a batch of sections.

Outside the covers the potential is a sum, over the conductors i, of a line charge and of
multipoles at the centre z_i (λ = q / 2π ε_filler, everything complex in the plane):

    φ(z) = Re Σ_i [ −λ_i ln(z − z_i) + Σ_m A_im (b_i / (z − z_i))^m ]  + images in the wall

A covered conductor answers the incoming harmonic L_n (w/b)^n with A_n = ρ_n conj(L_n).
Written for the scaled unknowns x_m = sqrt(m / |ρ_m|) A_m, real parts then imaginary parts, this
is a symmetric system K x = −g λ, and the conductors' potentials are V = (P₀ − gᵀ K⁻¹ g) λ.
Reciprocity makes K symmetric; energy makes it positive definite whenever every cover has at
least the filler's permittivity, so that one Cholesky factorisation of [[K, g], [gᵀ, P₀]]
holds the wanted Schur complement in its last rows.

Sources: the harmonic expansion of covered wires is that of Clements, Paul and Adams, IEEE Trans.
EMC-17 (1975) 238; images in a plane and a circle are textbook (Smythe).
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import lru_cache

import numpy as np
from numpy.typing import NDArray

from .section import Pipe, Plane, Section

Real = NDArray[np.float64]
Complex = NDArray[np.complex128]
Index = NDArray[np.intp]
_NO_ANSWER = 1e-15


@dataclass(frozen=True)
class Geometry:
    """A batch of sections of one kind as arrays; B sections of n conductors.

    `centre` is complex (B, n) [m], counted from the pipe's centre or the plane's height;
    `metal`, `cover` (B, n) [m]; `ratio` (B, n) cover over filler permittivity; `filler` (B,);
    `wall` is "none", "plane" or "pipe"; `pipe_radius` (B,) [m], infinite without a pipe.
    """

    centre: Complex
    metal: Real
    cover: Real
    ratio: Real
    filler: Real
    wall: str
    pipe_radius: Real

    @classmethod
    def of(cls, sections: Sequence[Section]) -> Geometry:
        """The batch of `sections`, which must agree in conductor count and kind of surround."""
        rows = [
            [(c.x, c.y, c.radius, c.outer, c.cover_permittivity) for c in s.conductors]
            for s in sections
        ]
        x, y, metal, cover, permittivity = np.moveaxis(np.array(rows, dtype=float), -1, 0)
        filler = np.array([s.filler_permittivity for s in sections], dtype=float)
        first = sections[0].surround
        origin = np.zeros(len(rows), dtype=complex)
        pipe_radius = np.full(len(rows), np.inf)
        for k, section in enumerate(sections):
            wall = section.surround
            if isinstance(wall, Pipe):
                origin[k], pipe_radius[k] = complex(wall.x, wall.y), wall.radius
            elif isinstance(wall, Plane):
                origin[k] = 1j * wall.y
        kind = {Pipe: "pipe", Plane: "plane", type(None): "none"}[type(first)]
        centre = x + 1j * y - origin[:, None]
        return cls(centre, metal, cover, permittivity / filler[:, None], filler, kind, pipe_radius)

    def take(self, which: Index | slice) -> Geometry:
        """The sections numbered `which`."""
        return Geometry(self.centre[which], self.metal[which], self.cover[which],
                        self.ratio[which], self.filler[which], self.wall, self.pipe_radius[which])


def reflection(geometry: Geometry, orders: int) -> Real:
    """ρ_n of each conductor for n = 1..orders, shape (B, n, orders); −1 for bare metal.

    From continuity of the potential and of ε ∂φ/∂r at the cover's outside, with the metal inside
    an equipotential: ρ = (1 − k) / (1 + k), k = κ (1 + t) / (1 − t), t = (a/b)^(2n).
    """
    t = ((geometry.metal / geometry.cover) ** 2)[..., None] ** np.arange(1, orders + 1)
    stiff = geometry.ratio[..., None] * (1 + t)
    return np.asarray((1 - t - stiff) / (1 - t + stiff))


@dataclass(frozen=True)
class System:
    """The symmetric system of a batch, for multipoles listed as (conductor, order).

    `lower` (B, 2N + n, 2N + n) is the lower triangle of [[K, g], [gᵀ, P₀]] with the unknowns in
    the order: real and imaginary parts of the first `coarse` multipoles, the n charges, then the
    remaining multipoles. So the leading block is the system truncated to the first `coarse` multipoles,
    and one factorisation yields the answer at both truncations.
    """

    lower: Real
    coarse: int
    charges: int
    definite: bool
    amplitude: Real  # A = amplitude × x, (B, N)

    def inverse_potential_coefficients(self) -> tuple[Real, Real]:
        """P⁻¹ (B, n, n) at the coarse and at the full truncation, for V = P λ."""
        start, stop = 2 * self.coarse, 2 * self.coarse + self.charges
        if not self.definite:
            whole = _symmetric(self.lower)
            return (_inverse_block(whole[:, :stop, :stop], start, stop),
                    _inverse_block(whole, start, stop))
        factor = np.linalg.cholesky(self.lower)  # reads the lower triangle only
        own = np.linalg.inv(factor[:, start:stop, start:stop])
        coarse = own.swapaxes(-1, -2) @ own
        if stop == self.lower.shape[-1]:
            return coarse, coarse
        gain = np.linalg.solve(factor[:, stop:, stop:], factor[:, stop:, start:stop] @ own)
        return coarse, coarse + gain.swapaxes(-1, -2) @ gain

    def response(self, charges: Real) -> tuple[Complex, Real]:
        """Coefficients A (N,) and potentials V (n,) of the first section, for charges λ (n,)."""
        start, stop = 2 * self.coarse, 2 * self.coarse + self.charges
        whole = _symmetric(self.lower[:1])[0]
        inner = np.r_[0:start, stop : len(whole)]
        g = whole[inner, start:stop]
        x = np.linalg.solve(whole[np.ix_(inner, inner)], -g @ charges)
        volts = whole[start:stop, start:stop] @ charges + g.T @ x
        rest = start + (len(inner) - start) // 2
        re = np.concatenate([x[: self.coarse], x[start:rest]])
        im = np.concatenate([x[self.coarse : start], x[rest:]])
        return np.asarray(self.amplitude[0] * (re + 1j * im)), volts


def _symmetric(lower: Real) -> Real:
    below = np.tril(lower, -1)
    return np.asarray(np.tril(lower) + below.swapaxes(-1, -2))


def _inverse_block(matrix: Real, start: int, stop: int) -> Real:
    unit = np.zeros((matrix.shape[-1], stop - start))
    unit[start:stop] = np.eye(stop - start)
    return np.asarray(np.linalg.solve(matrix, unit[None])[:, start:stop])


def assemble(geometry: Geometry, conductor: Index, order: Index, coarse: int) -> System:
    """The system for multipoles of order `order[r]` (from 1) at conductor `conductor[r]`.

    They are listed order by order, conductor by conductor within an order, those of the coarse
    truncation first.
    """
    size, n = len(order), geometry.centre.shape[-1]
    rho = reflection(geometry, int(order.max()))[:, conductor, order - 1]
    weight = np.sqrt(np.abs(rho))
    same, conjugate, g, p0 = _interaction(geometry, conductor, order, weight)
    matrix = np.zeros((len(weight), 2 * size + n, 2 * size + n))
    charge = slice(2 * coarse, 2 * coarse + n)
    # Runs of rows and columns: (place in the matrix, multipoles, imaginary parts?).
    runs = [(0, slice(0, coarse), False), (coarse, slice(0, coarse), True)]
    if coarse < size:
        rest = size - coarse
        runs += [(charge.stop, slice(coarse, size), False),
                 (charge.stop + rest, slice(coarse, size), True)]
    plus, minus = same.real - conjugate.real, -same.real - conjugate.real
    mixed = -same.imag - conjugate.imag
    for k, (place, rows, imaginary) in enumerate(runs):
        here = slice(place, place + rows.stop - rows.start)
        for at, columns, other in runs[: k + 1]:
            there = slice(at, at + columns.stop - columns.start)
            if imaginary and not other:
                matrix[:, here, there] = mixed[:, columns, rows].swapaxes(-1, -2)
            else:
                block = mixed if other != imaginary else minus if other else plus
                matrix[:, here, there] = block[:, rows, columns]
        part = -g.imag[:, rows] if imaginary else g.real[:, rows]
        if place < charge.start:
            matrix[:, charge, here] = part.swapaxes(-1, -2)
        else:
            matrix[:, here, charge] = part
    matrix[:, charge, charge] = p0
    # An order that the cover does not answer (|ρ| rounded to nothing) keeps a plain 1.
    sign = np.where(rho > _NO_ANSWER, -1.0, 1.0)
    for place, rows, _ in runs:
        diagonal = np.arange(place, place + rows.stop - rows.start)
        matrix[:, diagonal, diagonal] += sign[:, rows]
    return System(matrix, coarse, n, bool(np.all(sign > 0)), weight / np.sqrt(order))


def _interaction(geometry: Geometry, conductor: Index, order: Index, weight: Real
                 ) -> tuple[Complex, Complex | Real, Complex, Real]:
    """What the multipoles do to each other (S on A, H on conj A), to the charges (g), and P₀."""
    direct, g, p0 = _direct(geometry, conductor, order, weight)
    if geometry.wall == "none":
        return direct, np.zeros((1, 1, 1)), g, p0
    image = _plane_image if geometry.wall == "plane" else _pipe_image
    conjugate, g_image, p_image = image(geometry, conductor, order, weight)
    return direct, conjugate, g + g_image, p0 + p_image


def _direct(geometry: Geometry, conductor: Index, order: Index, weight: Real
            ) -> tuple[Complex, Complex, Real]:
    """Conductors upon each other: S (B, N, N), g (B, N, n), P₀ (B, n, n)."""
    z, b = geometry.centre, geometry.cover
    n = z.shape[-1]
    apart = z[:, :, None] - z[:, None, :]
    own = np.arange(n)
    apart[:, own, own] = np.inf
    powers = _powers((-b[:, :, None] / apart)[:, conductor, :], order) * weight[..., None]
    matrix = powers[:, :, conductor]
    matrix = matrix * matrix.swapaxes(-1, -2)
    matrix *= _binomials(int(order.max(initial=1)))[np.ix_(order - 1, order - 1)]
    apart[:, own, own] = b
    p0 = -np.log(np.abs(apart))
    p0[:, own, own] += np.log(b / geometry.metal) / geometry.ratio
    if geometry.wall == "none":
        # Only differences of potential count at zero total charge: any unit of length will do,
        # and one larger than the section keeps the matrix positive definite.
        p0 += np.log(8 * (np.abs(apart).max(axis=(-1, -2), keepdims=True) + b.max()))
    return matrix, powers / np.sqrt(order)[:, None], p0


def _pipe_image(geometry: Geometry, conductor: Index, order: Index, weight: Real
                ) -> tuple[Complex, Complex, Real]:
    """Images in the pipe: H (B, N, N), and what they add to g and P₀."""
    z, b = geometry.centre, geometry.cover
    radius = geometry.pipe_radius[:, None, None]
    across = radius**2 - np.conj(z[:, None, :]) * z[:, :, None]
    top = int(order.max(initial=1))
    # h_nm = Σ_k k C(n,k) C(m,k) / √(nm) · α^(m−k) γ^(n−k) β^k splits into two triangular factors.
    alpha = b[:, None, :] * z[:, :, None] / across
    beta = np.sqrt(b[:, None, :] * b[:, :, None]) * radius / across
    factor = _shifted_powers(alpha, top)
    factor *= _triangle(top)
    factor *= _powers_up(beta, top)[..., None, :]
    h = np.conj(factor.swapaxes(1, 2)) @ factor.swapaxes(-1, -2)
    if len(order) == top * z.shape[-1]:  # every conductor has every order: no need to pick
        matrix = h.transpose(0, 3, 1, 4, 2).reshape(len(h), len(order), len(order))
    else:
        matrix = h[:, conductor[:, None], conductor, order[:, None] - 1, order - 1]
    matrix *= weight[:, :, None]
    matrix *= weight[:, None, :]
    toward = (b[:, :, None] * np.conj(z[:, None, :]) / across)[:, conductor, :]
    g = -_powers(toward, order) * (weight / np.sqrt(order))[..., None]
    return matrix, g, np.log(np.abs(across) / radius)


def _plane_image(geometry: Geometry, conductor: Index, order: Index, weight: Real
                 ) -> tuple[Complex, Complex, Real]:
    """Images in the plane: H (B, N, N), and what they add to g and P₀."""
    z, b = geometry.centre, geometry.cover
    apart = z[:, :, None] - np.conj(z[:, None, :])
    powers = _powers((-b[:, :, None] / apart)[:, conductor, :], order) * weight[..., None]
    matrix = powers[:, :, conductor]
    matrix = matrix * np.conj(matrix.swapaxes(-1, -2))
    matrix *= _binomials(int(order.max(initial=1)))[np.ix_(order - 1, order - 1)]
    return matrix, -powers / np.sqrt(order)[:, None], np.log(np.abs(apart))


def _powers(base: Complex, order: Index) -> Complex:
    """base[:, r, :] to the power order[r]."""
    return np.asarray(base ** order[:, None])


def _powers_up(base: Complex, top: int) -> Complex:
    """base^1 .. base^top along a new last axis."""
    out = np.repeat(base[..., None], top, axis=-1)
    return np.asarray(np.cumprod(out, axis=-1))


def _shifted_powers(base: Complex, top: int) -> Complex:
    """base^(m − k) for m, k = 1..top along two new last axes, 0 above the diagonal."""
    powers = np.concatenate([np.ones_like(base)[..., None], _powers_up(base, top)], axis=-1)
    m = np.arange(top)
    return np.asarray(powers[..., np.maximum(m[:, None] - m[None, :], 0)])


@lru_cache(maxsize=8)
def _binomials(top: int) -> Real:
    """(m + n − 1)! / ((m − 1)! (n − 1)! √(m n)) for m, n = 1..top."""
    m = np.arange(1.0, top + 1)
    logs = np.cumsum(np.concatenate([[0.0], np.log(np.arange(1.0, 2 * top))]))
    k = np.arange(1, top + 1)
    return np.asarray(
        np.exp(logs[k[:, None] + k - 1] - logs[k - 1][:, None] - logs[k - 1])
        / np.sqrt(m[:, None] * m)
    )


@lru_cache(maxsize=8)
def _triangle(top: int) -> Real:
    """C(m, k) √(k / m) for m, k = 1..top, 0 above the diagonal."""
    logs = np.cumsum(np.concatenate([[0.0], np.log(np.arange(1.0, top + 1))]))
    m, k = np.arange(1, top + 1)[:, None], np.arange(1, top + 1)[None, :]
    inside = np.exp(logs[m] - logs[k] - logs[np.maximum(m - k, 0)]) * np.sqrt(k / m)
    return np.asarray(np.where(k <= m, inside, 0.0))
