"""A screen as a conductor round its cores, and cores in screens of their own."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import ArrayLike, NDArray

from ..errors import Refused

Real = NDArray[np.float64]


def with_screen(matrix: Real, *, to_earth: ArrayLike) -> Real:
    """Capacitance matrix (..., n + 1, n + 1) [F/m] of cores and, last, the screen round them all.

    Parameters
    ----------
    matrix : of the cores with the screen at 0 V (..., n, n) [F/m]; they face nothing outside it
    to_earth : of the screen's outside (...) [F/m], at least 0; the two broadcast

    A row's sum is what a core has to the screen. Of two cores with 1 F/m between them and 2 to a
    screen that has 6 to earth:

    >>> with_screen(np.array([[3.0, -1.0], [-1.0, 3.0]]), to_earth=6.0).tolist()
    [[3.0, -1.0, -2.0], [-1.0, 3.0, -2.0], [-2.0, -2.0, 10.0]]
    """
    outside = np.asarray(to_earth, dtype=float)
    if not np.all(outside >= 0):
        raise Refused("screen", "capacitance to earth must be at least 0 F/m",
                      given=f"{outside.min():g}")
    own = matrix.sum(axis=-1)
    size = own.shape[-1] + 1
    out = np.empty((*np.broadcast_shapes(own.shape[:-1], outside.shape), size, size))
    out[..., :-1, :-1] = matrix
    out[..., :-1, -1] = out[..., -1, :-1] = -own
    out[..., -1, -1] = own.sum(axis=-1) + outside
    return out


def own_screens(matrix: Real, screened: Sequence[int]) -> Real:
    """The matrix (..., n, n) with the cores `screened` each in an earthed screen of its own.

    Their capacitance to all others becomes one to earth, of the size it had.

    >>> own_screens(np.array([[3.0, -1.0], [-1.0, 3.0]]), [0]).tolist()
    [[3.0, 0.0], [0.0, 3.0]]
    """
    out = np.array(matrix, dtype=float)
    for k in screened:
        diagonal = out[..., k, k].copy()
        out[..., k, :] = 0.0
        out[..., :, k] = 0.0
        out[..., k, k] = diagonal
    return out
