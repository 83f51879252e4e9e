"""A multiconductor line: its exact two-port, and how many π sections stand for it.

dV/dx = −Z I, dI/dx = −Y V with Z = R + jωL and Y = jωC per metre.
"""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import NDArray

from ..errors import Refused

Complex = NDArray[np.complex128]
# √θ = 1.22 for the fastest mode: short of its first resonance, a quarter wave, √θ = π/2, near which
# no section's error bounds that of the whole.
MOST_SECTIONS = 50
LUMPING_ERROR = 1e-4


def exact_chain(series: Complex, shunt: Complex, *, length: float) -> Complex:
    """Chain matrix (2n, 2n) of a line: [V, I] at the far end from [V, I] at the near end.

    `series` Z (n, n) [ohm/m], `shunt` Y (n, n) [S/m], `length` [m]; currents run near to far.
    The matrix exponential of the line's equations. Source: Paul, Analysis of Multiconductor
    Transmission Lines, ch. 7.

    >>> import numpy as np
    >>> chain = exact_chain(np.array([[0.1j]]), np.array([[1e-6j]]), length=1.0)
    >>> round(float(chain[0, 0].real), 9)  # cos(√(0.1 · 1e-6) · 1)
    0.99999995
    """
    from scipy.linalg import expm

    n = len(series)
    system = np.zeros((2 * n, 2 * n), dtype=complex)
    system[:n, n:], system[n:, :n] = -series * length, -shunt * length
    return np.asarray(expm(system))


def sections_needed(series: Complex, shunt: Complex, *, length: float) -> int:
    """π sections that keep terminal voltages and currents within 1e-4 of the line's, relative.

    A π section is exact but for terms of order θ / 6 against the line's hyperbolic functions, with
    θ the largest eigenvalue of Z Y l²; split into k, the error falls as 1/k². A small difference
    of large terminal quantities has the error of those. `series` Z [ohm/m] and `shunt` Y [S/m] are
    (F, n, n), `length` in m. Refused above 50 sections, which is short of a quarter wave.
    """
    product = series @ shunt * length**2
    # The series' Carson earth return raises the bound; the true growth is the spectral radius.
    theta = float(np.max(np.abs(np.linalg.eigvals(product))))
    needed = max(1, math.ceil(math.sqrt(theta / (6 * LUMPING_ERROR))))
    if needed > MOST_SECTIONS:
        raise Refused("run", f"is too long electrically: it would take {needed} sections, and "
                      f"{MOST_SECTIONS} are the most", given=f"{length:g} m",
                      hint="study a shorter run or a lower frequency")
    return needed
