"""What a conductor meets at an end of the run."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from typing import Literal, TypeAlias

from ..errors import Mistake, nearest
from ..physics.burden import Burden
from ..physics.network import EARTH
from .supply import NEUTRAL

End = Literal["near", "far"]
ENDS: tuple[End, End] = ("near", "far")
SCREEN = "screen"  # the name of a cable's screen among the conductors of its run


@dataclass(frozen=True)
class Driven:
    """The end is on a line of the supply."""

    phase: str


@dataclass(frozen=True)
class Bonded:
    """The end is bonded to "earth" or "N"."""

    to: str


@dataclass(frozen=True)
class Open:
    """The end is connected to nothing."""


@dataclass(frozen=True)
class Joined:
    """The end is joined to the same end of another conductor."""

    other: str


@dataclass(frozen=True)
class Through:
    """The end is closed through a burden to "earth", "N", or the same end of another conductor."""

    burden: Burden
    to: str
    label: str = "load"


Termination: TypeAlias = Driven | Bonded | Open | Joined | Through
Ends: TypeAlias = Mapping[str, Termination]


def word(t: Driven | Bonded | Joined | Through) -> str:
    """What the end is connected to, as the engineer wrote it."""
    match t:
        case Driven():
            return t.phase
        case Joined():
            return t.other
        case _:
            return t.to


def mistakes(
    end: str, given: Ends, names: Sequence[str], lines: Sequence[str]
) -> Iterator[Mistake]:
    """What is wrong with one end of a run of conductors `names`, fed by `lines`."""
    for name, t in given.items():
        place = f'{end} end of "{name}"'
        if name not in names:
            yield Mistake(place, "is not a conductor", "", nearest(name, names))
        elif not isinstance(t, Open):
            to, others = word(t), tuple(n for n in names if n != name)
            allowed = {
                Driven: tuple(lines), Bonded: (EARTH, NEUTRAL), Joined: others,
                Through: (*others, EARTH, NEUTRAL, *lines),
            }[type(t)]
            if to not in allowed:
                yield Mistake(place, "cannot be connected there", to, nearest(to, allowed))
