"""The usual arrangements of cores, as conductors of a section. All lengths in metres.

Each function returns the conductors in the order of `names`; the surround is the caller's.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

from ..errors import Refused
from .section import Conductor


@dataclass(frozen=True)
class Core:
    """A core without its place: metal radius, cover radius [m], cover permittivity [1]."""

    radius: float
    cover_radius: float
    cover_permittivity: float

    def at(self, name: str, x: float, y: float) -> Conductor:
        """This core with its centre at (x, y) [m]."""
        return Conductor(name, x, y, self.radius, self.cover_radius, self.cover_permittivity)


def singles(
    names: Sequence[str], cores: Sequence[Core], *, spacing: float | None = None
) -> tuple[Conductor, ...]:
    """Cores side by side along x, from x = 0, centres `spacing` apart; touching when it is None.

    >>> core = Core(0.001, 0.002, 3.5)
    >>> [c.x for c in singles(["a", "b"], [core, core])]
    [0.0, 0.004]
    """
    _same_count(names, len(cores), "singles")
    x, placed = 0.0, []
    for k, (name, core) in enumerate(zip(names, cores, strict=True)):
        if k:
            x += cores[k - 1].cover_radius + core.cover_radius if spacing is None else spacing
        placed.append(core.at(name, x, 0.0))
    return tuple(placed)


def laid_up(names: Sequence[str], core: Core) -> tuple[Conductor, ...]:
    """2 to 5 equal cores laid up in a cord: touching neighbours on a circle about the origin.

    The pitch circle's radius is b / sin(π / n) for cores of outer radius b.
    """
    if not 2 <= len(names) <= 5:
        raise Refused("laid up", "takes 2 to 5 cores", given=len(names),
                      hint='7 or 19 cores are the layout "control"')
    return _ring(names, core, core.cover_radius / math.sin(math.pi / len(names)))


def control(names: Sequence[str], core: Core) -> tuple[Conductor, ...]:
    """7 (1 + 6) or 19 (1 + 6 + 12) equal cores in concentric layers, the first in the centre.

    Layers lie at 2 b and 4 b from the centre for cores of outer radius b.
    """
    if len(names) not in (7, 19):
        raise Refused("control", "takes 7 (1 + 6) or 19 (1 + 6 + 12) cores", given=len(names))
    b = core.cover_radius
    centre = core.at(names[0], 0.0, 0.0)
    layers = _ring(names[1:7], core, 2 * b) + _ring(names[7:], core, 4 * b)
    return (centre, *layers)


def flat_twin(names: Sequence[str], core: Core, *, earth_radius: float) -> tuple[Conductor, ...]:
    """Two equal cores with a bare earth of radius `earth_radius` between them, in one line.

    Names in the order core, earth, core. The metal of the earth touches both covers.
    """
    _same_count(names, 3, "flat twin")
    x = core.cover_radius + earth_radius
    earth = Conductor(names[1], 0.0, 0.0, earth_radius)
    return (core.at(names[0], -x, 0.0), earth, core.at(names[2], x, 0.0))


def screen_radius(conductors: Sequence[Conductor], *, clearance: float = 0.0) -> float:
    """Inner radius of a round screen about the origin, `clearance` from the outermost cover [m].

    `clearance` 0 is a screen that the outermost covers touch.
    """
    if clearance < 0:
        raise Refused("screen", "clearance must be at least 0 m", given=f"{clearance:g} m")
    return max(math.hypot(c.x, c.y) + c.outer for c in conductors) + clearance


def _ring(names: Sequence[str], core: Core, radius: float) -> tuple[Conductor, ...]:
    angles = (2 * math.pi * k / len(names) for k in range(len(names)))
    return tuple(
        core.at(name, radius * math.cos(angle), radius * math.sin(angle))
        for name, angle in zip(names, angles, strict=False)
    )


def _same_count(names: Sequence[str], count: int, place: str) -> None:
    if len(names) != count:
        raise Refused(place, f"takes {count} names", given=len(names))
