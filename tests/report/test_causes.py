"""The memo's section on what the readings mean."""

from __future__ import annotations

import datetime
import re

import pytest

from unlanded.case.loading import read_case
from unlanded.report.causes import (
    causes_finding,
    causes_part,
    causes_results,
    causes_sources,
    causes_text,
    explanation_of,
    prospects_of,
)
from unlanded.report.folder import results_text
from unlanded.report.investigation import Investigation, investigate
from unlanded.report.memo import Caution, Memo, Paragraph, Part
from unlanded.report.tables import Table

FORBIDDEN = re.compile(r"\b(dead|safe|safely|harmless)\b")


def words(part: Part) -> str:
    texts: list[str] = []
    for block in part.blocks:
        if isinstance(block, Part):
            texts.append(words(block))
        elif isinstance(block, Paragraph):
            texts.append(block.text)
        elif isinstance(block, Table):
            texts += [block.caption, block.note, *(c for row in block.rows for c in row)]
    return " ".join(texts)


def test_the_section_says_what_how_sure_and_what_next(quay: Investigation) -> None:
    part = causes_part(quay)
    assert part is not None
    assert isinstance(part.blocks[0], Caution)
    text = words(part)
    assert "are what capacitive coupling on this run predicts" in text
    assert "cannot be excluded by these instruments" in text
    assert "Most would be told by the" in text
    assert not FORBIDDEN.search(text)


def test_every_suspect_has_pictures_of_its_own(
    quay: Investigation, mill: Investigation
) -> None:
    for site, count in ((quay, 4), (mill, 7)):
        part = causes_part(site)
        assert part is not None
        memo = Memo("t", "", "c.toml", "f", datetime.date(2026, 3, 9), (part,))
        assert len(memo.figures) == count
        assert not FORBIDDEN.search(words(part))


def test_a_case_without_readings_has_no_section_but_has_an_answer(quay: Investigation) -> None:
    text = quay.case.text
    bare = investigate(read_case(text[: text.index("[[readings]]")]))
    assert causes_part(bare) is None
    assert causes_finding(bare) == []
    assert causes_results(bare) is None
    assert list(causes_sources(bare)) == []
    said = causes_text(bare, 100)
    assert "No reading has been taken" in said
    assert re.search(r"Most would be told by the (digital|bench) meter", " ".join(said.split()))


def test_the_summary_has_the_finding_and_the_next_measurement(quay: Investigation) -> None:
    (paragraph,) = causes_finding(quay)
    assert isinstance(paragraph, Paragraph)
    assert paragraph.text.startswith("The readings on “black” are what capacitive coupling")
    assert "The next measurement that would tell most is" in paragraph.text
    assert re.search(r"it would tell little \(0\.\d\d bit\)", paragraph.text)


def test_results_are_complete_and_add_up(quay: Investigation) -> None:
    results = causes_results(quay)
    assert results is not None
    (black,) = results["suspects"]
    assert sum(black["shares"].values()) == pytest.approx(1.0, rel=1e-9, abs=0)
    assert 0 < results["odds_error"] <= 0.011
    assert "NaN" not in results_text(results)


def test_the_devices_margin_bars_heavy_instruments_while_a_connection_is_possible(
    quay: Investigation
) -> None:
    text = quay.case.text
    bare = investigate(read_case(text[: text.index("[[readings]]")]))
    barred = {p.candidate.instrument.key for p in prospects_of(bare) if not p.allowed}
    assert "low-impedance" in barred
    assert "digital-10M" not in barred
    # The two readings of the case have ruled a connection out.
    assert all(p.trip_chance < 0.01 for p in prospects_of(quay))


def test_text_keeps_to_the_terminals_width(mill: Investigation) -> None:
    assert max(map(len, causes_text(mill, 80).splitlines())) <= 80


def test_it_is_worked_out_once(quay: Investigation) -> None:
    assert explanation_of(quay) is explanation_of(quay)
