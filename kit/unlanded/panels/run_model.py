"""What is the run, in cross-section and along its length? Its numbers; the view is `run`."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import Any

import traitlets

from ..case.build import build_run
from ..errors import Refused
from ..report.cross_section import run_section
from ..report.figure import Figure
from ..report.formulas import formula_table
from ..report.tables import Column, Table
from ..study.run import Run
from ..units import FOOT, show, show_length
from .desk import Desk
from .quantity import Quantity, written

LENGTH = Quantity("Run length", "m", 1.0, 1000.0)
DETAIL = 60  # points across the live field: fewer than on paper, for a sixth of the time
NOTHING, SURFACE, PIPE, SCREEN = "nothing within reach", "a surface below", "a pipe", "a screen"
_SURROUNDS = {"plane": SURFACE, "pipe": PIPE, "screen": SCREEN}
EARTHED = {"both ends": "both", "the near end": "near", "the far end": "far", "no end": "none"}


@dataclass(frozen=True)
class Spacing:
    """The case's free distance: its path, what a box of it holds, and its value [m]."""

    path: str
    quantity: Quantity
    value: float


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
        self.run = keeping(build_run(self.desk.case), self.run)

    @property
    def spacing(self) -> Spacing | None:
        """The case's free distance; None where it has none.

        That is the spacing of singles, the bore of a conduit or pipe, or the gap to the surround;
        its range follows from the size of the conductors.
        """
        cable, surround = self.desk.case.content.run.cable, self.desk.case.content.run.surround
        widest, across = self._sizes()
        if cable.layout == "singles":
            value = widest if cable.spacing is None else cable.spacing
            return _spacing("run.cable.spacing", "Spacing of centres", value, widest, 40 * widest)
        if cable.layout == "in conduit":
            return _spacing("run.cable.bore", "Bore of the conduit", cable.bore, 1.05 * across,
                            4 * across)
        if surround is None:
            return None
        if surround.kind == "pipe":
            return _spacing("run.surround.bore", "Bore of the pipe", surround.bore,
                            1.05 * (across + 2 * surround.gap), 10 * across)
        most = 20 * across if surround.kind == "plane" else across
        return _spacing("run.surround.gap", f"Gap to the {_word(surround.kind)}", surround.gap,
                        0.01 * widest, most)

    @property
    def surround(self) -> str | None:
        """What surrounds the cable, as a choice; None where the layout itself says it."""
        content = self.desk.case.content.run
        if content.cable.layout == "in conduit":
            return None
        return _SURROUNDS[content.surround.kind] if content.surround else NOTHING

    @property
    def earthed(self) -> str | None:
        """Where the cable's screen is earthed, as a choice; None where it has none."""
        surround = self.desk.case.content.run.surround
        if surround is None or surround.kind != "screen":
            return None
        return next(choice for choice, key in EARTHED.items() if key == surround.earthed)

    def set_length(self, text: str) -> None:
        """Change the run's length in the case; refused as the case file would be."""
        self.desk.change({"run.length": text})

    def set_spacing(self, text: str) -> None:
        """Change the free distance in the case; refused as the case file would be."""
        if self.spacing is None:
            raise Refused("spacing", "is fixed: nothing surrounds the cable, and its cores touch")
        self.desk.change({self.spacing.path: text})

    def set_surround(self, choice: str) -> None:
        """Put another surround into the case, a little away from the cable, or take it out."""
        across = self._sizes()[1]
        tables: dict[str, Any] = {
            NOTHING: None,
            SURFACE: {"kind": "plane", "gap": self._written(0.2 * across)},
            PIPE: {"kind": "pipe", "bore": self._written(2 * across)},
            SCREEN: {"kind": "screen", "gap": self._written(0.1 * across)},
        }
        self.desk.change({"run.surround": tables[choice]})

    def set_earthed(self, choice: str) -> None:
        """Earth the cable's screen elsewhere in the case; refused as the case file would be."""
        self.desk.change({"run.surround.earthed": EARTHED[choice]})

    def section(self, *, detail: int = DETAIL) -> Figure:
        """The section to scale with the unloaded potential at the far end."""
        return run_section(self.run, detail=detail, customary=self.desk.customary)

    def matrix(self) -> Table:
        """The capacitance matrix, a row for each conductor."""
        unit, per = ("pF/ft", FOOT) if self.desk.customary else ("pF/m", 1.0)
        names = self.run.names
        return Table(
            "matrix", f"Capacitance matrix (Maxwell), {unit}.",
            (Column(""), *(Column(name, "", "right") for name in names)),
            tuple((name, *(f"{c * 1e12 * per:.2f}".replace("-", "−") for c in row))
                  for name, row in zip(names, self.run.matrix, strict=True)))

    def formulas(self) -> Table:
        """Formulas that this section is near to: what each gives, and what the matrix has."""
        return formula_table(self.run, customary=self.desk.customary)

    def answer(self) -> str:
        """The run in one sentence."""
        length = show_length(self.run.length, customary=self.desk.customary, digits=4)
        said = (f"{len(self.run.section.names)} conductors, {length}; the standing residual "
                f"current is {show(abs(self.run.residual), 'A')}")
        highest = max(self.run.section.names, key=self._floating)
        if self._floating(highest) == 0:
            return f"{said}; no conductor is left without a feed."
        return (f"{said}; “{highest}” has {show(self._floating(highest), 'V')} to earth at its "
                "far end.")

    def text(self) -> str:
        """The same as lines of text, with the matrix and its neighbours."""
        unit = "pF/ft" if self.desk.customary else "pF/m"
        rows = [f"{name}: {' '.join(cells)} {unit}" for name, *cells in self.matrix().rows]
        near = [f"{what}: {formula} {unit} by formula, {ours} {unit} in the matrix"
                for what, formula, ours in self.formulas().rows]
        return "\n".join([self.answer(), *rows, *near])

    def offers(self) -> Sequence[tuple[str, dict[str, Any]]]:
        """What can be put into the memo besides the section and matrix, which always are."""
        return [("Formulas near to the section", {"kind": "formulas"})]

    def _sizes(self) -> tuple[float, float]:
        """Outer diameter of the widest conductor, and the extent of all of them [m]."""
        cs = self.run.section.conductors
        span = max(max(c.x + c.outer for c in cs) - min(c.x - c.outer for c in cs),
                   max(c.y + c.outer for c in cs) - min(c.y - c.outer for c in cs))
        return 2 * max(c.outer for c in cs), span

    def _written(self, value: float) -> str:
        size = 0.0254 if self.desk.customary else 1.0
        return written(float(f"{value / size:.2g}") * size, "m", customary=self.desk.customary)

    def _floating(self, name: str) -> float:
        """Voltage to earth of a conductor that no supply holds, 0 for one that is held [V]."""
        held = {self.run.node(w) for w in (*self.run.supply.lines, "N", "earth")}
        near, far = (self.run.node(f"{name}@{end}") for end in ("near", "far"))
        return 0.0 if held & {near, far} else abs(self.run.voltage(f"{name}@far"))


def keeping(run: Run, old: Run | None) -> Run:
    """The run with the matrix of the old one, where the section is the same."""
    same = old is not None and (run.section, run.screen) == (old.section, old.screen)
    return replace(run, capacitance=old.matrix) if same and old else run


def _spacing(path: str, label: str, value: float, low: float, high: float) -> Spacing:
    return Spacing(path, Quantity(label, "m", low, high), value)


def _word(kind: str) -> str:
    return "surface" if kind == "plane" else kind
