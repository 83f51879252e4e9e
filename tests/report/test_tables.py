from __future__ import annotations

import csv
import io
from pathlib import Path

import pytest

from unlanded.errors import Refused
from unlanded.report.tables import Column, Table, csv_text, neutral, plain, shares, write_csv

TWO = Table("two", "Two.", (Column("Core"), Column("U", "V", "right")),
            (("spare", "103.4"), ("N", "0")), "A note.")


def test_a_row_needs_a_cell_for_each_column() -> None:
    with pytest.raises(Refused, match=r'table "t", row 2: needs 1 cells; given 2'):
        Table("t", "T.", (Column("A"),), (("1",), ("1", "2")))


@pytest.mark.parametrize(("cell", "safe"), [
    ("230.0", "230.0"), ("−3.2", "-3.2"), ("-3.2", "-3.2"), ("1e-12", "1e-12"), ("", ""),
    ("=1+1", "'=1+1"), ("+cmd", "'+cmd"), ("-cmd", "'-cmd"), ("@SUM(A1)", "'@SUM(A1)"),
    (" =1+1", "' =1+1"), ("\xa0=1+1", "' =1+1"), ("\t=1+1", "'\t=1+1"), ("＝1+1", "'＝1+1"),
    ("-1+1", "'-1+1"), ("a=1", "a=1"), ("\x00=1", "'=1"), ("0.9\n(0.3\xa0…\xa01.6)",
                                                          "0.9 (0.3 … 1.6)"),
])
def test_no_cell_is_run_by_a_spreadsheet(cell: str, safe: str) -> None:
    assert neutral(cell) == safe


def test_a_number_keeps_its_unit_on_its_line() -> None:
    table = Table("t", "T.", (Column("Core"), Column("Remark")),
                  (("spare", "falls on the meter of 3 kΩ"),))
    assert not any(line.rstrip().endswith(" 3") for line in plain(table, 30).splitlines())
    assert "3 kΩ" in plain(table, 30)


def test_csv_is_read_back_as_it_was(tmp_path: Path) -> None:
    odd = Table("odd", "Odd.", (Column("A, B"), Column("C", "Ω")),
                (('say "no"', "1,5"), ("two\nlines", "=2+2")))
    rows = list(csv.reader(io.StringIO(csv_text(odd))))
    assert rows == [["A, B", "C [Ω]"], ['say "no"', "1,5"], ["two lines", "'=2+2"]]
    write_csv(odd, tmp_path / "odd.csv")
    data = (tmp_path / "odd.csv").read_bytes()
    assert data.startswith(b"\xef\xbb\xbf")
    assert data.count(b"\r\n") == 3


def test_plain_text() -> None:
    assert plain(TWO) == "Two.\nCore   U [V]\n─────  ─────\nspare  103.4\nN          0\n\nA note."


@pytest.mark.parametrize("width", [16, 20, 30])
def test_no_line_of_plain_text_is_longer_than_asked(width: int) -> None:
    wide = Table("wide", "A caption of several words.",
                 tuple(Column(f"column {i}") for i in range(6)),
                 (tuple(f"some words {i}" for i in range(6)),))
    lines = plain(wide, width).splitlines()
    assert max(map(len, lines)) <= width
    assert sum(line.startswith("some") for line in lines) > 1  # the first column again


def test_terminal_escapes_do_not_reach_the_terminal() -> None:
    nasty = Table("n", "N.", (Column("A"),), (("\x1b[31mred",),))
    assert "\x1b" not in plain(nasty)


def test_shares_are_the_whole_page_and_leave_room_for_the_longest_word() -> None:
    table = Table("t", "T.", (Column("A"), Column("B")), (("x" * 10, "y"),))
    assert sum(shares(table)) == pytest.approx(1, rel=1e-12, abs=0)
    assert shares(table) == pytest.approx((12 / 15, 3 / 15), rel=1e-12, abs=0)
