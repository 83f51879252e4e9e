"""The circuit as the memo draws it: conductors, ends, capacitances, the section to scale."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import Any

from ..case.switching import Switching
from ..errors import listed
from ..physics.section import Conductor, Pipe, Plane
from ..reference.records import Source
from ..reference.screens import SCREEN_RESISTANCE, SCREEN_TO_EARTH
from ..study.ends import SCREEN, Bonded, Driven, Joined, Open, Termination, Through
from ..study.run import Run
from ..study.supply import Supply
from ..units import FOOT, show, show_length
from .cores import core_sizes
from .cross_section import run_section
from .investigation import Investigation
from .memo import Block, Paragraph, Part
from .tables import Column, Table
from .words import point_words, screen_words

MATRIX = 9  # conductors whose matrix a page is wide enough for
_INCH = 0.0254


def circuit_finding(investigation: Investigation) -> list[Block]:
    """What the run is, and which conductors nothing is connected to."""
    run = investigation.run
    length = show_length(run.length, customary=investigation.customary)
    return [Paragraph(f"The run is {length} long, supplied at {_supply_words(run.supply)}; "
                      f"{_open_words(run)}.")]


def circuit_part(investigation: Investigation) -> Part:
    """The run as computed: ends, capacitances, the section to scale."""
    run, case = investigation.run, investigation.case.content
    length = show_length(run.length, customary=investigation.customary)
    text = (f"A run of {length}, {_surround(run)}. Supply: {_supply_words(run.supply)}."
            f"{_switching_words(case.run.switching)}")
    notes = [Paragraph(" ".join(p.split())) for p in case.notes.split("\n\n") if p.strip()]
    matrix: list[Block] = [capacitance_table(investigation)] if len(run.names) <= MATRIX else [
        Paragraph("The matrix of capacitances is in capacitance.csv.")]
    return Part("The circuit", (
        *notes, Paragraph(text), conductor_table(investigation), *matrix,
        run_section(run, customary=investigation.customary,
                    title="Section, with the unloaded voltages at the far end"),
    ))


def circuit_sources(investigation: Investigation) -> Iterator[tuple[str, Source]]:
    """The sources of what the case does not say of its screen."""
    written = investigation.case.content.run.screen
    given = set() if written is None else written.model_fields_set
    if written and "resistance" not in given:
        yield "resistance of the screen", SCREEN_RESISTANCE.source
    if written and written.earthed == "none" and "to_earth" not in given:
        yield "capacitance of the screen to earth", SCREEN_TO_EARTH.source


def run_results(investigation: Investigation) -> Mapping[str, Any]:
    """The run for results.json; each key names its unit."""
    run = investigation.run
    return {
        "conductors": run.names,
        "length_m": run.length,
        "frequency_Hz": run.frequency,
        "capacitance_F_per_m": run.matrix,
        "resistance_ohm_per_m": run.resistances,
        "standing_residual_A": run.residual,
    }


def conductor_table(investigation: Investigation) -> Table:
    """Each conductor with its dimensions and what is done with its ends."""
    run, customary = investigation.run, investigation.customary
    sizes = core_sizes(investigation.case.content.run.cable)
    unit = "in" if customary else "mm"
    columns = (Column("Conductor"), Column("Size"), Column("Metal", unit, "right"),
               Column("Cover", unit, "right"), Column("Permittivity", "", "right"),
               Column("Near end"), Column("Far end"))
    ends = zip(investigation.low.section.conductors, investigation.high.section.conductors,
               strict=True)
    rows = tuple(
        (c.name, f"{sizes[c.name].name}, {sizes[c.name].stranding}" if c.name in sizes else "–",
         _diameter(c.radius, customary), _diameter(c.outer, customary) if _covered(c) else "bare",
         _permittivity(c, low, high), termination_words(run.near[c.name]),
         termination_words(run.far[c.name]))
        for c, (low, high) in zip(run.section.conductors, ends, strict=True)
    )
    return Table("conductors", "Conductors, and what is done with their ends.", columns,
                 rows + _screen_row(run, customary),
                 "Outside diameters. The metal's is that of the smooth wire with the same "
                 "capacitance, which for a strand is less than the circle round it.")


def _screen_row(run: Run, customary: bool) -> tuple[tuple[str, ...], ...]:
    if run.screen is None:
        return ()
    assert isinstance(run.section.surround, Pipe)
    inside = f"{_diameter(run.section.surround.radius, customary)} inside"
    return ((SCREEN, "–", inside, "–", "–", termination_words(run.near[SCREEN]),
             termination_words(run.far[SCREEN])),)


def _covered(c: Conductor) -> bool:
    return c.outer > c.radius


def _diameter(radius: float, customary: bool) -> str:
    return f"{2 * radius / _INCH:.3f}" if customary else f"{2e3 * radius:.2f}"


def _permittivity(c: Conductor, low: Conductor, high: Conductor) -> str:
    if not _covered(c):
        return "–"
    least, most = low.cover_permittivity, high.cover_permittivity
    band = f" ({least:g} … {most:g})".replace(" … ", "\u00a0…\u00a0") if least < most else ""
    return f"{c.cover_permittivity:g}{band}"


def capacitance_table(investigation: Investigation) -> Table:
    """The Maxwell matrix in pF/m, or in pF/ft."""
    run = investigation.run
    unit, per = ("pF/ft", FOOT) if investigation.customary else ("pF/m", 1.0)
    columns = (Column(unit), *(Column(name, "", "right") for name in run.names))
    rows = tuple(
        (name, *(_fixed(value * 1e12 * per) for value in row))
        for name, row in zip(run.names, run.matrix, strict=True)
    )
    return Table(
        "capacitance", "Capacitance per length, as the Maxwell matrix.", columns, rows,
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


def _switching_words(switching: Switching | None) -> str:
    """How the load is switched, as a sentence after another; "" where the case does not say."""
    if switching is None:
        return ""
    cores = switching.cores
    parts = ([f"travellers {listed(switching.travellers)}"] if switching.travellers else
             [f"{part} {name}" for part in ("live", "switched") if (name := getattr(cores, part))])
    parts += [f"neutral {cores.neutral}"] if cores.neutral else []
    drawn = f", and {cores.live} live" if switching.travellers else ""
    return (f" The {switching.load.name} is switched in the arrangement {switching.arrangement} "
            f"({', '.join(parts)}), drawn with its contacts open{drawn}.")


def _open_words(run: Run) -> str:
    loose = [n for n in run.section.names
             if isinstance(run.near[n], Open) and isinstance(run.far[n], Open)]
    said = (f"{listed(loose)} {'is' if len(loose) == 1 else 'are'} open at both ends" if loose
            else "no conductor is open at both ends")
    return f"{said}; the screen is {screen_words(run)}" if run.screen else said


def _supply_words(supply: Supply) -> str:
    live = {1: "", 2: ", two lines in opposite phase", 3: ", three phases"}[supply.phases]
    return f"{show(supply.voltage, 'V')} line to neutral, {show(supply.frequency, 'Hz')}{live}"


def _surround(run: Run) -> str:
    section = run.section
    if run.screen is not None:
        return f"in a screen that is {screen_words(run)}"
    if isinstance(section.surround, Pipe):
        return "in an earthed metal pipe"
    return "on an earthed surface" if isinstance(section.surround, Plane) else "in open air"
