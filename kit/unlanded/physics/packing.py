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
TRIES = 60
_REPOSE = np.pi / 6
_SLACK = 1e-9  # of the radius: contacts are computed, and may seem to overlap in the last digit


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


def packed_positions(outer: Real, *, pipe_radius: float, count: int, seed: int) -> Real:
    """`count` random arrangements of circles of radius `outer` (n,) [m]: centres (count, n, 2).

    Centres are counted from the conduit's. Orders of dropping are random; an arrangement that
    gets stuck is dropped again in another order, up to 60 times, then the whole is refused.
    """
    outer = np.asarray(outer, dtype=float)
    if not len(outer):
        raise Refused("in conduit", "needs at least one single")
    if np.any(outer > pipe_radius):
        raise Refused("in conduit", f"every single must be under {2 * pipe_radius:.4g} m across",
                      given=f"{2 * outer.max():.4g} m")
    rng = np.random.default_rng(seed)
    out = np.empty((count, len(outer), 2))
    left = np.arange(count)
    for _ in range(TRIES):
        order = rng.permuted(np.tile(np.arange(len(outer)), (len(left), 1)), axis=1)
        places, settled = _drop(outer[order], pipe_radius, rng)
        done = left[settled]
        rows = np.arange(len(done))[:, None]
        placed = np.empty((len(done), len(outer)), dtype=complex)
        placed[rows, order[settled]] = places[settled]
        out[done, :, 0], out[done, :, 1] = placed.real, placed.imag
        left = left[~settled]
        if not len(left):
            return out
    share = float(np.sum(outer**2) / pipe_radius**2)
    raise Refused("in conduit", f"{len(outer)} singles do not go into a conduit of "
                  f"{2 * pipe_radius:.4g} m inner diameter",
                  given=f"they fill {share:.0%} of it", hint="take a larger conduit")


def _drop(outer: Real, pipe: float, rng: np.random.Generator
          ) -> tuple[NDArray[np.complex128], NDArray[np.bool_]]:
    """Centres (B, n) of circles dropped in the order given, and which rows came to rest."""
    rows, n = outer.shape
    angle = rng.uniform(-_REPOSE, _REPOSE, rows)
    centres = np.empty((rows, n), dtype=complex)
    centres[:, 0] = -1j * (pipe - outer[:, 0]) * np.exp(1j * angle)
    settled = np.ones(rows, dtype=bool)
    for k in range(1, n):
        candidates, held = _rests(centres[:, :k], outer[:, :k], outer[:, k], pipe)
        settled &= held.any(axis=1)
        lot = np.where(held, rng.random(held.shape), -1.0)
        centres[:, k] = candidates[np.arange(rows), lot.argmax(axis=1)]
    return centres, settled


def _rests(centres: NDArray[np.complex128], outer: Real, radius: Real, pipe: float
           ) -> tuple[NDArray[np.complex128], NDArray[np.bool_]]:
    """Places (B, 2 pairs) where a circle touches two things, and which of them hold it there."""
    rows, k = centres.shape
    # The wall counts as a circle about the origin, touched from inside.
    about = np.concatenate([centres, np.zeros((rows, 1))], axis=1)
    reach = np.concatenate([outer + radius[:, None], (pipe - radius)[:, None]], axis=1)
    first, second = np.triu_indices(k + 1, 1)
    p, q, rp, rq = about[:, first], about[:, second], reach[:, first], reach[:, second]
    line = q - p
    apart = np.maximum(np.abs(line), 1e-300)
    along = (apart**2 + rp**2 - rq**2) / (2 * apart)
    height2 = rp**2 - along**2
    across = 1j * np.sqrt(np.maximum(height2, 0.0))
    spots = np.stack([p + line / apart * (along + across), p + line / apart * (along - across)], -1)
    wall = (second == k)[:, None]
    push_p = (spots - p[..., None]) / rp[..., None]
    push_q = np.where(wall, q[..., None] - spots, spots - q[..., None]) / rq[..., None]
    turn = push_p.real * push_q.imag - push_p.imag * push_q.real
    # The upward reaction must be a sum of the two pushes with no pull in it.
    with np.errstate(divide="ignore", invalid="ignore"):
        held = (-push_q.real / turn >= 0) & (push_p.real / turn >= 0)
    held &= (height2 >= 0)[..., None]
    spots, held = spots.reshape(rows, -1), held.reshape(rows, -1)
    gap = np.abs(spots[:, :, None] - centres[:, None, :]) - (outer + radius[:, None])[:, None, :]
    held &= np.all(gap >= -_SLACK * radius[:, None, None], axis=-1)
    held &= np.abs(spots) <= (pipe - radius * (1 - _SLACK))[:, None]
    return spots, held
