"""What is the run, in cross-section and along its length? The model, and the view over it."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

import ipywidgets as w
import numpy as np
import traitlets
from numpy.typing import NDArray

from ..case.build import build_run
from ..errors import Refused
from ..physics.closed_forms import (
    covered_pair_series,
    off_centre_in_screen,
    two_wires,
    wire_over_plane,
)
from ..physics.section import Pipe, Plane, Section
from ..report.cross_section import section_figure
from ..report.figure import Figure
from ..study.run import Run
from ..units import show, show_length
from .desk import Desk
from .live import LiveFigure
from .look import said, table_html
from .panel import Panel
from .quantity import Quantity, QuantityBox

Real = NDArray[np.float64]
LENGTH = Quantity("Run length", "m", 1.0, 1000.0)
DETAIL = 70  # points across the live field: a third of what paper gets, at an eighth of the time


class RunModel(traitlets.HasTraits):
    """The run of the case on the desk, and what its formulas' neighbours say.

    Traits
    ------
    run : renewed with the case
    """

    run = traitlets.Instance(Run)

    def __init__(self, desk: Desk) -> None:
        self.desk = desk
        super().__init__(run=build_run(desk.case))

    def read_case(self) -> None:
        """Take over the case that is on the desk."""
        fresh = build_run(self.desk.case)
        kept = fresh.section == self.run.section
        self.run = replace(fresh, capacitance=self.run.matrix) if kept else fresh

    @property
    def spacing(self) -> tuple[str, float, str] | None:
        """Path, value [m] and name of the case's one free distance; None where it has none.

        That of singles side by side, or the gap between the cable and its surround.
        """
        content = self.desk.case.content.run
        if content.cable.layout == "singles" and content.cable.spacing is not None:
            return "run.cable.spacing", content.cable.spacing, "Spacing of centres"
        if content.surround is not None:
            return "run.surround.gap", content.surround.gap, f"Gap to the {content.surround.kind}"
        return None

    def set_length(self, text: str) -> None:
        """Change the run's length in the case; refused as the case file would be."""
        self.desk.change({"run.length": text})

    def set_spacing(self, text: str) -> None:
        """Change the free distance in the case; refused as the case file would be."""
        if self.spacing is None:
            raise Refused("spacing", "is fixed in this layout: its cores touch",
                          hint='give the case a [run.surround], or the layout "singles"')
        self.desk.change({self.spacing[0]: text})

    def section(self, *, detail: int = DETAIL) -> Figure:
        """The section to scale with the unloaded potential at the far end."""
        volts = [self.run.voltage(f"{name}@far") for name in self.run.section.names]
        return section_figure(self.run.section, volts, detail=detail,
                              customary=self.desk.customary)

    def matrix_rows(self) -> list[tuple[str, ...]]:
        """The capacitance matrix in pF/m, a row for each conductor."""
        return [(name, *(f"{c * 1e12:.2f}" for c in row))
                for name, row in zip(self.run.section.names, self.run.matrix, strict=True)]

    def neighbours(self) -> list[tuple[str, str, str]]:
        """Formulas that this section is near to: what it is, what it gives, what the matrix has."""
        return closed_form_neighbours(self.run.section, self.run.matrix)

    def answer(self) -> str:
        """The run in one sentence."""
        length = show_length(self.run.length, customary=self.desk.customary, digits=4)
        highest = max(self.run.section.names, key=self._floating)
        return (f"{len(self.run.section.names)} conductors, {length}; the standing residual "
                f"current is {show(abs(self.run.residual), 'A')}; “{highest}” has "
                f"{show(self._floating(highest), 'V')} to earth at its far end.")

    def text(self) -> str:
        """The same as lines of text, with the matrix and its neighbours."""
        rows = [" ".join((r[0] + ":", *r[1:], "pF/m")) for r in self.matrix_rows()]
        near = [f"{what}: {formula} by formula, {ours} in the matrix"
                for what, formula, ours in self.neighbours()]
        return "\n".join([self.answer(), *rows, *near])

    def _floating(self, name: str) -> float:
        """Voltage to earth of a conductor that no supply holds, 0 for one that is held [V]."""
        held = {self.run.node(w) for w in (*self.run.supply.lines, "N", "earth")}
        near, far = (self.run.node(f"{name}@{end}") for end in ("near", "far"))
        return 0.0 if held & {near, far} else abs(self.run.voltage(f"{name}@far"))


def closed_form_neighbours(section: Section, c: Real) -> list[tuple[str, str, str]]:
    """For the nearest pair, and for a conductor near the surround, what formulas give.

    `c` is the section's Maxwell matrix (n, n) [F/m].
    """
    found: list[tuple[str, float, float]] = []
    cs = section.conductors
    pairs = [(abs(complex(a.x - b.x, a.y - b.y)), i, j) for i, a in enumerate(cs)
             for j, b in enumerate(cs) if i < j and a.radius == b.radius]
    if pairs:
        apart, i, j = min(pairs)
        a, b = cs[i], cs[j]
        both = f"{a.name} and {b.name}"
        found.append((f"{both}, bare and alone",
                      float(two_wires(radius=a.radius, spacing=apart)), -c[i, j]))
        if a.outer > a.radius and a.outer == b.outer and apart >= 2 * a.outer:
            layers = covered_pair_series(radius=a.radius, cover_radius=a.outer, spacing=apart,
                                         cover_permittivity=a.cover_permittivity)
            found.append((f"{both}, covers as coaxial layers", float(layers), -c[i, j]))
    found += _to_surround(section, c)
    return [(what, f"{formula * 1e12:.2f} pF/m", f"{ours * 1e12:.2f} pF/m")
            for what, formula, ours in found]


def _to_surround(section: Section, c: Real) -> list[tuple[str, float, float]]:
    """The conductor nearest the plane or pipe, alone there, against its sum of the matrix."""
    match section.surround:
        case Plane() as plane:
            k = int(np.argmin([a.y - a.outer for a in section.conductors]))
            near = section.conductors[k]
            alone = wire_over_plane(radius=near.radius, height=near.y - plane.y)
            return [(f"{near.name} over the plane, bare and alone", float(alone), c[k].sum())]
        case Pipe() as pipe:
            off = [abs(complex(a.x - pipe.x, a.y - pipe.y)) for a in section.conductors]
            k = int(np.argmax([o + a.outer for o, a in zip(off, section.conductors, strict=True)]))
            near = section.conductors[k]
            alone = off_centre_in_screen(radius=near.radius, screen_radius=pipe.radius,
                                         offset=off[k], permittivity=section.filler_permittivity)
            return [(f"{near.name} in the pipe, bare and alone", float(alone), c[k].sum())]
    return []


class RunPanel(Panel):
    """Sliders for run length and spacing, the section with its potential, and the matrix."""

    def build(self) -> Sequence[w.Widget]:
        """The controls, the section, the matrix and the formulas beside it."""
        self.model = RunModel(self.desk)
        model, customary = self.model, self.desk.customary
        self.run_length = QuantityBox(LENGTH, model.run.length, model.set_length,
                                      customary=customary)
        path_value_name = model.spacing or ("", 0.01, "Spacing")
        self.spacing = QuantityBox(Quantity(path_value_name[2], "m", 1e-3, 1.0),
                                   path_value_name[1], model.set_spacing, customary=customary)
        self.answer, self.matrix, self.near = w.HTML(), w.HTML(), w.HTML()
        self.section = LiveFigure(model.section(), height=430)
        model.observe(lambda _: self.guarded(self._draw), "run")
        self._draw()
        tables = w.VBox([self.matrix, self.near])
        return [w.HBox([self.run_length, self.spacing], layout={"flex_flow": "wrap"}),
                self.answer, w.HBox([self.section.widget, tables], layout={"flex_flow": "wrap"})]

    def renew(self) -> None:
        """Show the case as it is now."""
        self.model.read_case()
        self.run_length.show(self.model.run.length)
        if self.model.spacing:
            self.spacing.show(self.model.spacing[1])

    def figures(self) -> tuple[Figure, ...]:
        """The section, as fine as on paper."""
        return (self.model.section(detail=150),)

    def text(self) -> str:
        """The run in one sentence, the matrix, and the formulas beside it."""
        return self.model.text()

    def _draw(self) -> None:
        self.section.update(self.model.section())
        self.answer.value = said(self.model.answer())
        self.matrix.value = table_html("Capacitance matrix (Maxwell), pF/m",
                                       ("", *self.model.run.section.names),
                                       self.model.matrix_rows())
        self.near.value = table_html("Formulas that this section is near to",
                                     ("Case", "By formula", "In the matrix"),
                                     self.model.neighbours())
