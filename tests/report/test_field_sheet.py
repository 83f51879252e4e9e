"""The sheet to take to site, and the CSV that comes back from it."""

from __future__ import annotations

import datetime
from pathlib import Path

import pytest

from unlanded.case.observed import with_readings
from unlanded.errors import Refused
from unlanded.report.field_sheet import field_csv, field_memo, steps
from unlanded.report.investigation import Investigation, investigate
from unlanded.report.memo_pdf import pdf_bytes
from unlanded.report.tables import write_csv

DAY = datetime.date(2026, 3, 9)


def test_at_each_end_what_hardly_loads_comes_first_and_what_may_trip_last(
    quay: Investigation
) -> None:
    taken = steps(quay)
    for end in ("near", "far"):
        own = [s for s in taken if s.row.pair.a.endswith(end)]
        assert own[0].row.instrument.key == "digital-10M"
        risky = [s.risky for s in own]
        assert risky == sorted(risky)
        assert any(risky)
    assert {s.row.instrument.key for s in taken if s.risky} == {"low-impedance", "coil-tester"}


def test_the_sheet_begins_and_ends_with_proving_the_instrument(quay: Investigation) -> None:
    (table,) = field_memo(quay, date=DAY).tables
    assert table.rows[0][1].startswith("Prove the instrument")
    assert table.rows[-1][1].endswith("again")
    assert all(row[-1] for row in table.rows)
    assert any("(" in row[3] for row in table.rows)  # expected readings have their bands


@pytest.mark.parametrize("name", ["quay", "mill"])
def test_it_is_a_pdf_of_a_few_pages(name: str, request: pytest.FixtureRequest) -> None:
    from io import BytesIO

    from pypdf import PdfReader

    memo = field_memo(request.getfixturevalue(name), date=DAY)
    pages = PdfReader(BytesIO(pdf_bytes(memo, {}))).pages
    assert 1 <= len(pages) <= 3
    text = pages[0].extract_text()
    assert "prove" in text
    assert "Expected" in text


def test_the_csv_comes_back_as_readings(quay: Investigation, tmp_path: Path) -> None:
    path = tmp_path / "field.csv"
    write_csv(field_csv(quay), path)
    assert len(with_readings(quay.case, path).content.readings) == len(
        quay.case.content.readings)  # nothing filled in yet
    lines = path.read_text(encoding="utf-8-sig").splitlines()
    lines[1] = lines[1].replace("earth,,", "earth,107.2 V,", 1)
    path.write_text("\n".join(lines), encoding="utf-8-sig")
    readings = with_readings(quay.case, path).content.readings
    assert readings[-1].shows == "107.2 V"


def test_a_run_that_is_fed_throughout_has_no_sheet(quay: Investigation) -> None:
    from unlanded.case.loading import read_case

    text = quay.case.text.replace('green-yellow = "earth"', 'green-yellow = "earth"\nblack = "N"',
                                  1)
    fed = investigate(read_case(text[: text.index("[[readings]]")]))
    with pytest.raises(Refused, match="a conductor that nothing feeds"):
        steps(fed)
