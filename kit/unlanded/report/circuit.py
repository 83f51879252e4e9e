"""The circuit as the memo draws it: conductors, ends, capacitances, the section to scale."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import numpy as np

from ..physics.section import Pipe, Plane, Section
from ..study.ends import Bonded, Driven, Joined, Open, Termination, Through
from ..study.run import Run
from ..study.supply import Supply
from ..units import show, show_length
from .cross_section import section_figure
from .investigation import Investigation
from .memo import Paragraph, Part
from .tables import Column, Table
from .words import listed, point_words


def circuit_part(investigation: Investigation) -> Part:
    """The run as computed: ends, capacitances, the section to scale."""
    run = investigation.run
    length = show_length(run.length, customary=investigation.customary)
    text = f"A run of {length}, {_surround(run.section)}. Supply: {_supply_words(run.supply)}."
    volts = [run.voltage(f"{name}@far") for name in run.section.names]
    return Part("The circuit", (
        Paragraph(text), conductor_table(run), capacitance_table(run.section, run.matrix),
        section_figure(run.section, volts, title="Section, with the unloaded voltages"),
    ))


def run_results(investigation: Investigation) -> Mapping[str, Any]:
    """The run for results.json; each key names its unit."""
    run = investigation.run
    return {
        "conductors": run.section.names,
        "length_m": run.length,
        "frequency_Hz": run.frequency,
        "capacitance_F_per_m": run.matrix,
        "resistance_ohm_per_m": run.resistance,
        "residual_A": run.residual,
    }


def conductor_table(run: Run) -> Table:
    """Each conductor with its dimensions and what is done with its ends."""
    columns = (Column("Conductor"), Column("Metal", "mm", "right"), Column("Cover", "mm", "right"),
               Column("Permittivity", "", "right"), Column("Near end"), Column("Far end"))
    rows = tuple(
        (c.name, f"{2e3 * c.radius:.3g}", f"{2e3 * c.outer:.3g}" if c.outer > c.radius else "bare",
         f"{c.cover_permittivity:.3g}" if c.outer > c.radius else "–",
         termination_words(run.near[c.name]), termination_words(run.far[c.name]))
        for c in run.section.conductors
    )
    return Table("conductors", "Conductors, outside diameters of metal and cover, and ends.",
                 columns, rows)


def capacitance_table(section: Section, capacitance: np.ndarray) -> Table:
    """The Maxwell matrix in pF/m."""
    columns = (Column("pF/m"), *(Column(name, "", "right") for name in section.names))
    rows = tuple(
        (name, *(_fixed(value * 1e12) for value in row))
        for name, row in zip(section.names, capacitance, strict=True)
    )
    return Table(
        "capacitance", "Capacitance per metre, as the Maxwell matrix.", columns, rows,
        "On the diagonal: a conductor to all others and the surround. Off it, with the sign "
        "turned: directly between two conductors.",
    )


def _fixed(value: float) -> str:
    """Four digits, not below a hundredth: sums of a row should be seen to agree."""
    size = abs(value)
    text = f"{value:.{0 if size >= 1000 else 1 if size >= 100 else 2}f}"
    return "0" if float(text) == 0 else text.replace("-", "−")


def termination_words(end: Termination) -> str:
    """What is done with a conductor at one end."""
    match end:
        case Driven():
            return f"fed by {end.phase}"
        case Bonded():
            return f"bonded to {end.to}"
        case Joined():
            return f"joined to {end.other}"
        case Through():
            return f"{end.label} to {point_words(end.to)}"
        case Open():
            return "open"


def _open_words(run: Run) -> str:
    loose = [n for n in run.section.names
             if isinstance(run.near[n], Open) and isinstance(run.far[n], Open)]
    if not loose:
        return "no conductor is open at both ends"
    return f"{listed(loose)} {'is' if len(loose) == 1 else 'are'} open at both ends"


def _supply_words(supply: Supply) -> str:
    live = {1: "", 2: ", two lines in opposite phase", 3: ", three phases"}[supply.phases]
    return f"{show(supply.voltage, 'V')} line to neutral, {show(supply.frequency, 'Hz')}{live}"


def _surround(section: Section) -> str:
    if isinstance(section.surround, Pipe):
        return "in an earthed metal pipe or screen"
    return "on an earthed surface" if isinstance(section.surround, Plane) else "in open air"
