"""What was it? The readings of the case, the odds of their causes, and a cause tried by hand."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from typing import Any

import traitlets

from ..case.memo import size_unit
from ..case.observed import case_observations, case_suspects
from ..errors import Refused
from ..report.causes import explanation_of, next_table, odds_table, worth_taking
from ..report.causes_figures import next_figure, odds_figure, predicted_figure
from ..report.causes_words import candidate_words
from ..report.figure import Figure
from ..report.investigation import Investigation, investigate
from ..report.margin_figures import per_cent
from ..report.tables import Table
from ..report.tried import SIZED, Trial, fits, tried_figure
from ..study.causes import Explanation, Progress, silent
from ..study.finding import finding, findings, sentences
from ..study.hypotheses import Cause
from ..study.reduced import Reduced
from ..units import show
from .desk import Desk
from .quantity import Quantity, written

READINGS = "readings"


class CausesModel(traitlets.HasTraits):
    """The case's readings, what they mean, and what a cause of some size would read.

    Traits
    ------
    investigation : the case worked out, renewed with it
    suspect : the conductor that is looked at
    cause, size : the cause that is tried on it, and its size [ohm] or [V]
    """

    investigation = traitlets.Instance(Investigation)
    suspect = traitlets.Unicode()
    cause = traitlets.Unicode(SIZED[1])
    size = traitlets.Float(100e3)

    def __init__(self, desk: Desk) -> None:
        self.desk = desk
        self._trial: tuple[object, Trial | None] = (None, None)
        super().__init__()
        self.read_case()

    def read_case(self) -> None:
        """Take over the case that is on the desk; refused where every conductor is fed."""
        made = investigate(self.desk.case)
        suspects = case_suspects(self.desk.case.content, made.run)
        if not suspects:
            raise Refused(self.desk.case.name, "has no conductor that nothing feeds")
        case_observations(self.desk.case)  # refused where an instrument cannot show a reading
        self.suspects = suspects
        with self.hold_trait_notifications():
            self.investigation = made
            if self.suspect not in suspects:
                self.suspect = suspects[0]

    def work_out(self, progress: Progress = silent) -> Explanation:
        """The odds of the causes: long work the first time after a change."""
        found = explanation_of(self.investigation, progress=progress)
        assert found is not None
        worth_taking(self.investigation)
        return found

    def rows(self) -> list[dict[str, Any]]:
        """The readings as the case has them written."""
        return list(self.desk.plain.get(READINGS, []))

    def set_reading(self, number: int, key: str, value: Any) -> None:
        """Change one thing of a reading; an empty value takes the key out."""
        rows = [dict(row) for row in self.rows()]
        if value:
            rows[number][key] = value
        else:
            rows[number].pop(key, None)
        self.desk.change({READINGS: rows})

    def add_reading(self, **reading: Any) -> None:
        """Add a reading that was taken; its keys are those of the case file, `from_` for from."""
        row = {key.rstrip("_"): value for key, value in reading.items() if value}
        if not row.get("shows"):
            raise Refused("shows", "is empty: write what the display showed",
                          hint='such as "37.2 V"')
        self.desk.change({READINGS: [*self.rows(), row]})

    def take_reading(self, number: int) -> None:
        """Take a reading out of the case."""
        left = [row for k, row in enumerate(self.rows()) if k != number]
        self.desk.change({READINGS: left or None})

    def said(self) -> list[str]:
        """What the readings come to on the suspect, in sentences."""
        found = self.work_out()
        return list(sentences(found, finding(found, self.suspect), customary=self.desk.customary))

    def odds(self) -> Figure:
        """The share of each cause on the suspect, before and after the readings."""
        return odds_figure(self.work_out(), self.suspect, key="odds")

    def predicted(self) -> Figure | None:
        """Each reading on the suspect against what the causes predict of it; None without one."""
        return predicted_figure(self.work_out(), self.suspect, key="predicted")

    def next(self) -> Figure | None:
        """What the next measurements would tell; None where none would tell anything."""
        found = worth_taking(self.investigation)
        return next_figure(found) if found else None

    def odds_table(self) -> Table:
        """The odds on the suspect with what the sizes come out at."""
        found = self.work_out()
        return odds_table(found, [finding(found, self.suspect)])

    def next_table(self) -> Table | None:
        """The next measurements with what each cause predicts of them."""
        best = worth_taking(self.investigation)
        return next_table(self.work_out(), best) if best else None

    @property
    def trial(self) -> Trial:
        """The cause that is tried, on the run and the readings as they are."""
        key = (self.investigation, self.suspect, self.cause)
        if self._trial[0] != key:
            content = self.desk.case.content
            reduced = Reduced(*self.investigation.runs, self.suspects,
                              content.causes.section == "as described")
            cause: Cause = self.cause  # type: ignore[assignment]
            taken = case_observations(self.desk.case)
            self._trial = key, Trial(reduced, taken, self.suspect, cause)
        trial = self._trial[1]
        assert trial is not None
        return trial

    @property
    def size_box(self) -> Quantity:
        """What the box of the tried size holds."""
        sizes = self.trial.sizes
        return Quantity("Size of the cause", size_unit(self.cause), sizes.low, sizes.high)

    def try_cause(self, cause: str) -> None:
        """Try another cause, at its most likely size."""
        likely = Trial(self.trial.reduced, self.trial.readings, self.suspect,
                       cause).sizes.likely  # type: ignore[arg-type]
        with self.hold_trait_notifications():
            self.cause, self.size = cause, likely

    def set_size(self, text: str) -> None:
        """Try another size; refused outside the range that the cause is looked for in."""
        size = self.size_box.si(text)
        self.trial.volts_at(size)
        self.size = size

    def tried(self) -> Figure:
        """What the tried cause would read, against its size."""
        return tried_figure(self.trial, self.size)

    def tried_words(self) -> str:
        """Whether the tried cause fits, in a sentence."""
        trial = self.trial
        fitting = fits(trial, self.size)
        here = f"{self.cause} of {show(self.size, trial.unit)} on “{self.suspect}”"
        if not fitting:
            return f"There is no reading yet that {here} could be held against."
        odd = [str(k) for k, fit in enumerate(fitting, 1) if not fit]
        if odd:
            return f"With {here}, reading {', '.join(odd)} would hardly be what it was."
        return f"With {here}, every reading could be what it was."

    def text(self) -> str:
        """The odds, the sentences and the next measurement as lines of text."""
        return "\n".join(self._lines())

    def _lines(self) -> Iterator[str]:
        found = self.work_out()
        for made in findings(found):
            yield from sentences(found, made, customary=self.desk.customary)
            odds = sorted(found.odds(made.suspect).items(), key=lambda item: -item[1])
            yield f"{made.suspect}: " + ", ".join(f"{c} {per_cent(p)}" for c, p in odds)
        for prospect in worth_taking(self.investigation)[:1]:
            yield f"Next: {candidate_words(prospect.candidate)}, {prospect.bits:.2f} bit"

    def offers(self) -> Sequence[tuple[str, dict[str, Any]]]:
        """The tried cause; the odds are in every memo of a case with readings."""
        return [("The cause that is tried", {
            "kind": "tried cause", "conductor": self.suspect, "cause": self.cause,
            "size": written(float(f"{self.size:.6g}"), size_unit(self.cause))})]

