"""The usual ways that a load is switched at a distance, as the ends of a run.

Each is drawn with its switches open, which is when stray coupling may keep the load on.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Literal

from ..errors import Refused
from ..physics.burden import Burden
from .ends import Bonded, Driven, Ends, Joined, Open, Through
from .readings import Pair
from .supply import NEUTRAL

Word = Literal["remote contact", "contact at supply", "switched live", "switched neutral",
               "two-way"]
NEEDS: Mapping[Word, tuple[str, ...]] = {
    "remote contact": ("live", "switched"),
    "contact at supply": ("live", "neutral"),
    "switched live": ("live", "switched"),
    "switched neutral": ("live", "switched"),
    "two-way": ("live", "switched"),
}
"""What an arrangement needs of `Cores`."""
WITH_NEUTRAL: tuple[Word, ...] = ("switched live", "two-way")
"""Those whose cable also has the neutral, unless it comes to the load another way."""


@dataclass(frozen=True)
class Arrangement:
    """Both ends of a run, and the pair that the load is on."""

    near: Ends
    far: Ends
    load: Pair


@dataclass(frozen=True)
class Cores:
    """The parts that a cable's cores have in a switching arrangement; None where it has none.

    Parameters
    ----------
    live : on the line; of two travellers the one that is live
    switched : on the load, and on nothing else while the contacts are open
    neutral : of the load
    """

    live: str
    switched: str | None = None
    neutral: str | None = None

    @property
    def names(self) -> tuple[str, ...]:
        """Those that have a part."""
        return tuple(n for n in (self.live, self.switched, self.neutral) if n is not None)


def arranged(
    word: Word, cores: Cores, *, load: Burden, line: str = "L", name: str = "load"
) -> Arrangement:
    """The arrangement of that name; refused where it needs a core that is not there."""
    live, switched, neutral = cores.live, cores.switched, cores.neutral
    if word == "contact at supply" and neutral is not None:
        return contact_at_supply(live, neutral, load=load, name=name)
    if word == "contact at supply" or switched is None:
        raise Refused(word, f"needs cores for {' and '.join(NEEDS[word])}", given=cores.names)
    match word:
        case "remote contact":
            return remote_contact(live, switched, load=load, line=line, name=name)
        case "switched neutral":
            return switched_in_neutral(live, switched, load=load, line=line, name=name)
        case "two-way":
            return two_way((live, switched), neutral, load=load, line=line, name=name)
        case _:
            return switched_in_line(live, switched, neutral, load=load, line=line, name=name)


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
    feed: str, switched: str, neutral: str | None, *, load: Burden, line: str = "L",
    name: str = "load"
) -> Arrangement:
    """A switch drop: `feed` live to the switch at the near end's wall, `switched` to the load.

    The live feed runs on beside the switched wire, as where one cable serves both. Without a
    `neutral` in the cable that of the load comes another way.
    """
    if neutral is None:
        return Arrangement({feed: Driven(line)}, {switched: Through(load, NEUTRAL, name)},
                           Pair(f"{switched}@far", NEUTRAL))
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
    travellers: tuple[str, str], neutral: str | None, *, load: Burden, line: str = "L",
    name: str = "load"
) -> Arrangement:
    """Three wires with two changeover switches: one traveller live, the other on the load.

    Between the switches that is a switch drop, whose live wire ends at the second switch.
    """
    return switched_in_line(*travellers, neutral, load=load, line=line, name=name)


def spares_earthed(ends: Ends, spares: tuple[str, ...]) -> Ends:
    """The same end with each of the spare conductors bonded to earth there."""
    return {**ends, **dict.fromkeys(spares, Bonded("earth"))}


def spares_joined(ends: Ends, spares: tuple[str, ...], to: str) -> Ends:
    """The same end with each of the spare conductors joined to `to`."""
    return {**ends, **dict.fromkeys(spares, Joined(to))}
