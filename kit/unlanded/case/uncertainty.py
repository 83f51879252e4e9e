"""From a case to its run with what is not known of it, and to what else it asks for."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from ..physics.section import Section
from ..reference.screens import SCREEN_TO_EARTH
from ..study.run import Run
from ..study.spread import Distribution, Input, triangular, within
from ..study.uncertain import (
    Conduit,
    SectionSpread,
    Thickness,
    UncertainRun,
    covers_spread,
    sections_spread,
)
from .cable import InConduit
from .inputs import SpreadTable
from .loading import Case
from .runs import run_of
from .schema import CaseFile
from .sections import dimension, resized, section_of

Group = tuple[Distribution, tuple[str, ...]]


def uncertain_run(
    case: Case, run: Run | None = None, like: UncertainRun | None = None
) -> UncertainRun:
    """The run of the case with its spread: `[spread]`, and the ranges of the materials.

    `run` is that of the case, where it is there already; `like` has the same section, and the
    same is not known of it.
    """
    content = case.content
    run = run_of(content) if run is None else run
    table = content.spread
    return UncertainRun(
        run,
        like.section if like else _section(content, run.section),
        None if table.length is None else table.length.over(run.length),
        _share(table, run.supply.voltage),
        {label: within(1.0, tolerance) for label, tolerance in table.loads.items()},
        _screen(content),
    )


def _screen(content: CaseFile) -> Distribution | None:
    """Of the capacitance to earth of a screen that nothing earths; None where it is known."""
    screen = content.run.screen
    if screen is None or screen.earthed != "none":
        return None
    if content.spread.to_earth is not None:
        return content.spread.to_earth.over(screen.to_earth)
    if "to_earth" in screen.model_fields_set:
        return None
    usual = SCREEN_TO_EARTH
    return triangular(usual.low, usual.likely, usual.high)


def _share(table: SpreadTable, volts: float) -> Distribution | None:
    return None if table.voltage is None else _Scaled(table.voltage.over(volts), volts)


class _Scaled:
    """A distribution as multiples of a value."""

    def __init__(self, of: Distribution, value: float) -> None:
        self._of, self._value = of, value

    def ppf(self, q: NDArray[np.float64]) -> NDArray[np.float64]:
        """Value below which the share q lies, over the value."""
        return np.asarray(self._of.ppf(q) / self._value)


def _section(content: CaseFile, section: Section) -> SectionSpread | None:
    groups = dict(_covers(content, section))
    conduit = _conduit(content)
    if content.spread.geometry and conduit is None:
        return _built(content, groups)
    return covers_spread(section, groups, conduit=conduit) if groups or conduit else None


def _conduit(content: CaseFile) -> Conduit | None:
    """What varies of a conduit that is the surround itself, or that nothing else surrounds.

    Over a plane, or in a pipe, the singles would lie at another height for each packing.
    """
    cable, spread = content.run.cable, content.spread
    if not isinstance(cable, InConduit) or content.run.surround is not None:
        return None
    if not (spread.arrangement or spread.geometry):
        return None
    arrangements = {} if spread.arrangement else {"arrangements": 1, "seed": cable.seed}
    return Conduit(
        cable.bore / 2, **arrangements,
        bore=None if spread.bore is None else spread.bore.over(cable.bore),
        thickness=None if spread.thickness is None else Thickness(
            cable.cover, spread.thickness.over(cable.cover),
            [name for name in cable.cores if name not in cable.unlike]))


def _covers(content: CaseFile, section: Section) -> Iterator[tuple[str, Group]]:
    """Conductors whose covers have one permittivity among them, and its distribution."""
    covered = [c for c in section.conductors if c.outer > c.radius]
    if (given := content.spread.permittivity) is not None and covered:
        likely = covered[0].cover_permittivity
        yield "permittivity of the covers", (given.over(likely), tuple(c.name for c in covered))
        return
    low, high = (section_of(content.run, limit).conductors for limit in ("low", "high"))
    limits: dict[tuple[float, float, float], list[str]] = {}
    for conductor, least, most in zip(section.conductors, low, high, strict=True):
        key = (least.cover_permittivity, conductor.cover_permittivity, most.cover_permittivity)
        if key[0] < key[2]:
            limits.setdefault(key, []).append(conductor.name)
    for key, names in limits.items():
        whose = "the covers" if len(limits) == 1 else f"the covers of {', '.join(names)}"
        yield f"permittivity of {whose}", (triangular(*key), tuple(names))


def _built(content: CaseFile, groups: dict[str, Group]) -> SectionSpread:
    """A section built anew for each draw of its dimensions and its covers' permittivity."""
    dimensions = content.spread.geometry
    inputs = [Input(name, distribution) for name, (distribution, _) in groups.items()]
    inputs += [Input(_WORDS[key], spread.over(dimension(content.run, key)))
               for key, spread in dimensions.items()]

    def section(values: NDArray[np.float64]) -> Section:
        covers, sizes = values[: len(groups)], values[len(groups):]
        made = section_of(resized(content.run, dict(zip(dimensions, sizes, strict=True))))
        of = {name: float(value) for value, (_, names) in zip(covers, groups.values(), strict=True)
              for name in names}
        return replace(made, conductors=tuple(
            replace(c, cover_permittivity=of.get(c.name, c.cover_permittivity))
            for c in made.conductors))

    return sections_spread(inputs, section)


_WORDS = {"thickness": "thickness of the covers", "spacing": "spacing", "bore": "bore",
          "gap": "gap to the earthed surround"}
