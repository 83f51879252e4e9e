"""The command line as a user meets it: what it prints, writes, refuses, and its exit code."""

from __future__ import annotations

import json
from pathlib import Path

import pytest

from command_line import run

SITES = Path(__file__).resolve().parent.parent / "workbook" / "sites"
QUAY = SITES / "tern-quay.toml"


def test_check_accepts_every_demo_site() -> None:
    for site in SITES.glob("*.toml"):
        result = run("check", site)
        assert result.exit_code == 0, result.output
        assert "no mistake found" in result.output


def test_check_lists_all_mistakes_with_their_lines(folder: Path) -> None:
    text = QUAY.read_text(encoding="utf-8")
    text = text.replace('length = "85 m"', 'lenght = "85 m"').replace('"50 Hz"', '"50 m"')
    (folder / "bad.toml").write_text(text, encoding="utf-8")
    result = run("check", "bad.toml")
    assert result.exit_code == 2
    lines = result.output.strip().splitlines()
    assert len(lines) == 3  # the unknown key, the missing one, the wrong dimension
    assert all(line.startswith("bad.toml line ") for line in lines)
    assert 'did you mean "length"?' in result.output
    assert "must be in Hz" in result.output


@pytest.mark.parametrize("command", ["check", "sheet", "memo"])
def test_a_case_that_is_not_there_is_one_sentence(command: str, folder: Path) -> None:
    result = run(command, "no-such.toml")
    assert result.exit_code == 2
    assert result.output.strip() == "no-such.toml: there is no such file."
    assert list(folder.iterdir()) == []


def test_sheet_prints_every_end_and_the_caution() -> None:
    result = run("sheet", QUAY)
    assert result.exit_code == 0, result.output
    assert "near end" in result.output
    assert "far end" in result.output
    assert "never proves a conductor dead" in result.output


def test_sheet_as_csv_is_never_written_over(folder: Path) -> None:
    assert run("sheet", QUAY, "--csv", "sheet.csv").exit_code == 0
    first = (folder / "sheet.csv").read_bytes()
    assert first.startswith("\ufeffFrom,To,Instrument".encode())
    again = run("sheet", QUAY, "--csv", "sheet.csv")
    assert again.exit_code == 2
    assert "nothing is written over" in again.output
    assert (folder / "sheet.csv").read_bytes() == first


def test_memo_makes_the_whole_folder_and_says_where(folder: Path) -> None:
    result = run("memo", QUAY, "--date", "2026-03-09")
    assert result.exit_code == 0, result.output
    made = folder / "tern-quay-memo"
    assert str(made) in result.output
    names = {p.name for p in made.iterdir()}
    assert names == {"memo.docx", "memo.pdf", "figures", "tables", "results.json", "case.toml"}
    assert (made / "case.toml").read_bytes() == QUAY.read_bytes()
    results = json.loads((made / "results.json").read_text(encoding="utf-8"))
    assert results
    assert {p.suffix for p in (made / "figures").iterdir()} == {".svg", ".png"}
    assert [p.name for p in folder.iterdir()] == ["tern-quay-memo"]


def test_memo_is_not_written_over_unasked(folder: Path) -> None:
    (folder / "tern-quay-memo").mkdir()
    result = run("memo", QUAY)
    assert result.exit_code == 2
    assert "is there already" in result.output
    assert list((folder / "tern-quay-memo").iterdir()) == []


def test_margin_prints_the_section_and_the_caution() -> None:
    result = run("margin", SITES / "alder-mill.toml")
    assert result.exit_code == 0, result.output
    for words in ("Residual-current margin", "must not trip", "will (370 ms)", "never proves"):
        assert words in result.output


def test_margin_without_a_device_is_one_sentence(folder: Path) -> None:
    text = QUAY.read_text(encoding="utf-8")
    start = text.index("[device]")
    end = text.index("[[readings]]")
    (folder / "none.toml").write_text(text[:start] + text[end:], encoding="utf-8")
    result = run("margin", "none.toml")
    assert result.exit_code == 2
    assert result.output.strip().startswith("none.toml: has no residual-current device")


def test_screen_ranks_and_writes_its_folder(folder: Path) -> None:
    result = run("screen", SITES / "heron-house-register.csv", "--date", "2026-03-09")
    assert result.exit_code == 0, result.output
    assert "7 devices with 17 circuits" in result.output
    made = folder / "heron-house-register-screen"
    names = {p.name for p in made.iterdir()}
    assert names == {"memo.docx", "memo.pdf", "figures", "tables", "results.json", "register.csv"}
    ranking = (made / "tables" / "ranking.csv").read_text(encoding="utf-8-sig")
    assert len(ranking.strip().splitlines()) == 8
    again = run("screen", SITES / "heron-house-register.csv")
    assert again.exit_code == 2
    assert "is there already" in again.output


def test_screen_lists_the_mistakes_of_a_bad_register(folder: Path) -> None:
    (folder / "bad.csv").write_text(
        "device,circuit,rated [mA],line,length [m],cable\nA,,thirty,,,\nB,one,,L1,x,150 pF/m\n",
        encoding="utf-8")
    result = run("screen", "bad.csv")
    assert result.exit_code == 2
    lines = result.output.strip().splitlines()
    assert [line.partition(",")[0] for line in lines] == ["bad.csv row 2", "bad.csv row 3",
                                                          "bad.csv row 3"]
    assert [p.name for p in folder.iterdir()] == ["bad.csv"]
