"""A case worked out: what every part of its memo is made from."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

from ..case.build import build_run, case_instruments
from ..case.loading import Case
from ..case.uncertainty import uncertain_run
from ..reference.instruments import Instrument
from ..study.banded import SpreadSheet, spread_sheet
from ..study.readings import ReadingSheet, reading_sheet
from ..study.run import Run
from ..study.uncertain import UncertainRun
from .sheet_lines import SheetLine, sheet_lines


@dataclass(frozen=True, eq=False)
class Investigation:
    """A case, its run, and the reading sheet.

    Parameters
    ----------
    case : as it was read
    run : with the covers' permittivity as it is most likely
    low, high : the same run with the permittivity at the ends of its range
    sheet : every instrument on every pair, its bands over all that is not known
    instruments : of the sheet, in its order
    uncertain : the run with what is not known of it
    spread : what the bands were made from
    """

    case: Case
    run: Run
    low: Run
    high: Run
    sheet: ReadingSheet
    instruments: tuple[Instrument, ...]
    uncertain: UncertainRun
    spread: SpreadSheet

    @property
    def customary(self) -> bool:
        """Whether lengths are written in feet and inches."""
        return self.case.content.units == "US customary"

    @property
    def runs(self) -> tuple[Run, Run, Run]:
        """The run, and its low and high ends."""
        return self.run, self.low, self.high

    @cached_property
    def lines(self) -> tuple[SheetLine, ...]:
        """The sheet's lines, those first that an instrument pulls down."""
        return sheet_lines(self.sheet)


def investigate(case: Case) -> Investigation:
    """Solve the case's run, also at the ends of its inputs' ranges; raises `Refused`."""
    run, low, high = (build_run(case, limit) for limit in ("likely", "low", "high"))
    instruments = case_instruments(case)
    uncertain = uncertain_run(case, run)
    spread = spread_sheet(reading_sheet(run, instruments), uncertain,
                          coverage=case.content.spread.coverage)
    return Investigation(case, run, low, high, spread.sheet, instruments, uncertain, spread)
