"""The usual ways that a load is switched at a distance, as the ends of a run.

Each is drawn with its switches open, which is when stray coupling may keep the load on.
"""

from __future__ import annotations

from dataclasses import dataclass

from ..physics.burden import Burden
from .ends import Bonded, Driven, Ends, Joined, Open, Through
from .readings import Pair


@dataclass(frozen=True)
class Arrangement:
    """Both ends of a run, and the pair that the load is on."""

    near: Ends
    far: Ends
    load: Pair


def remote_contact(
    live: str, back: str, *, load: Burden, line: str = "L", name: str = "load"
) -> Arrangement:
    """Two wires to a distant contact: `live` goes out, `back` returns to a load at the near end."""
    return Arrangement({live: Driven(line), back: Through(load, "N", name)}, {},
                       Pair(f"{back}@near", "N"))


def contact_at_supply(
    live: str, neutral: str, *, load: Burden, name: str = "load"
) -> Arrangement:
    """The contact stands at the supply: nothing goes out live while it is open."""
    return Arrangement({live: Open(), neutral: Bonded("N")}, {live: Through(load, neutral, name)},
                       Pair(f"{live}@far", f"{neutral}@far"))


def switched_in_line(
    feed: str, switched: str, neutral: str, *, load: Burden, line: str = "L", name: str = "load"
) -> Arrangement:
    """A switch drop: `feed` live to the switch at the near end's wall, `switched` to the load.

    The live feed runs on beside the switched wire, as where one cable serves both.
    """
    return Arrangement({feed: Driven(line), neutral: Bonded("N")},
                       {switched: Through(load, neutral, name)},
                       Pair(f"{switched}@far", f"{neutral}@far"))


def switched_in_neutral(
    feed: str, switched: str, *, load: Burden, line: str = "L", name: str = "load"
) -> Arrangement:
    """The switch is in the neutral: the load stays on the line, and its other side floats."""
    return Arrangement({feed: Driven(line)}, {feed: Through(load, switched, name)},
                       Pair(f"{feed}@far", f"{switched}@far"))


def two_way(
    travellers: tuple[str, str], neutral: str, *, load: Burden, line: str = "L", name: str = "load"
) -> Arrangement:
    """Three wires with two changeover switches: one traveller live, the other on the load."""
    first, second = travellers
    return Arrangement({first: Driven(line), neutral: Bonded("N")},
                       {second: Through(load, neutral, name)},
                       Pair(f"{second}@far", f"{neutral}@far"))


def spares_earthed(ends: Ends, spares: tuple[str, ...]) -> Ends:
    """The same end with each of the spare conductors bonded to earth there."""
    return {**ends, **dict.fromkeys(spares, Bonded("earth"))}


def spares_joined(ends: Ends, spares: tuple[str, ...], to: str) -> Ends:
    """The same end with each of the spare conductors joined to `to`."""
    return {**ends, **dict.fromkeys(spares, Joined(to))}
