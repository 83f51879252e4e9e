from __future__ import annotations

import pytest

from unlanded.report.investigation import Investigation
from unlanded.report.sheet_table import sheet_table


def test_a_row_for_each_reading_with_numbers_a_spreadsheet_reads(quay: Investigation) -> None:
    table = sheet_table(quay.sheet)
    assert len(table.rows) == len(quay.sheet.rows)
    titles = {title: i for i, title in enumerate(table.titles)}
    for cells, row in zip(table.rows, quay.sheet.rows, strict=True):
        assert cells[:3] == (row.pair.a, row.pair.b, row.instrument.name)
        assert cells[titles["Reading"]] == row.reading.text
        assert float(cells[titles["Through it [mA]"]]) == pytest.approx(
            1e3 * abs(row.current), rel=5e-5, abs=0)


def test_what_is_no_number_is_empty(quay: Investigation) -> None:
    table = sheet_table(quay.sheet)
    column = table.titles.index("Loading error [%]")
    zero = [cells[column] for cells, row in zip(table.rows, quay.sheet.rows, strict=True)
            if row.unloaded == 0]
    assert zero
    assert set(zero) == {""}
