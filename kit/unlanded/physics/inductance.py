"""Inductance per metre, and what a loaded neighbour induces."""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import NDArray

from ..errors import Refused
from .constants import MU_0
from .section import Section

Real = NDArray[np.float64]
INTERNAL = 0.25  # μ₀/2π × ¼: a solid round conductor with its current spread evenly


def inductance_matrix(section: Section, *, return_distance: float) -> Real:
    """Self and mutual inductance per metre of the conductors, all returning at a distance (n, n).

    L_ii = (μ₀/2π) [ln(D/a_i) + ¼],  L_ij = (μ₀/2π) ln(D/d_ij)  [H/m]. The loop of two conductors,
    L_ii + L_jj − 2 L_ij, does not depend on D.

    Parameters
    ----------
    return_distance : D [m], larger than the section; `earth_return_distance` gives the earth's

    Valid while no magnetic material is near and conductors are thin against the skin depth.

    Two wires of 1 mm diameter at 10 mm: loop 0.4 (ln 20 + ¼) = 1.298 µH/m

    >>> from unlanded.physics.section import Conductor, Section
    >>> pair = Section((Conductor("a", 0, 0, 5e-4), Conductor("b", 10e-3, 0, 5e-4)))
    >>> m = inductance_matrix(pair, return_distance=900.0) * 1e6
    >>> round(float(m[0, 0] + m[1, 1] - 2 * m[0, 1]), 3)
    1.298
    """
    z = np.array([complex(c.x, c.y) for c in section.conductors])
    a = np.array([c.radius for c in section.conductors])
    apart = np.abs(z[:, None] - z[None, :])
    if not return_distance > apart.max(initial=0.0) + a.max():
        raise Refused("return distance", "must be larger than the section",
                      given=f"{return_distance:g} m")
    np.fill_diagonal(apart, a)
    out = np.log(return_distance / apart)
    out[np.diag_indices(len(z))] += INTERNAL
    return np.asarray(MU_0 / (2 * math.pi) * out)


def with_tube(matrix: Real, *, radius: float, return_distance: float) -> Real:
    """The matrix (n + 1, n + 1) [H/m] with, last, a thin tube round all the conductors.

    L_tt = L_it = (μ₀/2π) ln(D/a), wherever in the tube a conductor lies: a current spread evenly
    round the tube has no field within it, so that all within it link the flux outside alone.

    Parameters
    ----------
    matrix : of the conductors inside (n, n) [H/m], with the same return distance
    radius : a of the tube [m]
    return_distance : D [m], larger than the tube

    >>> round(float(with_tube(np.eye(1), radius=5e-3, return_distance=900.0)[0, 1]) * 1e6, 4)
    2.4201
    """
    if not 0 < radius < return_distance:
        raise Refused("tube", "radius must be above 0 m and below the return distance",
                      given=f"{radius:g} m")
    out = np.full((len(matrix) + 1,) * 2, MU_0 / (2 * math.pi) * math.log(return_distance / radius))
    out[:-1, :-1] = matrix
    return out


def earth_return_distance(*, resistivity: float, frequency: float) -> float:
    """Equivalent depth of the earth return, 658.5 √(ρ/f) [m]; ρ [ohm·m], f [Hz], above 0.

    Source: Carson (1926), first term of the series.

    >>> round(earth_return_distance(resistivity=100.0, frequency=50.0), 1)
    931.3
    """
    if not (resistivity > 0 and frequency > 0):
        raise Refused("earth return", "resistivity and frequency must be above 0",
                      given=f"{resistivity:g} ohm·m, {frequency:g} Hz")
    return 658.5 * math.sqrt(resistivity / frequency)


def earth_return_resistance(*, frequency: float) -> float:
    """Resistance per metre of the earth return, π² f · 10⁻⁷ [ohm/m]. Source: Carson (1926).

    >>> round(earth_return_resistance(frequency=50.0) * 1e3, 4)
    0.0493
    """
    return math.pi**2 * frequency * 1e-7


def loop_mutual_inductance(
    *, go: complex, back: complex, victim: complex, reference: complex
) -> float:
    """Mutual inductance per metre of two loops of parallel wires [H/m].

    M = (μ₀/2π) ln[(d_gq d_rv) / (d_gv d_rq)] for source g, r and victim v, reference q, each place
    a complex number x + jy [m]. Positive when the victim's voltage has the sign of the source's
    own inductive drop. Source: Paul, Analysis of Multiconductor Transmission Lines, ch. 4.

    >>> m = loop_mutual_inductance(go=0, back=0.1, victim=0.02, reference=0.5)
    >>> round(m * 1e6, 4)  # 0.2 ln (0.5 × 0.08 / (0.02 × 0.4)) = 0.2 ln 5
    0.3219
    """
    distances = [abs(go - reference), abs(back - victim), abs(go - victim), abs(back - reference)]
    if min(distances) == 0:
        raise Refused("loops", "must not share a wire", given=(go, back, victim, reference))
    gq, rv, gv, rq = distances
    return MU_0 / (2 * math.pi) * math.log(gq * rv / (gv * rq))


def induced_voltage(
    *, mutual: float, current: complex, length: float, frequency: float
) -> complex:
    """Voltage phasor that `current` [A] drives round a loop of mutual inductance `mutual` [H/m].

    E = j ω M I l [V].

    >>> e = induced_voltage(mutual=0.3219e-6, current=100, length=100.0, frequency=50.0)
    >>> round(abs(e), 3)
    1.011
    """
    return 2j * math.pi * frequency * mutual * current * length
