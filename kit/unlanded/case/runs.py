"""From the values of a case to the run that the study solves."""

from __future__ import annotations

from collections.abc import Iterator

from ..errors import Mistake
from ..physics.network import EARTH
from ..study.comparison import Switched
from ..study.ends import SCREEN, Bonded, Driven, End, Joined, Open, Through
from ..study.ends import Termination as RunTermination
from ..study.run import Run, Screen
from ..study.supply import NEUTRAL, Supply
from .schema import CaseFile, RunTable, SupplyTable
from .sections import Limit, resistances, section_of
from .terminations import Termination


def run_of(content: CaseFile, permittivity: Limit = "likely") -> Run:
    """The run that the case describes; refused where its ends cannot be."""
    supply = _supply(content.supply)
    section = section_of(content.run, permittivity)
    screen = content.run.screen
    by_name = resistances(content.run.cable)
    return Run(
        section=section,
        length=content.run.length,
        supply=supply,
        near=_end(content.run, "near", supply),
        far=_end(content.run, "far", supply),
        resistance=tuple(by_name[name] for name in section.names),
        screen=Screen(screen.resistance, screen.to_earth) if screen else None,
    )


def end_mistakes(run: Run) -> Iterator[Mistake]:
    """What only shows once the ends are joined up; the run itself refuses what it joins wrongly."""
    fixed = {run.node(word) for word in (EARTH, NEUTRAL, *run.supply.lines)}
    held = False
    for end, terminations in (("near", run.near), ("far", run.far)):
        for name, t in terminations.items():
            point = f"{name}@{end}"
            met = run.node(point)
            held |= met in fixed
            if isinstance(t, Through):
                other = run.node(f"{t.to}@{end}" if t.to in run.names else t.to)
                held |= other in fixed
                if other == met:
                    yield Mistake(f'"{point}"', "has a load with both its terminals on one point",
                                  t.to)
    grounded = run.screen.to_earth > 0 if run.screen else run.section.surround is not None
    if not (grounded or held):
        yield Mistake("", "floats: no conductor is connected to the supply or earth, and there is "
                          "no earthed surround", "", "name an end, or describe [run.surround]")


def _supply(written: SupplyTable) -> Supply:
    return Supply(written.voltage, written.frequency, written.phases, written.resistance,
                  written.inductance, written.harmonics)


def switched_of(run: RunTable, supply: Supply) -> Switched | None:
    """The load that `[run.switching]` describes, if any."""
    if run.switching is None:
        return None
    return run.switching.made(frequency=supply.frequency, line=supply.lines[0])


def _end(run: RunTable, end: End, supply: Supply) -> dict[str, RunTermination]:
    made = {name: _termination(t, supply.frequency)
            for name, t in getattr(run.ends, end).items()}
    if switched := switched_of(run, supply):
        made |= getattr(switched.arrangement, end)
    if run.screen and run.screen.earthed in ("both", end):
        made[SCREEN] = Bonded(EARTH)
    return made


def _termination(written: Termination, frequency: float) -> RunTermination:
    if written.load is not None:
        return Through(written.load.burden(frequency=frequency), str(written.to), written.load.name)
    if written.joined is not None:
        return Joined(written.joined)
    if written.at == "open":
        return Open()
    if written.at in ("N", "earth"):
        return Bonded(written.at)
    return Driven(str(written.at))
