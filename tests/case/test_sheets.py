"""Files of cells as spreadsheets write them."""

from __future__ import annotations

import pytest

from unlanded.case.sheets import LONGEST_CELL, read_sheet
from unlanded.errors import Refused


def read(folder, data):
    path = folder / "cells.csv"
    path.write_bytes(data if isinstance(data, bytes) else data.encode())
    return read_sheet(path)


@pytest.mark.parametrize("between", [",", ";", "\t"])
@pytest.mark.parametrize("mark", ["", "\ufeff"])
def test_separators_and_byte_order_marks(tmp_path, between, mark):
    found = read(tmp_path, f"{mark}a{between} b \r\n1{between}x y\r\n")
    assert list(found.columns) == ["a", "b"]
    assert found.iloc[0].tolist() == ["1", "x y"]


def test_all_cells_are_text_also_empty_ones(tmp_path):
    found = read(tmp_path, 'a,b\n007,\n"NA","1,5"\n')
    assert found.to_numpy().tolist() == [["007", ""], ["NA", "1,5"]]


def test_a_row_that_ends_early_has_empty_cells(tmp_path):
    assert read(tmp_path, "a,b,c\n1\n1,2,3\n").to_numpy().tolist() == [["1", "", ""],
                                                                    ["1", "2", "3"]]


def test_a_cell_at_the_limit_and_just_past_it(tmp_path):
    assert len(read(tmp_path, f"a,b\n1,{'x' * LONGEST_CELL}\n")) == 1
    with pytest.raises(Refused, match=r'cells.csv row 2, column "b": a cell may be 1000'):
        read(tmp_path, f"a,b\n1,{'x' * (LONGEST_CELL + 1)}\n")
    with pytest.raises(Refused, match="row 1: a heading may be 1000"):
        read(tmp_path, f"a,{'x' * (LONGEST_CELL + 1)}\n1,2\n")


@pytest.mark.parametrize(
    ("data", "message"),
    [("", "is empty"),
     ("a,b\n1,2\n1,2,3\n", r"cells\.csv row 3: has more cells than the 2 of the heading; given 3"),
     ("a,b\n1,2,3,4\n1,2\n", "row 2: has more cells"), ('a,b\n1,"2\n3,4\n', "not closed"),
     (b"a,b\n\xff\xfe,1\n", "is not UTF-8 text; given byte 0xFF"),
     (b"\x50\x4b\x03\x04\x00\x00", "is not a CSV of text")],
)
def test_refusals(tmp_path, data, message):
    with pytest.raises(Refused, match=message):
        read(tmp_path, data)


def test_a_missing_file_suggests_its_neighbour(tmp_path):
    (tmp_path / "register.csv").write_text("a\n1\n", encoding="utf-8")
    with pytest.raises(Refused, match=r'did you mean "register\.csv"'):
        read_sheet(tmp_path / "registre.csv")
