"""Registers: what is read, and one clear line for each mistake."""

from __future__ import annotations

from pathlib import Path

import pytest

from unlanded.case.register import board, cable_capacitances, read_register
from unlanded.errors import Refused

SITES = Path(__file__).resolve().parents[2] / "workbook" / "sites"
HEADING = "device,circuit,rated [mA],line,length [m],cable,equipment,pieces,leakage [mA],use [%]"
GOOD = f"""{HEADING}
RCD 1,,30,L1,,,,,,
RCD 2,,300,,,,,,,
RCD 2,lifts,,L2,60,150 pF/m,,,,
RCD 1,desks,,L1,38.5,150 pF/m,computer,6,,70
RCD 1,heater,,L1,,,,,1.2,
"""


def read(folder, text, encoding="utf-8"):
    path = folder / "register.csv"
    path.write_bytes(text.encode(encoding))
    return read_register(path)


def refusal(folder, text):
    with pytest.raises(Refused) as caught:
        read(folder, text)
    return [str(m) for m in caught.value.mistakes]


def test_devices_and_circuits_in_the_devices_order(tmp_path):
    found = read(tmp_path, GOOD)
    assert list(found.devices) == ["RCD 1", "RCD 2"]
    assert found.devices["RCD 1"].rated == 30e-3
    assert found.circuits["circuit"].tolist() == ["desks", "heater", "lifts"]
    assert found.owner.tolist() == [0, 0, 1]
    assert found.circuits["length [m]"][0] == 38.5


def test_a_byte_order_mark_semicolons_tabs_and_decimal_commas_are_read(tmp_path):
    plain = read(tmp_path, GOOD)
    european = GOOD.replace(",", ";").replace("38.5", "38,5")
    for text, encoding in ((european, "utf-8-sig"), (GOOD.replace(",", "\t"), "utf-8"),
                           (GOOD.replace("\n", "\r\n"), "utf-8-sig")):
        found = read(tmp_path, text, encoding)
        assert list(found.devices) == list(plain.devices)
        assert found.circuits["length [m]"][0] == 38.5


@pytest.mark.parametrize(
    ("old", "new", "line"),
    [("RCD 1,desks", "RCDs 1,desks",
      '5, column "device": is not a device of this register (did you mean "RCD 1"?); '
      "given RCDs 1."),
     ("38.5", "far", '5, column "length [m]": is not a number; given far.'),
     ("38.5", "-3", '5, column "length [m]": must be 0 to 100000; given -3.'),
     ("38.5", "", '5, column "length [m]": is missing.'),
     (",6,", ",6.5,", '5, column "pieces": must be 0 to 10000 and whole; given 6.5.'),
     ("computer", "computr",
      '5, column "equipment": is not a known class of equipment; given computr.'),
     ("desks", "=1+1",
      '5, column "circuit": begins like a formula that a spreadsheet would run; given =1+1.'),
     ("desks", "@cmd",
      '5, column "circuit": begins like a formula that a spreadsheet would run; given @cmd.'),
     ("desks,,L1", "desks,,L9",
      '5, column "line": must be L, L1, L2, L3, balanced or empty; given L9.'),
     ("desks", "x" * 10_000,
      '5, column "circuit": a cell may be 1000 characters long; given 10000 characters.'),
     ("RCD 2,,300", "RCD 1,,300", '3, column "device": is there twice; given RCD 1.'),
     ("RCD 2,,300", "RCD 2,,", '3, column "rated [mA]": is missing.'),
     ("70", "=A1", '5, column "use [%]": is not a number; given =A1.')],
)  # fmt: skip
def test_each_mistake_is_one_line_with_row_and_column(tmp_path, old, new, line):
    found = refusal(tmp_path, GOOD.replace(old, new, 1))
    assert f"register.csv row {line}" in found
    assert len({f.partition(":")[0] for f in found}) == len(found)  # one line for each cell


@pytest.mark.parametrize("column", ["device", "circuit", "rated [mA]", "length [m]", "cable"])
def test_a_missing_column_is_named(tmp_path, column):
    lines = refusal(tmp_path, GOOD.replace(column, f"{column}x", 1))
    assert any(f'row 1, column "{column}": is missing' in line for line in lines)
    assert any(f'row 1, column "{column}x": is not a column of a register' in line
               for line in lines)


def test_every_mistake_is_told_at_once_and_many_are_counted(tmp_path):
    lines = refusal(tmp_path, GOOD.replace("38.5", "far").replace("RCD 2,lifts", "RCD 9,lifts"))
    assert [line.split(",")[0] for line in lines] == ["register.csv row 4", "register.csv row 5"]
    many = GOOD + "".join(f"RCD 9,c{k},,L1,10,150 pF/m,,,,\n" for k in range(100))
    lines = refusal(tmp_path, many)
    assert len(lines) == 21
    assert lines[-1] == "register.csv: has 80 mistakes more."


@pytest.mark.parametrize(
    ("text", "message"),
    [("", "is empty"), (HEADING, "no row is a device"),
     (GOOD.replace(",,70", ",,70,,,,"), "row 5: has more cells than the 10"),
     (HEADING.replace("circuit", "device"), "is there twice|is missing")],
)
def test_files_that_are_no_register(tmp_path, text, message):
    with pytest.raises(Refused, match=message):
        read(tmp_path, text)


def test_files_that_cannot_be_read(tmp_path):
    with pytest.raises(Refused, match="there is no such file"):
        read_register(tmp_path / "none.csv")
    with pytest.raises(Refused, match="is a folder"):
        read_register(tmp_path)
    with pytest.raises(Refused, match="is not UTF-8 text"):
        read(tmp_path, GOOD.replace("desks", "Bürö"), "latin-1")


def test_identical_cables_are_solved_once(tmp_path, monkeypatch):
    from unlanded.case import register as module

    solved = []
    monkeypatch.setattr(module, "build_run", lambda _, limit: solved.append(limit))
    monkeypatch.setattr(module, "capacitance_per_metre", lambda _: 1e-10)
    text = GOOD.replace("150 pF/m", "heron-house.toml") + "".join(
        f"RCD 1,c{k},,L1,{10 + k},heron-house.toml,,,,\n" for k in range(50))
    cable_capacitances(read(tmp_path, text), SITES)
    assert solved == ["likely", "low", "high"]


def test_cables_by_number_and_what_is_wrong_with_them(tmp_path):
    found = cable_capacitances(read(tmp_path, GOOD), tmp_path)
    assert found == {"150 pF/m": (1.5e-10,) * 3}
    with pytest.raises(Refused, match=r'register.csv, cable "150 pF"'):
        cable_capacitances(read(tmp_path, GOOD.replace("pF/m", "pF")), tmp_path)
    with pytest.raises(Refused, match="there is no such file"):
        cable_capacitances(read(tmp_path, GOOD.replace("150 pF/m", "x.toml")), tmp_path)


def test_a_board_for_regrouping(tmp_path):
    import numpy as np

    circuits, places = board(read(tmp_path, GOOD), np.array([1e-3, 2e-3, 3e-3]), "")
    assert [(c.name, c.line, c.current) for c in circuits] == [
        ("RCD 1: desks", "L1", 1e-3), ("RCD 1: heater", "L1", 2e-3), ("RCD 2: lifts", "L2", 3e-3)]
    assert places[0].lines == ("L1",)
    assert places[1].lines == ("L", "L1", "L2", "L3")
    # BS 7671:2018, 531.3.2(ii) (seen): 30 % of 30 mA is 9 mA.
    assert places[0].limit == pytest.approx(9e-3, rel=1e-12, abs=0)


def test_the_demo_register_is_read():
    found = read_register(SITES / "heron-house-register.csv")
    assert len(found.devices) == 7
    assert all("invented" in name for name in found.boards)
