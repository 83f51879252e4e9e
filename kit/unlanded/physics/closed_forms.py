"""Capacitance per metre in closed form: exact where one exists, and the handbook's where not.

All arguments are keyword-only, lengths in metres and permittivities relative to vacuum; numbers
and numpy arrays broadcast together, and the result has their common shape. What cannot exist is
refused by the argument's name.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike

from .arguments import (
    Array,
    checked,
    require,
    require_above,
    require_above_zero,
    require_permittivity,
)
from .constants import EPSILON_0


def two_wires(*, radius: ArrayLike, spacing: ArrayLike, permittivity: ArrayLike = 1.0) -> Array:
    """Capacitance [F/m] between two equal bare wires, exact: π ε / acosh(s / 2a).

    Parameters
    ----------
    radius : a, of each wire [m], above 0
    spacing : s, between centres [m], above 2 a
    permittivity : of all space around them [1], at least 1

    Raises `Refused`. Source: C. R. Paul, Analysis of Multiconductor Transmission Lines, 2nd ed.
    2007, chapter 4 (from memory).

    >>> round(float(two_wires(radius=1e-3, spacing=10e-3)) * 1e12, 4)  # 27.8163 / acosh 5
    12.134
    """
    a, s, eps = checked(radius=radius, spacing=spacing, permittivity=permittivity)
    require_permittivity(eps)
    require_above_zero("radius", a)
    require_above("spacing", s, 2 * a, "2 × radius")
    return np.pi * EPSILON_0 * eps / _acosh_of_one_plus((s - 2 * a) / (2 * a))


def two_unequal_wires(
    *,
    radius_a: ArrayLike,
    radius_b: ArrayLike,
    spacing: ArrayLike,
    permittivity: ArrayLike = 1.0,
) -> Array:
    """Capacitance [F/m] of two bare wires side by side: 2 π ε / acosh((s² − a² − b²) / 2ab).

    Exact.

    Parameters
    ----------
    radius_a : a, of one wire [m], above 0
    radius_b : b, of the other [m], above 0
    spacing : s, between centres [m], above a + b
    permittivity : of all space around them [1], at least 1

    Raises `Refused`. Source: W. R. Smythe, Static and Dynamic Electricity, section 4.14 (from
    memory).

    >>> wires = two_unequal_wires(radius_a=1e-3, radius_b=2e-3, spacing=5e-3)
    >>> round(float(wires) * 1e12, 4)  # 55.6325 / acosh 5
    24.2679
    """
    a, b, s, eps = checked(
        radius_a=radius_a, radius_b=radius_b, spacing=spacing, permittivity=permittivity
    )
    require_permittivity(eps)
    require_above_zero("radius_a", a)
    require_above_zero("radius_b", b)
    require_above("spacing", s, a + b, "radius_a + radius_b")
    excess = (s - a - b) * (s + a + b) / (2 * a * b)
    return 2 * np.pi * EPSILON_0 * eps / _acosh_of_one_plus(excess)


def wire_over_plane(
    *, radius: ArrayLike, height: ArrayLike, permittivity: ArrayLike = 1.0
) -> Array:
    """Capacitance [F/m] of a bare wire to a wide flat surface: 2 π ε / acosh(h / a). Exact.

    Parameters
    ----------
    radius : a, of the wire [m], above 0
    height : h, of its centre over the surface [m], above a
    permittivity : of all space above the surface [1], at least 1

    Raises `Refused`. Source: Paul, as for `two_wires` (from memory); it is twice that of two
    wires 2 h apart.

    >>> round(float(wire_over_plane(radius=1e-3, height=10e-3)) * 1e12, 4)  # 55.6325 / acosh 10
    18.5862
    """
    a, h, eps = checked(radius=radius, height=height, permittivity=permittivity)
    require_permittivity(eps)
    require_above_zero("radius", a)
    require_above("height", h, a, "radius")
    return 2 * np.pi * EPSILON_0 * eps / _acosh_of_one_plus((h - a) / a)


def coaxial(*, inner: ArrayLike, outer: ArrayLike, permittivity: ArrayLike = 1.0) -> Array:
    """Capacitance [F/m] of a wire centred in a round screen: 2 π ε / ln(b / a). Exact.

    Parameters
    ----------
    inner : a, radius of the wire [m], above 0
    outer : b, inner radius of the screen [m], above a
    permittivity : between them [1], at least 1

    Raises `Refused`. Source: any text on fields.

    >>> round(float(coaxial(inner=1e-3, outer=3.5e-3, permittivity=2.25)) * 1e12, 3)
    99.918
    """
    a, b, eps = checked(inner=inner, outer=outer, permittivity=permittivity)
    require_permittivity(eps)
    require_above_zero("inner", a)
    require_above("outer", b, a, "inner")
    return 2 * np.pi * EPSILON_0 * eps / np.log(b / a)


def coaxial_two_layers(
    *,
    inner: ArrayLike,
    between: ArrayLike,
    outer: ArrayLike,
    inner_permittivity: ArrayLike,
    outer_permittivity: ArrayLike,
) -> Array:
    """Capacitance [F/m] of a covered wire centred in a screen: two coaxial layers in series.

    2 π ε₀ / [ln(m / a) / ε₁ + ln(b / m) / ε₂]. Exact.

    Parameters
    ----------
    inner : a, radius of the wire [m], above 0
    between : m, radius where the layers meet [m], a to b; either end leaves one layer
    outer : b, inner radius of the screen [m], above a
    inner_permittivity : ε₁, of the layer on the wire [1], at least 1
    outer_permittivity : ε₂, of the layer inside the screen [1], at least 1

    Raises `Refused`. Source: two capacitances of `coaxial` in series.

    >>> both = coaxial_two_layers(inner=1e-3, between=2e-3, outer=4e-3,
    ...                           inner_permittivity=3.0, outer_permittivity=1.0)
    >>> round(float(both) * 1e12, 3)  # 55.6325 / (ln 2 / 3 + ln 2)
    60.196
    """
    a, m, b, inside, outside = checked(
        inner=inner, between=between, outer=outer,
        inner_permittivity=inner_permittivity, outer_permittivity=outer_permittivity,
    )
    require_permittivity(inside, "inner_permittivity")
    require_permittivity(outside, "outer_permittivity")
    require_above_zero("inner", a)
    require_above("outer", b, a, "inner")
    require(m >= a, "between", "must be at least inner", m)
    require(m <= b, "between", "must be at most outer", m)
    return 2 * np.pi * EPSILON_0 / (np.log(m / a) / inside + np.log(b / m) / outside)


def off_centre_in_screen(
    *,
    radius: ArrayLike,
    screen_radius: ArrayLike,
    offset: ArrayLike,
    permittivity: ArrayLike = 1.0,
) -> Array:
    """Capacitance [F/m] of a wire off the axis of a screen: 2 π ε / acosh((a² + b² − d²) / 2ab).

    Exact; at d = 0 it is `coaxial`.

    Parameters
    ----------
    radius : a, of the wire [m], above 0
    screen_radius : b, of the screen's inside [m], above a + d
    offset : d, of the wire's centre from the screen's axis [m], at least 0
    permittivity : between them [1], at least 1

    Raises `Refused`. Source: Smythe; Paul (from memory).

    >>> wire = off_centre_in_screen(radius=1e-3, screen_radius=4e-3, offset=1.5e-3)
    >>> round(float(wire) * 1e12, 4)  # 55.6325 / acosh 1.84375
    45.5391
    """
    a, b, d, eps = checked(
        radius=radius, screen_radius=screen_radius, offset=offset, permittivity=permittivity
    )
    require_permittivity(eps)
    require_above_zero("radius", a)
    require(d >= 0, "offset", "must be at least 0 m", d)
    require_above("screen_radius", b, a + d, "radius + offset")
    excess = (b - a - d) * (b - a + d) / (2 * a * b)
    return 2 * np.pi * EPSILON_0 * eps / _acosh_of_one_plus(excess)


def screened_two_core(
    *,
    radius: ArrayLike,
    offset: ArrayLike,
    screen_radius: ArrayLike,
    permittivity: ArrayLike = 1.0,
) -> Array:
    """Capacitance [F/m] of each of two cores to a common screen, both at the same voltage.

    2 π ε / ln((r⁴ − c⁴) / (2 c a r²)): line charges and their images. A handbook approximation
    for thin cores: where covers touch each other and nearly the screen it is some 5 % low
    against a full solution; with room between the cores it comes close.

    Parameters
    ----------
    radius : a, of each core's metal [m], above 0
    offset : c, of each core's centre from the axis [m], above a
    screen_radius : r, of the screen's inside [m], above a + c
    permittivity : of everything inside the screen [1], at least 1

    Raises `Refused`. Source: documentation of cable rating practice; it follows also from the
    image formulas in Paul.

    >>> each = screened_two_core(radius=1e-3, offset=2e-3, screen_radius=4e-3)
    >>> round(float(each) * 1e12, 3)  # 55.6325 / ln 3.75
    42.09
    """
    a, c, r, eps = _cores_in_screen(radius, offset, screen_radius, permittivity)
    require_above("offset", c, a, "radius")
    return 2 * np.pi * EPSILON_0 * eps / np.log((r**4 - c**4) / (2 * c * a * r**2))


def screened_three_core(
    *,
    radius: ArrayLike,
    offset: ArrayLike,
    screen_radius: ArrayLike,
    permittivity: ArrayLike = 1.0,
) -> Array:
    """Capacitance [F/m] of each of three cores to a common screen, all at the same voltage.

    2 π ε / ln((r⁶ − c⁶) / (3 c² a r³)): line charges and their images. A handbook approximation
    for thin cores: where covers touch each other and nearly the screen it is some 10 % low
    against a full solution.

    Parameters
    ----------
    radius : a, of each core's metal [m], above 0
    offset : c, of each core's centre from the axis [m], above 2 a / √3
    screen_radius : r, of the screen's inside [m], above a + c
    permittivity : of everything inside the screen [1], at least 1

    Raises `Refused`. Source: as for `screened_two_core`.

    >>> each = screened_three_core(radius=1e-3, offset=2e-3, screen_radius=4e-3)
    >>> round(float(each) * 1e12, 3)  # 55.6325 / ln 5.25
    33.549
    """
    a, c, r, eps = _cores_in_screen(radius, offset, screen_radius, permittivity)
    require_above("offset", c, 2 * a / np.sqrt(3), "2 × radius / √3")
    return 2 * np.pi * EPSILON_0 * eps / np.log((r**6 - c**6) / (3 * c**2 * a * r**3))


def covered_pair_series(
    *,
    radius: ArrayLike,
    cover_radius: ArrayLike,
    spacing: ArrayLike,
    cover_permittivity: ArrayLike,
) -> Array:
    """Capacitance [F/m] of two covered wires in air, each cover taken as a coaxial layer.

    π ε₀ / [acosh(s / 2a) − (1 − 1/ε) ln(b / a)]. An approximation, always low. For building
    wire with ε = 5 it is 0.5 % low at a spacing of four cover diameters, 3 % at two, 12 % at
    1.3, and 35 % where the covers touch: use `capacitance_matrix` for a cable.

    Parameters
    ----------
    radius : a, of each wire's metal [m], above 0
    cover_radius : b, of each cover's outside [m], at least a
    spacing : s, between centres [m], above 2 a and at least 2 b
    cover_permittivity : ε, of the covers [1], at least 1

    Raises `Refused`. Source: the usual series argument (from memory); the errors were found by
    comparing with a converged solution.

    >>> pair = covered_pair_series(radius=0.69e-3, cover_radius=1.39e-3, spacing=10e-3,
    ...                            cover_permittivity=5.0)
    >>> round(float(pair) * 1e12, 3)
    13.192
    """
    a, b, s, eps = checked(
        radius=radius, cover_radius=cover_radius, spacing=spacing,
        cover_permittivity=cover_permittivity,
    )
    require_permittivity(eps, "cover_permittivity")
    require_above_zero("radius", a)
    require(b >= a, "cover_radius", "must be at least radius", b)
    require(s >= 2 * b, "spacing", "must be at least 2 × cover_radius", s)
    require_above("spacing", s, 2 * a, "2 × radius")
    bare = _acosh_of_one_plus((s - 2 * a) / (2 * a))
    return np.pi * EPSILON_0 / (bare - (1 - 1 / eps) * np.log(b / a))


def _acosh_of_one_plus(excess: Array) -> Array:
    # acosh(1 + t) loses half its digits where surfaces nearly touch; this form keeps them.
    return np.asarray(np.log1p(excess + np.sqrt(excess) * np.sqrt(excess + 2)))[()]


def _cores_in_screen(
    radius: ArrayLike, offset: ArrayLike, screen_radius: ArrayLike, permittivity: ArrayLike
) -> list[Array]:
    a, c, r, eps = checked(
        radius=radius, offset=offset, screen_radius=screen_radius, permittivity=permittivity
    )
    require_permittivity(eps)
    require_above_zero("radius", a)
    require_above("screen_radius", r, a + c, "radius + offset")
    return [a, c, r, eps]
