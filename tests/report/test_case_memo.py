from __future__ import annotations

import datetime
import hashlib
import json
from collections.abc import Callable

import pytest

from unlanded.report import case_memo
from unlanded.report.case_memo import case_contents
from unlanded.report.folder import Contents, results_text
from unlanded.report.investigation import Investigation
from unlanded.report.memo import Caution, Paragraph, Verbatim

DAY = datetime.date(2026, 3, 9)


@pytest.fixture
def brief(monkeypatch: pytest.MonkeyPatch) -> None:
    """Memos of the circuit alone, which are made at once."""
    monkeypatch.setattr(case_memo, "PARTS", (case_memo.circuit_part,))
    monkeypatch.setattr(case_memo, "RESULTS", {})


def test_the_order_of_the_parts(contents: Contents) -> None:
    headings = [p.heading for p in contents.memo.parts]
    assert headings[:4] == ["Summary", "The circuit", "Caution", "Expected readings"]
    assert headings[-3:] == ["Assumptions", "Sources", "The case"]
    assert len(set(headings)) == len(headings)


def test_the_summary_begins_with_what_the_case_asks(
    moor: Investigation, house: Investigation, quay: Investigation
) -> None:
    for site, begun in ((moor, "With its contacts"), (house, "To the current"),
                        (quay, "With no instrument")):
        said = [b.text for b in case_memo.summary_part(site).blocks if isinstance(b, Paragraph)]
        assert said[1].startswith(begun)


def test_a_part_that_is_not_asked_for_is_left_out(
    contents: Contents, quay: Investigation
) -> None:
    made = [make(quay) for make in case_memo.PARTS]
    assert None in made
    assert [p.heading for p in made if p is not None] == [p.heading for p in contents.memo.parts]


def test_the_case_and_its_fingerprint_can_be_computed_again(contents: Contents,
                                                            quay: Investigation) -> None:
    part = contents.memo.parts[-1]
    texts = [b.text for b in part.blocks if isinstance(b, Verbatim)]
    assert texts == [quay.case.text, "unlanded memo tern-quay.toml"]
    assert hashlib.sha256(texts[0].encode()).hexdigest() == contents.memo.fingerprint


def test_every_memo_has_the_caution(contents: Contents) -> None:
    boxes = [b for p in contents.memo.parts for b in p.blocks if isinstance(b, Caution)]
    assert any("never proves a conductor dead" in i for b in boxes for i in b.items)


@pytest.mark.usefixtures("brief")
def test_us_units_bring_letter_paper_and_american_dates(
    quay: Investigation, mill: Investigation
) -> None:
    metric, customary = (case_contents(s, date=DAY) for s in (quay, mill))
    assert (metric.paper, metric.memo.language) == ("a4", "en-GB")
    assert (customary.paper, customary.memo.language) == ("us-letter", "en-US")
    assert case_contents(mill, date=DAY, paper="a4").paper == "a4"


def test_results_are_json_with_every_reading(contents: Contents, quay: Investigation) -> None:
    results = json.loads(results_text(contents.results))
    assert results["case"]["fingerprint"] == quay.case.fingerprint
    assert len(results["sheet"]) == len(quay.sheet.rows)
    assert set(results) <= set(case_memo.RESULTS)


def test_the_whole_sheet_goes_beside_the_memo(contents: Contents) -> None:
    assert "sheet" in [t.key for t in contents.more_tables]


@pytest.mark.usefixtures("brief")
def test_a_matrix_too_wide_for_a_page_goes_beside_the_memo(
    written: Callable[..., Investigation]
) -> None:
    cores = [f"c{i}" for i in range(6)]
    many = written(
        ('layout = "laid up"', 'layout = "in conduit"\nbore = "40 mm"\nwall = "plastic"'),
        ('cores = ["brown", "blue", "green-yellow", "black"]',
         f"cores = {json.dumps(['brown', 'blue', 'green-yellow', 'black', *cores])}"))
    made = case_contents(many, date=DAY)
    assert "capacitance" not in [t.key for t in made.memo.tables]
    assert "capacitance" in [t.key for t in made.more_tables]


@pytest.mark.usefixtures("brief")
def test_names_for_the_title_block(quay: Investigation) -> None:
    memo = case_contents(quay, date=DAY, prepared_by="A", checked_by="B").memo
    assert (memo.prepared_by, memo.checked_by, memo.case_file) == ("A", "B", "tern-quay.toml")
