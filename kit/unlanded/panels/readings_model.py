"""What will each instrument read here? Its numbers; the view is `readings`."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import traitlets

from ..case.build import build_run, case_instruments
from ..case.uncertainty import uncertain_run
from ..reference.instruments import Instrument
from ..report.figure import Figure
from ..report.pair import (
    IMPEDANCES,
    Real,
    lengths_for,
    pair_length,
    pair_loading,
    pair_table,
    your_meter,
)
from ..report.tables import Table
from ..report.words import pair_words
from ..study.banded import loading_band, spread_sheet
from ..study.readings import Pair, ReadingSheet, ports_along, reading_sheet, usual_pairs
from ..study.run import Port, Run
from ..study.uncertain import UncertainRun
from ..units import show, si
from .desk import Desk
from .quantity import Quantity, written
from .run_model import keeping

METER = Quantity("Meter impedance", "ohm", float(IMPEDANCES[0]), float(IMPEDANCES[-1]))
LENGTHS = 33  # points of a live curve


@dataclass(frozen=True, eq=False)
class Bands:
    """What is lowest and highest: of a sheet's readings, and of the voltage at `IMPEDANCES` [V]."""

    of: ReadingSheet
    sheet: ReadingSheet
    loading: tuple[Real, Real]


class ReadingModel(traitlets.HasTraits):
    """The readings on one pair of one case, with a meter of any resistance beside the case's own.

    What is shown is worked out at once; the bands over all that is not known take longer, and are
    worked out when they are asked for (`bands`).

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
        self._uncertain: UncertainRun | None = None
        self._about: object = None
        self._path: Path | None = None
        self._along: tuple[object, tuple[Port, ...]] = (None, ())
        self._bands: Bands | None = None
        super().__init__()
        self.read_case()

    @property
    def run(self) -> Run:
        """The run of the case as it is now."""
        return self.uncertain.run

    @property
    def uncertain(self) -> UncertainRun:
        """The same, with what is not known of it."""
        assert self._uncertain is not None
        return self._uncertain

    def read_case(self) -> None:
        """Take over the case that is on the desk; the pair stays while that is the same file."""
        content, old = self.desk.case.content, self._uncertain
        about = (content.run.cable, content.run.surround, content.spread)
        same = old if about == self._about else None
        run = keeping(build_run(self.desk.case), old.run if old else None)
        self._uncertain, self._about = uncertain_run(self.desk.case, run, same), about
        self.pairs = tuple(usual_pairs(run))
        if self.pair not in self.pairs or self.desk.path != self._path:
            self.pair = self._first_pair()
        self._path = self.desk.path
        self.renew()

    @traitlets.observe("pair", "resistance")
    def renew(self, _: object = None) -> None:
        """Work out the sheet of the pair again."""
        if self._uncertain is not None and self.pair in self.pairs:
            self.sheet = reading_sheet(self.run, self._tools, [self.pair])

    def bands(self) -> Bands:
        """Lowest and highest over all that is not known, of each reading and of the curve."""
        sheet, coverage = self.sheet, self.desk.case.content.spread.coverage
        if self._bands is None or self._bands.of is not sheet:
            pair, uncertain = self.pair, self.uncertain
            self._bands = Bands(
                sheet, spread_sheet(sheet, uncertain, coverage=coverage).sheet,
                loading_band(uncertain, pair, IMPEDANCES, coverage=coverage))
        return self._bands

    @property
    def known_bands(self) -> Bands | None:
        """The bands, where they have been worked out for the sheet as it is."""
        return self._bands if self._bands and self._bands.of is self.sheet else None

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
        known = self.known_bands
        return pair_loading(self.sheet, self.pair, known.loading if known else None)

    def length(self) -> Figure:
        """Reading against the length of the run, on your meter and some of the case's."""
        lengths = lengths_for(self.run, LENGTHS, customary=self.desk.customary)
        return pair_length(self.run, self.pair, self._tools, lengths,
                           ports=self._ports(lengths), customary=self.desk.customary)

    def table(self) -> Table:
        """The sheet of the pair, as the table under the figures shows it."""
        known = self.known_bands
        return pair_table(known.sheet if known else self.sheet, self.pair, banded=bool(known))

    def answer(self) -> str:
        """The pair in one sentence."""
        row = self.sheet.rows[0]
        return (f"{pair_words(self.pair.a, self.pair.b)}: {show(abs(row.unloaded), 'V')} unloaded "
                f"behind {show(abs(row.source_impedance), 'Ω')}; {row.remark}.")

    def text(self) -> str:
        """The same as lines of text, with the bands."""
        self.bands()
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
