"""Sections that several tests and benchmarks share: one of every builder, and random free ones."""

from __future__ import annotations

import cmath
import math

from hypothesis import strategies as st

from unlanded.physics.layouts import (
    Core,
    control,
    flat_twin,
    laid_up,
    screen_radius,
    singles,
)
from unlanded.physics.packing import packed
from unlanded.physics.section import Conductor, Pipe, Plane, Section

MM = 1e-3
CORE = Core(0.69 * MM, 1.39 * MM, 5.0)  # 1.5 mm² solid, 0.7 mm of PVC
LARGE = Core(0.89 * MM, 1.69 * MM, 4.0)  # 2.5 mm² solid, 0.8 mm


def names(count: int) -> list[str]:
    return [f"c{k}" for k in range(count)]


def screened(conductors: tuple[Conductor, ...], clearance: float, filler: float) -> Section:
    return Section(conductors, Pipe(screen_radius(conductors, clearance=clearance)), filler)


def built() -> dict[str, Section]:
    """One or more sections of every builder, in every surround that it is used in."""
    found = {f"cord of {n}": Section(laid_up(names(n), CORE)) for n in (2, 3, 4, 5)}
    for n in (2, 3, 4, 5):
        found[f"cord of {n}, screened"] = screened(laid_up(names(n), CORE), 0.3 * MM, 3.5)
    found["cord of 3 on a plane"] = Section(laid_up(names(3), CORE), Plane(-5 * MM))
    for n in (7, 19):
        found[f"control {n}"] = Section(control(names(n), CORE))
        found[f"control {n}, screened"] = screened(control(names(n), CORE), 0.3 * MM, 3.5)
    found["control 7, touching the screen"] = screened(control(names(7), CORE), 0.0, 1.0)
    flat = flat_twin(names(3), CORE, earth_radius=0.565 * MM)
    found["flat twin"] = Section(flat)
    found["flat twin above a plane"] = Section(flat, Plane(-5 * MM))
    mixed = [CORE, LARGE, CORE, LARGE, CORE]
    found["5 in metal conduit"] = Section(
        packed(names(5), mixed, pipe_radius=8 * MM, seed=3), Pipe(8 * MM))
    found["9 in metal conduit"] = Section(
        packed(names(9), [CORE] * 9, pipe_radius=10 * MM, seed=1), Pipe(10 * MM))
    found["5 in plastic conduit"] = Section(packed(names(5), mixed, pipe_radius=8 * MM, seed=4))
    found["singles above a plane"] = Section(
        singles(names(4), [CORE, LARGE, CORE, LARGE], spacing=4 * MM), Plane(-6 * MM))
    found["singles lying on a plane"] = Section(singles(names(3), [CORE] * 3), Plane(-1.39 * MM))
    found["singles off-centre in a pipe"] = Section(
        singles(names(3), [CORE, LARGE, CORE]), Pipe(12 * MM, 3 * MM, 2 * MM))
    return found


def crooked(surround: Pipe | Plane | None = None, filler: float = 1.0) -> Section:
    """Four unlike conductors without any mirror symmetry; a pipe of 8 mm about 0 holds them."""
    return Section(
        (
            Conductor("a", -2.0 * MM, -1.0 * MM, 0.7 * MM, 1.4 * MM, 5.0),
            Conductor("b", 1.1 * MM, -0.4 * MM, 0.9 * MM, 1.6 * MM, 2.3),
            Conductor("c", 0.2 * MM, 2.7 * MM, 0.5 * MM),
            Conductor("d", 3.9 * MM, 2.2 * MM, 0.6 * MM, 1.5 * MM, 3.5),
        ),
        surround, filler,
    )


def landed(conductor: Conductor, angle: float, placed: list[Conductor], gap: float) -> Conductor:
    """`conductor` brought in along a ray towards the origin until it touches one of those placed.

    It stops `gap` short of a neighbour of bare metal if it is bare itself: metal may not touch.
    """
    ray, along = cmath.exp(1j * angle), 0.0
    for other in placed:
        bare = conductor.outer == conductor.radius and other.outer == other.radius
        reach = conductor.outer + other.outer + (gap if bare else 0.0)
        seen = complex(other.x, other.y) / ray
        if abs(seen.imag) < reach:
            along = max(along, seen.real + math.sqrt(reach**2 - seen.imag**2))
    z = along * ray
    return Conductor(conductor.name, z.real, z.imag, conductor.radius, conductor.outer,
                     conductor.cover_permittivity)


def around(conductors: list[Conductor], kind: str, shift: complex, clearance: float
           ) -> Pipe | Plane | None:
    """A surround that the outermost conductor touches with its cover, or that lies further out."""
    def room(c: Conductor) -> float:
        return (1.02 * c.outer if c.outer == c.radius else c.outer) + clearance

    if kind == "pipe":
        radius = max(abs(complex(c.x, c.y) - shift) + room(c) for c in conductors)
        return Pipe(radius, shift.real, shift.imag)
    if kind == "plane":
        return Plane(min(c.y - room(c) for c in conductors))
    return None


@st.composite
def free_sections(draw: st.DrawFn, least: int, most: int) -> Section:
    """Bare and covered conductors, each touching another where a cover allows it."""
    placed: list[Conductor] = []
    for k in range(draw(st.integers(least, most))):
        radius = draw(st.floats(0.4, 1.5)) * MM
        cover = draw(st.one_of(st.just(0.0), st.floats(0.2, 1.0))) * MM
        permittivity = draw(st.floats(1.0, 8.0))
        loose = Conductor(f"c{k}", 0.0, 0.0, radius, radius + cover, permittivity)
        angle = draw(st.floats(0.0, 2 * math.pi))
        placed.append(landed(loose, angle, placed, 0.05 * radius))
    shift = complex(draw(st.floats(-1, 1)), draw(st.floats(-1, 1))) * MM
    clearance = draw(st.sampled_from([0.0, 0.1, 3.0])) * MM
    surround = around(placed, draw(st.sampled_from(["none", "pipe", "plane"])), shift, clearance)
    return Section(tuple(placed), surround, draw(st.sampled_from([1.0, 3.5])))
