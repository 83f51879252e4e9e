"""Singles pulled into a conduit: dropped one after another, each coming to rest.

A single rests where the conduit's wall and those already there hold it from both sides. The first
may lie up to 30° from the lowest point, where friction holds it. All lengths in metres.
"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from ..errors import Refused
from .layouts import Core
from .section import Conductor

Real = NDArray[np.float64]
Index = NDArray[np.intp]
TRIES = 60
_REPOSE = np.pi / 6
_SLACK = 1e-9  # of the radius: contacts are computed, and may seem to overlap in the last digit
_ONE_PLACE = 1e-12  # m: centres that near are one, which nothing is held between


def packed(
    names: Sequence[str], cores: Sequence[Core], *, pipe_radius: float, seed: int
) -> tuple[Conductor, ...]:
    """`cores` at rest in a conduit of inner radius `pipe_radius` centred on the origin.

    The same seed gives the same arrangement. Refused when they do not go in.
    """
    if len(names) != len(cores):
        raise Refused("in conduit", f"takes {len(cores)} names", given=len(names))
    outer = np.array([c.cover_radius for c in cores])
    place = packed_positions(outer, pipe_radius=pipe_radius, count=1, seed=seed)[0]
    return tuple(
        core.at(name, float(x), float(y))
        for name, core, (x, y) in zip(names, cores, place, strict=True)
    )


def packed_positions(
    outer: Real, *, pipe_radius: float | Real, count: int, seed: int, which: Index | None = None
) -> Real:
    """`count` random arrangements of circles of radius `outer` (n,) [m]: centres (count, n, 2).

    Centres are counted from the conduit's. Orders of dropping are random; an arrangement that
    gets stuck is dropped again in another order, up to 60 times, then the whole is refused.

    With `which` (B,) only the arrangements of these numbers are made, (B, n, 2). Each may then
    have its own radii (B, n) and conduit (B,): the same number falls the same way.
    """
    which = np.arange(count) if which is None else which
    outer = np.asarray(outer, dtype=float)
    if not outer.shape[-1]:
        raise Refused("in conduit", "needs at least one single")
    outer = np.broadcast_to(outer, (len(which), outer.shape[-1]))
    pipe = np.broadcast_to(np.asarray(pipe_radius, dtype=float), len(which))
    _refuse_too_large(outer, pipe)
    rng = np.random.default_rng(seed)
    out = np.empty((*outer.shape, 2))
    left = np.arange(len(which))
    for _ in range(TRIES):
        order, angle, lots = _chances(rng, count, outer.shape[1], which[left])
        radii = np.take_along_axis(outer[left], order, axis=1)
        places, settled = _drop(radii, pipe[left], angle, lots)
        done = left[settled]
        rows = np.arange(len(done))[:, None]
        placed = np.empty((len(done), outer.shape[1]), dtype=complex)
        placed[rows, order[settled]] = places[settled]
        out[done, :, 0], out[done, :, 1] = placed.real, placed.imag
        left = left[~settled]
        if not len(left):
            return out
    stuck = left[0]
    share = float(np.sum(outer[stuck]**2) / pipe[stuck]**2)
    raise Refused("in conduit", f"{outer.shape[1]} singles do not go into a conduit of "
                  f"{2 * pipe[stuck]:.4g} m inner diameter",
                  given=f"they fill {share:.0%} of it", hint="take a larger conduit")


def _refuse_too_large(outer: Real, pipe: Real) -> None:
    over = np.flatnonzero(np.any(outer > pipe[:, None], axis=1))
    if len(over):
        raise Refused("in conduit", f"every single must be under {2 * pipe[over[0]]:.4g} m across",
                      given=f"{2 * outer[over[0]].max():.4g} m")


def _chances(
    rng: np.random.Generator, count: int, n: int, which: Index
) -> tuple[Index, Real, list[Real]]:
    """Order, angle and lots of the arrangements `which` of `count`.

    Those of all are drawn, so that one does not depend on which others there are.
    """
    order = rng.permuted(np.tile(np.arange(n), (count, 1)), axis=1)
    angle = rng.uniform(-_REPOSE, _REPOSE, count)
    lots = [rng.random((count, k * (k + 1))) for k in range(1, n)]
    return order[which], angle[which], [lot[which] for lot in lots]


def _drop(
    outer: Real, pipe: Real, angle: Real, lots: Sequence[Real]
) -> tuple[NDArray[np.complex128], NDArray[np.bool_]]:
    """Centres (B, n) of circles dropped in the order given, and which rows came to rest.

    The first rests `angle` (B,) from the lowest point, each further one where its lot falls among
    the places that hold it.
    """
    rows, n = outer.shape
    centres = np.empty((rows, n), dtype=complex)
    centres[:, 0] = -1j * (pipe - outer[:, 0]) * np.exp(1j * angle)
    settled = np.ones(rows, dtype=bool)
    for k, lot in enumerate(lots, start=1):
        candidates, held = _rests(centres[:, :k], outer[:, :k], outer[:, k], pipe)
        settled &= held.any(axis=1)
        chosen = np.where(held, lot, -1.0).argmax(axis=1)
        centres[:, k] = candidates[np.arange(rows), chosen]
    return centres, settled


def _rests(centres: NDArray[np.complex128], outer: Real, radius: Real, pipe: Real
           ) -> tuple[NDArray[np.complex128], NDArray[np.bool_]]:
    """Places (B, 2 pairs) where a circle touches two things, and which of them hold it there."""
    rows, k = centres.shape
    # The wall counts as a circle about the origin, touched from inside.
    about = np.concatenate([centres, np.zeros((rows, 1))], axis=1)
    reach = np.concatenate([outer + radius[:, None], (pipe - radius)[:, None]], axis=1)
    first, second = np.triu_indices(k + 1, 1)
    p, q, rp, rq = about[:, first], about[:, second], reach[:, first], reach[:, second]
    line = q - p
    apart = np.maximum(np.abs(line), _ONE_PLACE)
    along = (apart**2 + rp**2 - rq**2) / (2 * apart)
    height2 = rp**2 - along**2
    across = 1j * np.sqrt(np.maximum(height2, 0.0))
    spots = np.stack([p + line / apart * (along + across), p + line / apart * (along - across)], -1)
    wall = (second == k)[:, None]
    # The upward reaction must be a sum of the two pushes with no pull in it. A single as wide as
    # the conduit has no push from its wall.
    with np.errstate(divide="ignore", invalid="ignore"):
        push_p = (spots - p[..., None]) / rp[..., None]
        push_q = np.where(wall, q[..., None] - spots, spots - q[..., None]) / rq[..., None]
        turn = push_p.real * push_q.imag - push_p.imag * push_q.real
        held = (-push_q.real / turn >= 0) & (push_p.real / turn >= 0)
    held &= (height2 >= 0)[..., None]
    spots, held = spots.reshape(rows, -1), held.reshape(rows, -1)
    gap = np.abs(spots[:, :, None] - centres[:, None, :]) - (outer + radius[:, None])[:, None, :]
    held &= np.all(gap >= -_SLACK * radius[:, None, None], axis=-1)
    held &= np.abs(spots) <= (pipe - radius * (1 - _SLACK))[:, None]
    return spots, held
