"""A cross-section: round conductors, their covers, and what surrounds them.

Positions and radii are in metres, permittivities are relative to vacuum.
"""

from __future__ import annotations

import math
from dataclasses import dataclass, replace
from itertools import combinations

from ..errors import Mistake, Refused

# Positions come from trigonometry: two covers that touch may seem to overlap in the last digits.
ROUNDING = 1e-9


@dataclass(frozen=True)
class Conductor:
    """A round conductor, bare or covered.

    Parameters
    ----------
    name : what the engineer calls it; unique within a section
    x, y : centre [m]
    radius : of the metal [m], above 0
    cover_radius : of the cover's outside [m], at least `radius`; `None` is a bare conductor
    cover_permittivity : of the cover, relative to vacuum [1], at least 1
    """

    name: str
    x: float
    y: float
    radius: float
    cover_radius: float | None = None
    cover_permittivity: float = 1.0

    def __post_init__(self) -> None:
        if self.cover_radius is None:
            object.__setattr__(self, "cover_radius", self.radius)
        place = f'conductor "{self.name}"'
        values = (self.x, self.y, self.radius, self.outer, self.cover_permittivity)
        if not all(math.isfinite(v) for v in values):
            raise Refused(place, "every dimension must be a finite number", given=values)
        if not self.radius > 0:
            raise Refused(place, "radius must be above 0 m", given=f"{self.radius:g} m")
        if self.outer < self.radius:
            raise Refused(
                place,
                f"cover radius must be at least the metal's radius, {self.radius:g} m",
                given=f"{self.outer:g} m",
            )
        if self.cover_permittivity < 1:
            raise Refused(
                place, "cover permittivity must be at least 1", given=f"{self.cover_permittivity:g}"
            )

    @property
    def outer(self) -> float:
        """Radius of the outside, cover included [m]."""
        assert self.cover_radius is not None
        return self.cover_radius


@dataclass(frozen=True)
class Pipe:
    """A round metal wall around everything: conduit or screen. Inner radius and centre [m]."""

    radius: float
    x: float = 0.0
    y: float = 0.0

    def __post_init__(self) -> None:
        if not (self.radius > 0 and math.isfinite(self.radius)):
            raise Refused("pipe", "radius must be above 0 m", given=f"{self.radius:g} m")


@dataclass(frozen=True)
class Plane:
    """A flat earthed surface below everything: tray, slab, cabinet wall. Its height y [m]."""

    y: float = 0.0


@dataclass(frozen=True)
class Section:
    """Conductors, their surround, and the permittivity between them.

    The surround, where there is one, is at 0 V. Overlaps, and conductors outside the pipe or
    below the plane, are refused by name; covers may touch, bare metal may not.
    """

    conductors: tuple[Conductor, ...]
    surround: Pipe | Plane | None = None
    filler_permittivity: float = 1.0

    def __post_init__(self) -> None:
        object.__setattr__(self, "conductors", tuple(self.conductors))
        mistakes = [*self._own_mistakes(), *self._overlaps(), *self._outside()]
        if mistakes:
            raise Refused.all_of(mistakes)

    @property
    def names(self) -> tuple[str, ...]:
        """The conductors' names, in the order of every matrix of this section."""
        return tuple(c.name for c in self.conductors)

    def index(self, name: str) -> int:
        """Row of a conductor; refused by name when it is not here."""
        if name not in self.names:
            raise Refused(f'conductor "{name}"', "is not in this section", given=self.names)
        return self.names.index(name)

    def moved(self, *, dx: float = 0.0, dy: float = 0.0) -> Section:
        """The same section with its conductors shifted by (dx, dy) [m]; the surround stays."""
        return replace(
            self,
            conductors=tuple(replace(c, x=c.x + dx, y=c.y + dy) for c in self.conductors),
        )

    def _own_mistakes(self) -> list[Mistake]:
        found = []
        if not self.conductors:
            found.append(Mistake("section", "needs at least one conductor"))
        if self.surround is None and len(self.conductors) == 1:
            found.append(
                Mistake("section", "one conductor alone has no capacitance to anything", "",
                        "add a second conductor, a pipe or a plane")
            )
        twice = sorted({n for n in self.names if self.names.count(n) > 1})
        found.extend(Mistake(f'conductor "{n}"', "a name may be used once") for n in twice)
        if not (self.filler_permittivity >= 1 and math.isfinite(self.filler_permittivity)):
            found.append(
                Mistake("section", "filler permittivity must be at least 1",
                        f"{self.filler_permittivity:g}")
            )
        return found

    def _overlaps(self) -> list[Mistake]:
        found = []
        for a, b in combinations(self.conductors, 2):
            distance = math.hypot(a.x - b.x, a.y - b.y)
            reach = a.outer + b.outer
            both = f'conductors "{a.name}" and "{b.name}"'
            if distance < reach * (1 - ROUNDING):
                found.append(
                    Mistake(both, f"overlap: their centres must be at least {reach:.6g} m apart",
                            f"{distance:.6g} m")
                )
            elif distance <= (a.radius + b.radius) * (1 + ROUNDING):
                found.append(Mistake(both, "touch metal to metal", f"{distance:.6g} m",
                                     "join them at an end instead, or move them apart"))
        return found

    def _outside(self) -> list[Mistake]:
        found = []
        for c in self.conductors:
            clearance, where = self._clearance(c)
            if clearance < -ROUNDING * c.outer:
                found.append(Mistake(f'conductor "{c.name}"', f"must lie {where}",
                                     f"{-clearance:.6g} m too far"))
            elif clearance + c.outer - c.radius <= ROUNDING * c.outer:
                found.append(Mistake(f'conductor "{c.name}"', "its bare metal touches the earthed "
                                     "surround", "", "bond it to earth at an end instead"))
        return found

    def _clearance(self, c: Conductor) -> tuple[float, str]:
        """From the conductor's outside to the surround [m], negative when it is through it."""
        if isinstance(self.surround, Pipe):
            s = self.surround
            return s.radius - math.hypot(c.x - s.x, c.y - s.y) - c.outer, "inside the pipe"
        if isinstance(self.surround, Plane):
            return c.y - self.surround.y - c.outer, "above the plane"
        return math.inf, ""
