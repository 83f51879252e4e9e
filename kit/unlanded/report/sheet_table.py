"""The whole reading sheet as one table, a row for each reading, for a spreadsheet."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

from .tables import Column, Table

if TYPE_CHECKING:
    from ..study.readings import ReadingSheet, SheetRow

_COLUMNS = (
    Column("From"), Column("To"), Column("Instrument"), Column("Reading"), Column("Lowest"),
    Column("Highest"), Column("Unloaded", "V", "right"), Column("Across it", "V", "right"),
    Column("Loading error", "%", "right"), Column("Through it", "mA", "right"),
    Column("Added to residual", "mA", "right"), Column("Source impedance", "Ω", "right"),
    Column("Source capacitance", "pF", "right"), Column("Remark"),
)


def sheet_table(sheet: ReadingSheet) -> Table:
    """Every row of the sheet; numbers to five digits, an empty cell where there is none."""
    return Table("sheet", "Reading sheet: every instrument on every pair.", _COLUMNS,
                 tuple(_cells(row) for row in sheet.rows))


def _cells(row: SheetRow) -> tuple[str, ...]:
    return (
        row.pair.a, row.pair.b, row.instrument.name,
        row.reading.text, row.low.text, row.high.text,
        _number(abs(row.unloaded)), _number(abs(row.voltage)), _number(100 * row.loading_error),
        _number(1e3 * abs(row.current)), _number(1e3 * abs(row.residual_added)),
        _number(abs(row.source_impedance)), _number(1e12 * row.source_capacitance), row.remark,
    )


def _number(value: float) -> str:
    return f"{value:.5g}" if math.isfinite(value) else ""
