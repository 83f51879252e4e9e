"""Formulas that a section is near to, with what they give and what the computed matrix has."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from ..physics.closed_forms import (
    covered_pair_series,
    off_centre_in_screen,
    two_wires,
    wire_over_plane,
)
from ..physics.section import Conductor, Pipe, Plane
from ..study.run import Run
from ..units import FOOT
from .tables import Column, Table

Neighbour = tuple[str, float, float]
"""The case in words, capacitance by formula and in the matrix [F/m]."""


def formula_neighbours(run: Run) -> tuple[Neighbour, ...]:
    """The nearest two alike conductors, and the conductor nearest the surround, by formula."""
    return (*_of_pair(run), *_to_surround(run))


def formula_table(run: Run, *, customary: bool = False) -> Table:
    """The neighbours as a table, in pF/m or pF/ft."""
    unit, per = ("pF/ft", FOOT) if customary else ("pF/m", 1.0)
    return Table(
        "formulas", "Formulas that this section is near to.",
        (Column("Case"), Column("By formula", unit, "right"), Column("In the matrix", unit,
                                                                     "right")),
        tuple((what, *(f"{c * 1e12 * per:.2f}" for c in both))
              for what, *both in formula_neighbours(run)),
        "A formula leaves out what is not in its case: other conductors, covers, surroundings. "
        "It tells whether the matrix is of the right size, not whether it is right.")


def _of_pair(run: Run) -> Iterator[Neighbour]:
    c, cs = run.matrix, run.section.conductors
    alike = [(_apart(a, b), i, j) for i, a in enumerate(cs) for j, b in enumerate(cs)
             if i < j and a.radius == b.radius]
    if not alike:
        return
    apart, i, j = min(alike)
    a, b = cs[i], cs[j]
    both, ours = f"{a.name} and {b.name}", float(-c[i, j])
    yield f"{both}, bare and alone", float(two_wires(radius=a.radius, spacing=apart)), ours
    if a.outer > a.radius and a.outer == b.outer and apart >= 2 * a.outer:
        layers = covered_pair_series(radius=a.radius, cover_radius=a.outer, spacing=apart,
                                     cover_permittivity=a.cover_permittivity)
        yield f"{both}, alone, covers as coaxial layers", float(layers), ours


def _to_surround(run: Run) -> Iterator[Neighbour]:
    """The nearest conductor alone with the surround, against its sum of the matrix."""
    section = run.section
    cs = section.conductors
    sums = run.matrix[:len(cs), :len(cs)].sum(axis=1)
    match section.surround:
        case Plane() as plane:
            k = int(np.argmin([a.y - a.outer for a in cs]))
            alone = wire_over_plane(radius=cs[k].radius, height=cs[k].y - plane.y)
            yield f"{cs[k].name} over the surface, bare and alone", float(alone), float(sums[k])
        case Pipe() as pipe:
            off = [abs(complex(a.x - pipe.x, a.y - pipe.y)) for a in cs]
            k = int(np.argmax([o + a.outer for o, a in zip(off, cs, strict=True)]))
            alone = off_centre_in_screen(radius=cs[k].radius, screen_radius=pipe.radius,
                                         offset=off[k], permittivity=section.filler_permittivity)
            yield f"{cs[k].name} in the surround, bare and alone", float(alone), float(sums[k])


def _apart(a: Conductor, b: Conductor) -> float:
    return abs(complex(a.x - b.x, a.y - b.y))
