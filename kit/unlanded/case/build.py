"""From a case to the run and the instruments that the study works with."""

from __future__ import annotations

from collections.abc import Mapping

from ..reference.instruments import INSTRUMENTS, Instrument
from ..study.ends import Bonded, Driven, Joined, Open, Through
from ..study.ends import Termination as RunTermination
from ..study.run import Run
from ..study.supply import Supply
from .loading import Case
from .schema import Termination
from .sections import Limit, resistances, section_of

USUAL_INSTRUMENTS = ("digital-10M", "low-impedance", "moving-coil", "coil-tester", "two-pole")


def build_run(case: Case, permittivity: Limit = "likely") -> Run:
    """The run of the case, with the covers' permittivity at that limit of its range.

    Conductors that an end does not name are open there. Resistance is that at 20 °C.
    """
    content = case.content
    supply = Supply(voltage=content.supply.voltage, frequency=content.supply.frequency,
                    phases=content.supply.phases)
    section = section_of(content.run, permittivity)
    by_name = resistances(content.run.cable)
    return Run(
        section=section,
        length=content.run.length,
        supply=supply,
        near=_end(content.run.ends.near, supply.frequency),
        far=_end(content.run.ends.far, supply.frequency),
        resistance=tuple(by_name[name] for name in section.names),
    )


def case_instruments(case: Case) -> tuple[Instrument, ...]:
    """Those that `[sheet]` lists and the case's own; the usual ones where it has neither."""
    own = {i.key: i.instrument() for i in case.content.own_instruments}
    listed = case.content.sheet.instruments
    keys = (*listed, *own) or USUAL_INSTRUMENTS
    known = {**INSTRUMENTS, **own}
    return tuple(known[key] for key in dict.fromkeys(keys))


def _end(end: Mapping[str, Termination], frequency: float) -> dict[str, RunTermination]:
    return {name: _termination(t, frequency) for name, t in end.items()}


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
