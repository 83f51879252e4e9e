"""What margin has the device left? Its numbers; the view is `margin`."""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence
from typing import Any

import traitlets

from ..case.build import build_run, case_instruments
from ..case.standing import THE_RUN, case_history, case_margin
from ..report.added import load_figure
from ..report.figure import Figure
from ..report.margin import limits_table, shares_table
from ..report.margin_figures import budget_figure, log_figure, per_cent, trip_time_figure
from ..report.tables import Column, Table
from ..report.words import pair_words
from ..study.readings import Pair, reading_sheet, usual_pairs
from ..study.residual import Margin
from ..study.run import Run
from ..study.trip import MeasuredTrip, measured_trips
from ..units import show
from .desk import Desk
from .quantity import Quantity
from .run_model import keeping


class MarginModel(traitlets.HasTraits):
    """The device of the case, what stands behind it, and what an instrument adds.

    Traits
    ------
    margin : renewed with the case
    leak : name of the leak whose pieces are counted; "" where nothing but the run leaks
    pair : that an instrument is put on
    """

    margin = traitlets.Instance(Margin)
    leak = traitlets.Unicode()
    pair = traitlets.Instance(Pair, ("earth", "N"))

    def __init__(self, desk: Desk) -> None:
        self.desk = desk
        self._runs: tuple[Run, ...] = ()
        self._history: tuple[object, Any] = (None, None)
        super().__init__()
        self.read_case()

    @property
    def run(self) -> Run:
        """The run of the case as it is now."""
        return self._runs[0]

    def read_case(self) -> None:
        """Take over the case that is on the desk; refused where it has no device."""
        old = self._runs
        fresh = (build_run(self.desk.case, limit) for limit in ("likely", "low", "high"))
        runs = tuple(keeping(run, old[k] if old else None) for k, run in enumerate(fresh))
        made = case_margin(self.desk.case, *runs)
        self._runs, self.pairs = runs, tuple(usual_pairs(runs[0]))
        with self.hold_trait_notifications():
            if self.leak not in self.leaks:
                self.leak = self._largest(made)
            if self.pair not in self.pairs:
                self.pair = self._heaviest()
            self.margin = made

    @property
    def leaks(self) -> tuple[str, ...]:
        """What stands behind the device besides the run, by name."""
        return tuple(entry.name for entry in self.desk.case.content.standing)

    @property
    def pieces(self) -> int:
        """How many pieces of the chosen leak stand there."""
        return self.desk.case.content.standing[self.leaks.index(self.leak)].count

    @property
    def pieces_box(self) -> Quantity:
        """What the box of the pieces holds."""
        return Quantity("Pieces of it", "1", 0.0, max(20.0, 4.0 * self.pieces), log=False)

    def set_length(self, text: str) -> None:
        """Change the run's length in the case; refused as the case file would be."""
        self.desk.change({"run.length": text})

    def set_pieces(self, text: str) -> None:
        """Change how many pieces of the chosen leak the case has."""
        count = self.pieces_box.si(text)
        self.desk.change({f"standing[{self.leaks.index(self.leak) + 1}].count": int(count)})

    def budget(self) -> Figure:
        """What each contribution brings, and the device's band."""
        return budget_figure(self.margin)

    def added(self) -> Figure | None:
        """The chance of a trip against the pieces of the chosen leak; None where there is none."""
        return load_figure(self.margin, self.leak) if self.leak else None

    def trips(self) -> tuple[MeasuredTrip, ...]:
        """What each instrument of the sheet does to the device on the pair."""
        run, low, high = self._runs
        sheet = reading_sheet(run, case_instruments(self.desk.case), [self.pair], low=low,
                              high=high)
        return measured_trips(sheet, self.margin, runs=(low, high))

    def trip_time(self) -> Figure:
        """The time to trip, with the instruments on the pair that will or may trip it."""
        return trip_time_figure(self.margin, self.trips())

    def trip_table(self) -> Table:
        """What each instrument on the pair adds, and whether the device trips."""
        rows = tuple((t.instrument.name, show(t.added, "A"), show(t.expected, "A"), t.verdict,
                      per_cent(t.chance),
                      show(t.longest, "s", 2) if math.isfinite(t.longest) else "–")
                     for t in self.trips())
        return Table(
            "instruments", f"Each instrument on {pair_words(self.pair.a, self.pair.b)}.",
            (Column("Instrument"), Column("Adds", "", "right"), Column("Residual", "", "right"),
             Column("Trips it"), Column("Chance", "", "right"), Column("Within", "", "right")),
            rows, "Residual: the standing current with what the instrument adds, as phasors. "
            "Within: the longest time that the standard allows.")

    def log(self) -> Figure | None:
        """The current log of the case against the device; None where it has none."""
        table = self.desk.case.content.log
        if table is None:
            return None
        key = (self.desk.path, table, self.margin.device)
        if self._history[0] != key:
            self._history = key, case_history(self.desk.case, self.margin)
        found, _ = self._history[1]
        return log_figure(found, self.margin)

    def shares(self) -> Table:
        """What stands behind the device."""
        return shares_table(self.margin)

    def limits(self) -> Table:
        """The margin to each limit."""
        return limits_table(self.margin)

    def answer(self) -> str:
        """The margin in one sentence."""
        made = self.margin
        low, high = made.credible
        left, worst = made.to(made.device.non_operating)
        return (f"{show(made.expected, 'A')} is expected behind the {show(made.device.rated, 'A')} "
                f"device, 95 % of the draws from {show(low, 'A')} to {show(high, 'A')}; to the "
                f"{show(made.device.non_operating, 'A')} that must not trip it, {show(left, 'A')} "
                f"is left, {show(worst, 'A')} at the worst credible. Chance of a trip at a moment "
                f"taken at random: {per_cent(made.chance)}, with everything on "
                f"{per_cent(made.chance_all_on)}.")

    def text(self) -> str:
        """The same as lines of text, with what each contribution and each instrument adds."""
        return "\n".join(self._lines())

    def _lines(self) -> Iterator[str]:
        yield self.answer()
        for share in self.margin.shares:
            yield (f"{share.name}: {show(share.arithmetic, 'A')} as numbers, "
                   f"{show(share.expected, 'A')} expected, {show(share.along, 'A')} towards the "
                   "total")
        yield f"On {pair_words(self.pair.a, self.pair.b)}:"
        for t in self.trips():
            yield (f"{t.instrument.name}: adds {show(t.added, 'A')}, {t.verdict} trip the device "
                   f"(chance {per_cent(t.chance)})")

    def offers(self) -> Sequence[tuple[str, dict[str, Any]]]:
        """The chance of a trip against the chosen load; the rest is in every memo of a device."""
        if not self.leak:
            return []
        return [(f"Added load: {self.leak}", {"kind": "added load", "leak": self.leak})]

    def _largest(self, margin: Margin) -> str:
        others = [s for s in margin.shares if s.name != THE_RUN and s.name in self.leaks]
        return max(others, key=lambda s: s.expected).name if others else ""

    def _heaviest(self) -> Pair:
        """The pair on which a load of 3 kΩ adds most to the residual current."""
        def added(pair: Pair) -> float:
            port = self.run.port(pair.a, pair.b)
            return abs(port.voltage / (3e3 + port.impedance) * port.residual_per_ampere)
        return max(self.pairs, key=added)

