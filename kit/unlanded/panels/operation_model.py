"""What may stray coupling hold in? Its numbers; the view is `operation`."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from typing import Any

import traitlets

from ..case.build import build_run
from ..case.uncertainty import uncertain_run
from ..errors import Refused
from ..report.beside import RESISTANCES, Real, band_beside, beside_figure
from ..report.figure import Figure
from ..report.operation import (
    comparison_table,
    cures_table,
    length_of_load,
    level_band,
    rearranged_load,
    state_words,
    states_table,
)
from ..report.tables import Table
from ..study.batch import RunBatch
from ..study.comparison import Compared
from ..study.operation import Operation, Watched, by_current, level_on, operation
from ..study.run import Run
from ..study.uncertain import UncertainRun
from ..units import show, show_length
from .desk import Desk
from .quantity import Quantity, written
from .run_model import keeping

RESISTOR = Quantity("Resistor beside it", "ohm", float(RESISTANCES[0]), float(RESISTANCES[-1]))
BLEEDER = 22e3  # ohm: the handle begins here where no resistor is suggested


@dataclass(frozen=True, eq=False)
class Judged:
    """A load judged over all that is not known: its state and cures, and the curves' bands.

    `others` is the load in other arrangements of its contacts, where the case names its own.
    """

    of: object
    found: Operation
    others: tuple[Compared, ...]
    length: tuple[Real, Real]
    beside: tuple[Real, Real]


class OperationModel(traitlets.HasTraits):
    """A load of the case with its contacts open, and a resistor tried beside it.

    Its level is worked out at once; state over all that is not known, longest run and cures take
    longer, and are worked out when they are asked for (`judge`).

    Traits
    ------
    uncertain : the run with what is not known of it, renewed with the case
    load : name of the load
    resistor : tried beside it [ohm]
    """

    uncertain = traitlets.Instance(UncertainRun)
    load = traitlets.Unicode()
    resistor = traitlets.Float(BLEEDER)

    def __init__(self, desk: Desk) -> None:
        self.desk = desk
        self._about: object = None
        self._judged: Judged | None = None
        super().__init__(uncertain=uncertain_run(desk.case))
        self.read_case()

    @property
    def run(self) -> Run:
        """The run of the case as it is now."""
        return self.uncertain.run

    def read_case(self) -> None:
        """Take over the case that is on the desk; refused where it watches no load."""
        content, old = self.desk.case.content, self.uncertain
        if not content.operation:
            raise Refused(self.desk.case.name, "watches no load",
                          hint="write [[operation]] with name, kind, from and to")
        about = (content.run.cable, content.run.surround, content.spread)
        same = old if about == self._about else None
        run = keeping(build_run(self.desk.case), old.run)
        made, self._about = uncertain_run(self.desk.case, run, same), about
        with self.hold_trait_notifications():
            if self.load not in self.loads:
                self.load = self.loads[0]
            self.uncertain = made

    @property
    def loads(self) -> tuple[str, ...]:
        """The loads that the case watches, by name."""
        return tuple(entry.name for entry in self.desk.case.content.operation)

    @property
    def watched(self) -> Watched:
        """The chosen load."""
        entry = self.desk.case.content.operation[self.loads.index(self.load)]
        return by_current(self.run, entry.watched())

    def set_length(self, text: str) -> None:
        """Change the run's length in the case; refused as the case file would be."""
        self.desk.change({"run.length": text})

    def set_resistor(self, text: str) -> None:
        """Try another resistor beside the load; refused outside the handle's range."""
        value = RESISTOR.si(text)
        if not RESISTOR.low <= value <= RESISTOR.high:
            raise Refused(RESISTOR.label, f"must be {show(RESISTOR.low, 'Ω')} to "
                                          f"{show(RESISTOR.high, 'Ω')}", given=text)
        self.resistor = value

    def judge(self) -> Judged:
        """The load over all that is not known: long work the first time after a change."""
        key = (self.uncertain, self.load)
        if self._judged is None or self._judged.of != key:
            watched, uncertain = self.watched, self.uncertain
            found = operation(uncertain, watched)
            self._judged = Judged(key, found, rearranged_load(self.desk.case, uncertain, found),
                                  level_band(uncertain, watched), band_beside(uncertain, watched))
        return self._judged

    @property
    def judged(self) -> Judged | None:
        """What has been judged of the load as it is; None where that is still to be done."""
        known = self._judged
        return known if known and known.of == (self.uncertain, self.load) else None

    def along(self) -> Figure:
        """The level against the length of the run."""
        known = self.judged
        return length_of_load(self.run, self.watched, known.length if known else None,
                              customary=self.desk.customary)

    def beside(self) -> Figure:
        """The level against the resistor beside the load."""
        known = self.judged
        return beside_figure(self.run, self.watched, self.resistor,
                             band=known.beside if known else None, cure=self._bleeder(known))

    def states(self) -> Table | None:
        """State, margin and longest run; None where that is still to be worked out."""
        known = self.judged
        return states_table((known.found,), customary=self.desk.customary) if known else None

    def cures(self) -> Table | None:
        """What would let go of the load; None where that is still to be worked out."""
        return cures_table(self.judged.found, 1) if self.judged else None

    def others(self) -> Table | None:
        """The load in other arrangements; None where there are none, or still to be worked out."""
        if not (self.judged and self.judged.others):
            return None
        return comparison_table(self.judged.others, 1, customary=self.desk.customary)

    def answer(self) -> str:
        """The load in one sentence."""
        watched, known = self.watched, self.judged
        level = float(level_on(RunBatch.of(self.run), watched)[0])
        state = state_words(known.found) if known else watched.state(level)
        off, on = (show(v, watched.unit) for v in watched.limits)
        length = show_length(self.run.length, customary=self.desk.customary, digits=4)
        return (f"On {length}, {show(level, watched.unit)} is coupled into the {watched.name} with "
                f"its contacts open: {state} (sure to be off at {off}, sure to be "
                f"on at {on}).")

    def text(self) -> str:
        """Every load as lines of text, with its longest run and its first cures."""
        return "\n".join(self._lines())

    def _lines(self) -> Iterator[str]:
        for entry in self.desk.case.content.operation:
            found = operation(self.uncertain, entry.watched())
            w, unit = found.watched, found.watched.unit
            runs = found.longest.words(
                lambda x: show_length(x, customary=self.desk.customary))
            yield (f"{w.name}: {show(found.level, unit)} ({show(found.low, unit)} to "
                   f"{show(found.high, unit)}), {state_words(found)}; sure to be off for runs: "
                   f"{runs}")
            for cure in found.cures[:3]:
                yield f"  {cure.name}: leaves at most {show(cure.level, unit)}, {cure.state}"

    def offers(self) -> Sequence[tuple[str, dict[str, Any]]]:
        """The resistor that is tried; state, cures and curve are in every memo of such a case."""
        return [("The resistor that is tried", {
            "kind": "resistor beside", "load": self.load,
            "resistor": written(self.resistor, "ohm")})]

    @staticmethod
    def _bleeder(known: Judged | None) -> Any:
        if known is None:
            return None
        return next((c.bleeder for c in known.found.cures if c.bleeder), None)
