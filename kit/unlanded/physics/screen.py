"""A screen that is not everywhere at 0 V, and cores in screens of their own."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from ..errors import Refused

Real = NDArray[np.float64]


def floating_screen(matrix: Real, *, to_earth: float) -> Real:
    """Capacitance matrix (n, n) [F/m] of cores whose common screen is earthed at no end.

    Parameters
    ----------
    matrix : with the screen at 0 V (n, n) [F/m]
    to_earth : of the screen's outside [F/m], at least 0; 0 leaves only the cores for return

    The screen takes the potential at which its own charge is zero: c cᵀ / (Σ c + to_earth) is
    taken off, with c the cores' capacitances to the screen. Earthed at one end or at both, it is
    at 0 V for capacitance, and `matrix` holds; the two differ in what is induced magnetically.

    Two cores in a floating screen that nothing else is near share all their charge:

    >>> floating_screen(np.array([[3.0, -1.0], [-1.0, 3.0]]), to_earth=0.0).tolist()
    [[2.0, -2.0], [-2.0, 2.0]]
    """
    if not to_earth >= 0:
        raise Refused("screen", "capacitance to earth must be at least 0 F/m",
                      given=f"{to_earth:g}")
    own = matrix.sum(axis=1)
    if own.sum() + to_earth <= 0:
        raise Refused("screen", "has no capacitance to anything")
    return np.asarray(matrix - np.outer(own, own) / (own.sum() + to_earth))


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
