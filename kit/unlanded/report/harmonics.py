"""What the supply's harmonics bring, as the memo tells it."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from ..reference.instruments import INSTRUMENTS
from ..study.harmonics import Component, spectrum, total
from ..units import show
from .expected import main_line
from .investigation import Investigation
from .memo import Paragraph, Part
from .tables import Column, Table
from .words import percent


def harmonics_part(investigation: Investigation) -> Part | None:
    """The main pair order by order; None where the case has no harmonics."""
    found = _spectrum(investigation)
    if not found:
        return None
    whole, first = total(found), found[0]
    rows = [(f"{show(c.frequency, 'Hz')}", percent(_share(c, first, investigation)),
             show(c.unloaded, "V"), show(c.current, "A")) for c in found]
    rows.append(("together", "", show(whole.unloaded, "V"), show(whole.current, "A")))
    more = whole.current / first.current - 1
    return Part("Harmonics", (
        Paragraph("The capacitance of the run passes a current that grows with the frequency. With "
                  f"the supply's harmonics the current through the body model is {percent(more)} "
                  "more than at the supply's frequency alone. Readings in the tables are at the "
                  "supply's frequency; an instrument that averages, or filters, shows less of the "
                  "harmonics than one that reads the true root mean square."),
        Table("harmonics", "What the pair that the memo is about carries, by frequency.",
              (Column("Frequency", "", "right"), Column("In the supply", "", "right"),
               Column("Unloaded", "", "right"), Column("Through body model", "", "right")),
              tuple(rows))))


def harmonics_results(investigation: Investigation) -> list[Mapping[str, Any]] | None:
    """The same for results.json; None where the case has no harmonics."""
    return [{"frequency_Hz": c.frequency, "unloaded_V": c.unloaded, "body_current_A": c.current}
            for c in _spectrum(investigation)] or None


def _spectrum(investigation: Investigation) -> tuple[Component, ...]:
    line = main_line(investigation)
    if line is None or not investigation.run.supply.harmonics:
        return ()
    return spectrum(investigation.run, line.first.pair, INSTRUMENTS["body"].ranges[0].burden)


def _share(c: Component, first: Component, investigation: Investigation) -> float:
    order = round(c.frequency / first.frequency)
    return investigation.run.supply.harmonics.get(order, 1.0)
