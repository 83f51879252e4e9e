"""`unlanded causes` and `unlanded sheet --field` as a user meets them."""

from __future__ import annotations

from pathlib import Path

from command_line import run

QUAY = Path(__file__).resolve().parent.parent / "workbook" / "sites" / "tern-quay.toml"


def test_causes_prints_the_finding_the_odds_and_the_caution() -> None:
    result = run("causes", QUAY)
    assert result.exit_code == 0, result.output
    text = " ".join(result.output.split())
    assert "are what capacitive coupling on this run predicts" in text
    assert "What would tell most" in text
    assert "never proves a conductor dead" in text


def test_readings_from_the_field_sheet_are_explained(folder: Path) -> None:
    assert run("sheet", QUAY, "--field").exit_code == 0
    assert (folder / "tern-quay-field.pdf").read_bytes().startswith(b"%PDF")
    sheet = folder / "tern-quay-field.csv"
    lines = sheet.read_text(encoding="utf-8-sig").splitlines()
    assert lines[1].startswith("digital-10M,black@near,earth,,")
    lines[1] = lines[1].replace("earth,,", "earth,107.1 V,", 1)
    sheet.write_text("\n".join(lines), encoding="utf-8-sig")
    result = run("causes", QUAY, "--readings", sheet.name)
    assert result.exit_code == 0, result.output
    assert "107.1 V" in result.output


def test_a_field_sheet_is_never_written_over(folder: Path) -> None:
    (folder / "tern-quay-field.csv").write_text("mine", encoding="utf-8")
    again = run("sheet", QUAY, "--field")
    assert again.exit_code == 2
    assert "nothing is written over" in again.output
    assert [p.name for p in folder.iterdir()] == ["tern-quay-field.csv"]


def test_a_csv_that_is_not_there_is_one_sentence(folder: Path) -> None:
    result = run("causes", QUAY, "--readings", folder / "none.csv")
    assert result.exit_code == 2
    assert result.output.strip().count("\n") == 0
