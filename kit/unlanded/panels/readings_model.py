"""What will each instrument read here? Its numbers; the view is `readings`."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import traitlets

from ..case.build import build_run, case_instruments
from ..reference.instruments import Instrument
from ..report.figure import Figure
from ..report.pair import (
    IMPEDANCES,
    lengths_for,
    pair_length,
    pair_loading,
    pair_table,
    your_meter,
)
from ..report.tables import Table
from ..report.words import pair_words
from ..study.readings import Pair, ReadingSheet, ports_along, reading_sheet, usual_pairs
from ..study.run import Port, Run
from ..units import show, si
from .desk import Desk
from .quantity import Quantity, written
from .run_model import keeping

METER = Quantity("Meter impedance", "ohm", float(IMPEDANCES[0]), float(IMPEDANCES[-1]))
LENGTHS = 33  # points of a live curve


class ReadingModel(traitlets.HasTraits):
    """The readings on one pair of one case, with a meter of any resistance beside the case's own.

    Traits
    ------
    pair : the two points
    resistance : of the meter [ohm]
    sheet : expected readings on the pair, renewed with the case, the pair and the meter
    """

    pair = traitlets.Instance(Pair, ("earth", "N"))
    resistance = traitlets.Float(10e6)
    sheet = traitlets.Instance(ReadingSheet)

    def __init__(self, desk: Desk) -> None:
        self.desk = desk
        self._runs: tuple[Run, ...] = ()
        self._along: tuple[object, tuple[Port, ...]] = (None, ())
        super().__init__()
        self.read_case()

    @property
    def run(self) -> Run:
        """The run of the case as it is now."""
        return self._runs[0]

    def read_case(self) -> None:
        """Take over the case that is on the desk; the pair stays where the case still has it."""
        old = self._runs
        fresh = (build_run(self.desk.case, limit) for limit in ("likely", "low", "high"))
        self._runs = tuple(keeping(run, old[k] if old else None) for k, run in enumerate(fresh))
        self.pairs = tuple(usual_pairs(self.run))
        if self.pair not in self.pairs:
            self.pair = self._first_pair()
        self.renew()

    @traitlets.observe("pair", "resistance")
    def renew(self, _: object = None) -> None:
        """Work out the sheet of the pair again."""
        if not self._runs or self.pair not in self.pairs:
            return
        _, low, high = self._runs
        self.sheet = reading_sheet(self.run, self._tools, [self.pair], low=low, high=high)

    @property
    def _tools(self) -> tuple[Instrument, ...]:
        return (*case_instruments(self.desk.case), your_meter(self.resistance))

    def set_length(self, text: str) -> None:
        """Change the run's length in the case; refused as the case file would be."""
        self.desk.change({"run.length": text})

    def set_resistance(self, text: str) -> None:
        """Change the meter's resistance; refused as that of an instrument would be."""
        self.resistance = your_meter(si(text, "ohm", place=METER.label)).ranges[0].burden.resistance

    def loading(self) -> Figure:
        """Reading against the impedance of the meter, with every instrument marked."""
        return pair_loading(self._runs, self.sheet, self.pair)

    def length(self) -> Figure:
        """Reading against the length of the run, on your meter and some of the case's."""
        lengths = lengths_for(self.run, LENGTHS, customary=self.desk.customary)
        return pair_length(self.run, self.pair, self._tools, lengths,
                           ports=self._ports(lengths), customary=self.desk.customary)

    def table(self) -> Table:
        """The sheet of the pair, as the table under the figures shows it."""
        return pair_table(self.sheet, self.pair)

    def answer(self) -> str:
        """The pair in one sentence."""
        row = self.sheet.rows[0]
        return (f"{pair_words(self.pair.a, self.pair.b)}: {show(abs(row.unloaded), 'V')} unloaded "
                f"behind {show(abs(row.source_impedance), 'Ω')}; {row.remark}.")

    def text(self) -> str:
        """The same as lines of text."""
        return "\n".join([self.answer(), *(
            f"{name}: reads {reads} ({low} to {high}), loads it by {by}, adds {adds}"
            for name, reads, low, high, by, adds in self.table().rows)])

    def offers(self) -> Sequence[tuple[str, dict[str, Any]]]:
        """What can be put into the memo, as the case file has it."""
        about = {"from": self.pair.a, "to": self.pair.b,
                 "meter": written(self.resistance, "ohm")}
        return [("Reading against impedance", {"kind": "loading", **about}),
                ("Reading against run length", {"kind": "length", **about}),
                ("Table of readings", {"kind": "readings", **about})]

    def _ports(self, lengths: Any) -> tuple[Port, ...]:
        """The pair along the lengths; they stay while only the run's own length is moved."""
        content = self.desk.case.content
        key = (self.pair, lengths[-1], content.supply,
               content.run.model_copy(update={"length": 1.0}))
        if self._along[0] != key:
            self._along = key, ports_along(self.run, self.pair, lengths)
        return self._along[1]

    def _first_pair(self) -> Pair:
        """The pair of the first reading; else the highest voltage that little can hold up."""
        for taken in self.desk.case.content.readings:
            if (pair := Pair(taken.a, taken.b)) in self.pairs:
                return pair

        def weight(pair: Pair) -> float:
            port = self.run.port(pair.a, pair.b)
            return abs(port.voltage) if abs(port.impedance) > 1e3 and pair.b == "earth" else -1.0
        return max(self.pairs, key=weight)
