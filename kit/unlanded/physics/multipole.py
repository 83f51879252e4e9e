"""The multipole system of a batch of sections.

Outside the covers the potential is a sum, over the conductors i, of a line charge and of
multipoles at the centre z_i (λ = q / 2π ε_filler, everything complex in the plane):

    φ(z) = Re Σ_i [ −λ_i ln(z − z_i) + Σ_m A_im (b_i / (z − z_i))^m ]  + images in the wall

A covered conductor answers the incoming harmonic L_n (w/b)^n with A_n = ρ_n conj(L_n). Let r list
the pairs (conductor, order m). In the scaled unknowns x_r = √(m / |ρ_r|) A_r the answers are

    −sign(ρ_r) x_r + Σ_s [ conj(S_rs x_s) − H_rs x_s ] = −Σ_j conj(g_rj) λ_j

where S, symmetric, is what the others' multipoles do and H, Hermitian, what the images do. As a
real system K x = −g λ in Re x_1, Im x_1, Re x_2, … it is symmetric, and the conductors' potentials
are V = (P₀ − gᵀ K⁻¹ g) λ. K is positive definite, being an energy, whenever every cover has at
least the filler's permittivity. Then the Cholesky factor UᵀU of [[K, g], [gᵀ, P₀]] shows in its
last columns, the rows y_k above a block U_c, how V = P λ converges:

    P = U_cᵀ U_c,    and with the first k unknowns alone    P_k = P + Σ_{l>k} y_lᵀ y_l.

Sources: the harmonic expansion of covered wires is that of Clements, Paul and Adams, IEEE Trans.
EMC-17 (1975) 238; images in a plane and a circle are textbook (Smythe).
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from functools import lru_cache, partial
from typing import Any

import numpy as np
from numpy.typing import NDArray

from .section import Pipe, Plane, Section

Real = NDArray[np.float64]
Complex = NDArray[np.complex128]
Index = NDArray[np.intp]
# Of a matrix (B, N, N), by its rows and columns, and what `_Listed.paths` has for them.
Block = Callable[[slice, slice, Real], Complex]
_NO_ANSWER = 1e-15
_BAND = 48  # rows of multipoles filled together


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
        x, y, metal, cover, permittivity = np.array(rows, dtype=float).transpose(2, 0, 1)
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


def diagonal(matrices: NDArray[Any]) -> NDArray[Any]:
    """The diagonals (B, n) of matrices (B, n, n) that lie whole in memory, to be written to."""
    return matrices.reshape(len(matrices), -1)[:, :: matrices.shape[-1] + 1]


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
    """The symmetric system of a batch of B sections, for N multipoles and n charges.

    `upper` (B, 2N + n, 2N + n) is the Cholesky factor U of [[K, g], [gᵀ, P₀]] when `definite`
    (only its upper triangle is meant), else that matrix itself. `coarse`, ascending, are numbers
    of multipoles at which the series is also cut. `listed` tells which they are.
    """

    upper: Real
    coarse: tuple[int, ...]
    charges: int
    definite: bool
    listed: _Listed

    def inverse_potential_coefficients(self) -> Real:
        """P⁻¹ for V = P λ, cut at each of `coarse` and in full: (cuts + 1, B, n, n)."""
        stop = self.upper.shape[-1] - self.charges
        ends = [2 * k for k in self.coarse] + [stop]
        own, coupling = self.upper[:, stop:, stop:], self.upper[:, :stop, stop:]
        if self.definite:
            own = own * _upper(self.charges)
            potential = [own.swapaxes(-1, -2) @ own]
            for start, end in zip(ends[-2::-1], ends[:0:-1], strict=True):
                y = coupling[:, start:end]
                potential.insert(0, potential[0] + y.swapaxes(-1, -2) @ y)
        else:
            potential = [
                own - coupling[:, :k].swapaxes(-1, -2)
                @ np.linalg.solve(self.upper[:, :k, :k], coupling[:, :k])
                for k in ends
            ]
        return np.linalg.inv(np.array(potential))

    def response(self, charges: Real) -> tuple[Complex, Real]:
        """Coefficients A (N,) and potentials V (n,) of the first section, for charges λ (n,)."""
        stop = self.upper.shape[-1] - self.charges
        whole = np.triu(self.upper[0]) if self.definite else self.upper[0]
        inner, coupling, own = whole[:stop, :stop], whole[:stop, stop:], whole[stop:, stop:]
        x = -np.linalg.solve(inner, coupling @ charges)
        volts = own.T @ (own @ charges) if self.definite else own @ charges + coupling.T @ x
        scale = self.listed.of(self.listed.weight)[0] / np.sqrt(self.listed.order)
        return np.asarray(scale * (x[0::2] + 1j * x[1::2])), volts


def assemble(
    geometry: Geometry, conductor: Index, order: Index, coarse: tuple[int, ...]
) -> System:
    """The system for multipoles of order `order[r]` (from 1) at conductor `conductor[r]`."""
    _keep_freed_memory()
    rho = reflection(geometry, int(order.max()))
    listed = _Listed(conductor, order, np.sqrt(np.abs(rho)))
    stop, n = 2 * len(order), geometry.centre.shape[-1]
    matrix = np.empty((len(rho), stop + n, stop + n))
    # An order that the cover does not answer (|ρ| rounded to nothing) keeps a plain 1.
    weak = rho > _NO_ANSWER
    definite = not weak.any()
    g, p0 = _fill(matrix[:, :stop, :stop].view(complex), geometry, listed, definite)
    matrix[:, 0:stop:2, stop:], matrix[:, 1:stop:2, stop:] = g.real, g.imag
    matrix[:, stop:, stop:] = p0
    if definite:
        diagonal(matrix)[:, :stop] += 1.0
        _factorise(matrix)
    else:
        diagonal(matrix)[:, :stop] += np.repeat(listed.of(np.where(weak, -1.0, 1.0)), 2, axis=-1)
    return System(matrix, coarse, n, definite, listed)


@lru_cache(maxsize=1)
def _keep_freed_memory() -> None:
    """Let the C library keep what is freed between batches, once in a process.

    Fetching fresh pages from the system takes longer than the arithmetic on them. The GNU library
    sets how much it keeps by the largest block freed so far, up to 32 MiB; others do not mind.
    """
    np.empty(31 << 20, dtype=np.uint8)


def _factorise(matrix: Real) -> None:
    """Put the Cholesky factor U into the upper triangle of each matrix, where it stands."""
    from scipy.linalg.lapack import dpotrf

    for each in matrix:  # the transpose is in LAPACK's order of columns, so nothing is copied
        _, failed = dpotrf(each.T, lower=1, overwrite_a=1, clean=0)
        if failed:
            raise np.linalg.LinAlgError("the multipole system is not positive definite")


@dataclass(frozen=True)
class _Listed:
    """Conductor and order (N,) of the multipoles, √|ρ| of all conductors and orders (B, n, top)."""

    conductor: Index
    order: Index
    weight: Real

    def of(self, values: Real) -> Real:
        """From (B, n, top), the values of the listed multipoles (B, N)."""
        return values[:, self.conductor, self.order - 1]

    def spread(self, base: Complex) -> Complex:
        """√|ρ_r| base[i, j]^m for each multipole r = (i, m) and conductor j: (B, N, n)."""
        powers = _powers(base[:, None], self.weight.shape[-1], axis=1)
        powers = powers[:, self.order - 1, self.conductor]
        powers *= self.of(self.weight)[..., None]
        return np.asarray(powers)

    def paths(self, rows: slice, columns: slice) -> Real:
        """(m + n − 1)! / ((m − 1)! (n − 1)! √(m n)) of the orders m in `rows`, n in `columns`."""
        table = _binomials(self.weight.shape[-1])
        return table.take(self.order[rows] - 1, axis=0).take(self.order[columns] - 1, axis=1)

    def between(
        self, there: Complex, back: Complex, rows: slice, columns: slice, paths: Real
    ) -> Complex:
        """there[r, j] back[s, i] × `paths`, with r = (i, m) in `rows`, s = (j, n) in `columns`.

        From what the multipoles in `rows` do at a conductor j, and those in `columns` at i.
        """
        block = there[:, rows].take(self.conductor[columns], axis=-1)
        block *= back[:, columns].take(self.conductor[rows], axis=-1).swapaxes(-1, -2)
        block *= paths
        return np.asarray(block)


def _fill(
    k: Complex, geometry: Geometry, listed: _Listed, upper_only: bool
) -> tuple[Complex, Real]:
    """Fill K, given as complex rows (B, 2N, N); return conj(g) (B, N, n) and P₀ (B, n, n).

    Read as complex numbers, its rows of Re x and Im x are conj(S) − H and −i (conj(S) + H).
    """
    direct, g, p0 = _direct(geometry, listed)
    mirrored = None
    if geometry.wall != "none":
        image = _plane_image if geometry.wall == "plane" else _pipe_image
        mirrored, g_image, p_image = image(geometry, listed)
        g, p0 = g + g_image, p0 + p_image
    size = len(listed.order)
    for start in range(0, size, _BAND if upper_only else size):
        rows = slice(start, start + _BAND if upper_only else size)
        columns = slice(start, size)
        real, imaginary = k[:, 0::2][:, rows, columns], k[:, 1::2][:, rows, columns]
        paths = listed.paths(rows, columns)
        block = direct(rows, columns, paths)
        if mirrored is None:
            real[...] = block
        else:
            image_block = mirrored(rows, columns, paths)
            np.subtract(block, image_block, out=real)
            block += image_block
        np.multiply(block, -1j, out=imaginary)
    return g, p0


def _direct(geometry: Geometry, listed: _Listed) -> tuple[Block, Complex, Real]:
    """Conductors upon each other: blocks of conj(S), conj(g) (B, N, n), P₀ (B, n, n)."""
    z, b = geometry.centre, geometry.cover
    apart = z[:, :, None] - z[:, None, :]
    own = diagonal(apart)
    own[...] = np.inf
    spread = listed.spread(-np.conj(b[:, :, None] / apart))
    own[...] = b
    p0 = -np.log(np.abs(apart))
    diagonal(p0)[...] += np.log(b / geometry.metal) / geometry.ratio
    if geometry.wall == "none":
        # Only differences of potential count at zero total charge: any unit of length will do,
        # and one larger than the section keeps the matrix positive definite.
        p0 += np.log(8 * (np.abs(apart).max(axis=(-1, -2), keepdims=True) + b.max()))
    return partial(listed.between, spread, spread), spread / np.sqrt(listed.order)[:, None], p0


def _plane_image(geometry: Geometry, listed: _Listed) -> tuple[Block, Complex, Real]:
    """Images in the plane: blocks of H, and what they add to conj(g) and P₀."""
    z, b = geometry.centre, geometry.cover
    apart: Complex = z[:, :, None] - np.conj(z[:, None, :])
    spread = listed.spread(-b[:, :, None] / apart)
    block = partial(listed.between, spread, spread.conj())
    return block, -spread.conj() / np.sqrt(listed.order)[:, None], np.log(np.abs(apart))


def _pipe_image(geometry: Geometry, listed: _Listed) -> tuple[Block, Complex, Real]:
    """Images in the pipe: blocks of H, and what they add to conj(g) and P₀.

    With c = R² − z_i conj(z_j), u = b_i conj(z_j) / c, v = b_j z_i / c and p = b_i b_j (R / c)²,

        H_mn = Σ_k k C(m,k) C(n,k) / √(mn) u^(m−k) v^(n−k) p^k

    between the orders m of conductor i and n of j. With u = |u| τ, τ^m stands before the sum, and
    the sum over k is a product of a real and a complex matrix.
    """
    z, b = geometry.centre, geometry.cover
    radius = geometry.pipe_radius[:, None, None]
    across: Complex = radius**2 - z[:, :, None] * np.conj(z[:, None, :])
    toward = b[:, :, None] * np.conj(z[:, None, :]) / across
    count, n, top = listed.weight.shape
    i, j = _pairs(n)
    tau = np.exp(1j * np.angle(toward[:, i, j]))
    p = b[:, i] * b[:, j] * (radius[..., 0] / across[:, i, j]) ** 2
    left = _shifted_powers(np.abs(toward[:, i, j]), top)
    right = _shifted_powers(np.conj(toward[:, j, i]), top) * listed.weight[:, j, None, :]
    right *= _powers((p / tau)[..., None], top)[..., None]
    block = (left.swapaxes(-1, -2) @ right.view(float)).view(complex)
    block *= (_powers(tau[..., None], top) * listed.weight[:, i])[..., None]
    whole = np.empty((count, n, top, n, top), dtype=complex)
    for k in range(len(i)):
        whole[:, i[k], :, j[k]] = block[:, k]
        np.conj(block[:, k].swapaxes(-1, -2), out=whole[:, j[k], :, i[k]])
    matrix = whole.reshape(count, n * top, n * top)
    place = listed.conductor * top + listed.order - 1
    g = -listed.spread(np.conj(toward)) / np.sqrt(listed.order)[:, None]
    return (lambda rows, columns, _: matrix.take(place[rows], axis=1).take(place[columns], axis=2),
            g, np.log(np.abs(across) / radius))


def _powers(base: Real | Complex, top: int, axis: int = -1) -> Any:
    """base^1 .. base^top along the axis on which `base` has one element."""
    shape = list(base.shape)
    shape[axis] = top
    out = np.empty(shape, dtype=base.dtype)
    out[...] = base
    return np.multiply.accumulate(out, axis=axis, out=out)


def _shifted_powers(base: Any, top: int) -> Any:
    """C(n, k) √(k / n) base^(n − k) for k, n = 1..top along two new last axes, 0 for n < k."""
    padded = np.zeros((*base.shape, 2 * top - 1), dtype=base.dtype)
    padded[..., top - 1] = 1.0
    padded[..., top:] = _powers(base[..., None], top - 1)
    *outer, step = padded.strides
    shifted = np.lib.stride_tricks.as_strided(
        padded[..., top - 1 :], (*base.shape, top, top), (*outer, -step, step))
    return np.multiply(shifted, _triangle(top), out=np.empty(shifted.shape, dtype=base.dtype))


@lru_cache(maxsize=8)
def _pairs(n: int) -> tuple[Index, Index]:
    """Every two of n, and each with itself, once."""
    return np.triu_indices(n)


@lru_cache(maxsize=8)
def _upper(n: int) -> Real:
    """1 on and above the diagonal, 0 below."""
    return np.triu(np.ones((n, n)))


@lru_cache(maxsize=8)
def _binomials(top: int) -> Real:
    """(m + n − 1)! / ((m − 1)! (n − 1)! √(m n)) for m, n = 1..top."""
    k = np.arange(1, top + 1)
    logs = np.cumsum(np.concatenate([[0.0], np.log(np.arange(1.0, 2 * top))]))
    return np.asarray(
        np.exp(logs[k[:, None] + k - 1] - logs[k - 1][:, None] - logs[k - 1])
        / np.sqrt(k[:, None] * k)
    )


@lru_cache(maxsize=8)
def _triangle(top: int) -> Real:
    """C(n, k) √(k / n) for k, n = 1..top, 0 for n < k."""
    logs = np.cumsum(np.concatenate([[0.0], np.log(np.arange(1.0, top + 1))]))
    k, n = np.arange(1, top + 1)[:, None], np.arange(1, top + 1)[None, :]
    inside = np.exp(logs[n] - logs[k] - logs[np.maximum(n - k, 0)]) * np.sqrt(k / n)
    return np.asarray(np.where(k <= n, inside, 0.0))
