"""From a case to the run and the instruments that the study works with."""

from __future__ import annotations

from ..reference.instruments import INSTRUMENTS, Instrument
from ..study.run import Run
from .loading import Case
from .runs import run_of
from .sections import Limit

USUAL_INSTRUMENTS = ("digital-10M", "low-impedance", "moving-coil", "coil-tester", "two-pole")


def build_run(case: Case, permittivity: Limit = "likely") -> Run:
    """The run of the case, with the covers' permittivity at that limit of its range.

    Conductors that an end does not name are open there. Resistance is that at 20 °C.
    """
    return run_of(case.content, permittivity)


def case_instruments(case: Case) -> tuple[Instrument, ...]:
    """Those that `[sheet]` lists and the case's own; the usual ones where it has neither."""
    own = {i.key: i.instrument() for i in case.content.own_instruments}
    keys = (*case.content.sheet.instruments, *own) or USUAL_INSTRUMENTS
    known = {**INSTRUMENTS, **own}
    return tuple(known[key] for key in dict.fromkeys(keys))
