"""From a cable and what surrounds it to a cross-section, and to resistance per metre."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import replace
from typing import Literal

from ..physics import layouts
from ..physics.layouts import Core
from ..physics.packing import packed
from ..physics.section import Conductor, Pipe, Plane, Section
from ..reference.sizes import COPPER_RESISTIVITY
from .cable import (
    BARE,
    AnyCable,
    Control,
    FlatTwin,
    Free,
    FreeConductor,
    InConduit,
    LaidUp,
    Singles,
    Wire,
)
from .inputs import home_of
from .schema import RunTable
from .surround import AnySurround, PipeRound, PlaneBelow

Limit = Literal["low", "likely", "high"]
"""Which limit of the covers' permittivity to take."""


def section_of(run: RunTable, permittivity: Limit = "likely") -> Section:
    """The cross-section that `[run]` describes, refused by name where it cannot be."""
    conductors = _conductors(run.cable, permittivity)
    return Section(conductors, _surround(run, conductors), run.cable.filler_permittivity)


def dimension(run: RunTable, key: str) -> float:
    """A dimension of the cable or of its surround, such as "bore" [m]."""
    return float(getattr(getattr(run, str(home_of(run, key))), key))


def resized(run: RunTable, sizes: Mapping[str, float]) -> RunTable:
    """The run with other dimensions [m], by key."""
    tables: dict[str, dict[str, float]] = {}
    for key, size in sizes.items():
        tables.setdefault(str(home_of(run, key)), {})[key] = float(size)
    return run.model_copy(update={
        home: getattr(run, home).model_copy(update=own) for home, own in tables.items()})


def resistances(cable: AnyCable) -> dict[str, float]:
    """Resistance per metre of every conductor at 20 °C [ohm/m], by name."""
    match cable:
        case Free():
            return {c.name: _free_resistance(c) for c in cable.conductors}
        case FlatTwin():
            own = dict.fromkeys(cable.cores, cable.conductor.resistance)
            return own | {cable.cores[1]: cable.earth_conductor.resistance}
        case Singles() | InConduit():
            return {name: cable.wire(name).conductor.resistance for name in cable.cores}
        case LaidUp() | Control():
            return dict.fromkeys(cable.cores, cable.conductor.resistance)


def _conductors(cable: AnyCable, limit: Limit) -> tuple[Conductor, ...]:
    match cable:
        case LaidUp():
            return layouts.laid_up(cable.cores, _core(cable, limit))
        case Control():
            return layouts.control(cable.cores, _core(cable, limit))
        case FlatTwin():
            earth = cable.earth_conductor.effective_radius
            return layouts.flat_twin(cable.cores, _core(cable, limit), earth_radius=earth)
        case Singles():
            cores = [_core(cable.wire(name), limit) for name in cable.cores]
            placed = layouts.singles(cable.cores, cores, spacing=cable.spacing)
            return _centred(placed)
        case InConduit():
            cores = [_core(cable.wire(name), limit) for name in cable.cores]
            return packed(cable.cores, cores, pipe_radius=cable.bore / 2, seed=cable.seed)
        case Free():
            return tuple(_free(c, limit) for c in cable.conductors)


def _core(wire: Wire, limit: Limit) -> Core:
    """A strand counts with its effective radius; its cover sits on the circle round it."""
    metal = wire.conductor.effective_radius
    if wire.insulation == BARE:
        return Core(metal, metal, 1.0)
    return Core(metal, wire.conductor.radius + wire.cover, wire.cover_permittivity(limit))


def _centred(row: Sequence[Conductor]) -> tuple[Conductor, ...]:
    middle = (row[0].x + row[-1].x) / 2 if row else 0.0
    return tuple(replace(c, x=c.x - middle) for c in row)


def _free(c: FreeConductor, limit: Limit) -> Conductor:
    cover = None if c.cover_diameter is None else c.cover_diameter / 2
    permittivity = 1.0 if c.permittivity is None else c.permittivity.at(limit)
    return Conductor(c.name, c.x, c.y, c.diameter / 2, cover, permittivity)


def _free_resistance(c: FreeConductor) -> float:
    if c.resistance is not None:
        return c.resistance
    return 4 * COPPER_RESISTIVITY.likely / (math.pi * c.diameter**2)


def _surround(run: RunTable, conductors: Sequence[Conductor]) -> Pipe | Plane | None:
    if isinstance(run.cable, InConduit) and run.cable.wall == "metal":
        return Pipe(run.cable.bore / 2)
    return None if run.surround is None else _placed(run.surround, conductors, run.cable)


def _placed(surround: AnySurround, conductors: Sequence[Conductor], cable: AnyCable
            ) -> Pipe | Plane:
    match surround:
        case PlaneBelow():
            return Plane(min(c.y - c.outer for c in conductors) - surround.gap)
        case PipeRound():
            centred = surround.centred or isinstance(cable, Free)
            height = 0.0 if centred else _resting(surround, conductors)
            return Pipe(surround.bore / 2, 0.0, height)
        case _:
            return Pipe(layouts.screen_radius(conductors, clearance=surround.gap))


def _resting(pipe: PipeRound, conductors: Sequence[Conductor]) -> float:
    """Height of the pipe's axis over a cable that lies on its wall, held off by the gap [m].

    What does not go in is left for the section to refuse by name.
    """
    heights = []
    for c in conductors:
        reach = pipe.bore / 2 - pipe.gap - c.outer
        if reach < abs(c.x):
            return 0.0
        heights.append(c.y + math.sqrt(reach**2 - c.x**2))
    return min(heights)
