"""The memo of a register."""

from __future__ import annotations

import csv
import datetime
import io
from dataclasses import replace
from pathlib import Path

import pytest

from unlanded.case.register import read_register
from unlanded.case.screening import Screening, screen_register
from unlanded.report.memo import Paragraph, Part
from unlanded.report.screen_memo import (
    ranking_table,
    regrouping_part,
    screen_contents,
    screen_figure,
    screen_results,
    screen_summary,
)
from unlanded.report.tables import csv_text
from unlanded.study.supply import Supply

SITES = Path(__file__).resolve().parents[2] / "workbook" / "sites"
MAINS = Supply(230.0, 50.0)
DAY = datetime.date(2026, 3, 9)


@pytest.fixture(scope="module")
def house() -> Screening:
    return screen_register(read_register(SITES / "heron-house-register.csv"), SITES, MAINS)


def test_ranking_is_by_chance_then_margin(house: Screening) -> None:
    order = house.screened.ranking
    chances = house.screened.chance[order]
    assert list(chances) == sorted(chances, reverse=True)
    table = ranking_table(house)
    assert len(table.rows) == 7
    assert [row[0] for row in ranking_table(house, 3).rows] == ["1", "2", "3"]
    assert float(table.rows[0][7]) == pytest.approx(
        1e3 * house.screened.worst[order[0]], rel=5e-3, abs=0)


def test_a_chance_is_told_no_finer_than_the_draws_allow(house: Screening) -> None:
    # 0.048 % and 0.042 % of 256 draws; the others never reach the band.
    assert [row[-1] for row in ranking_table(house).rows] == [
        "0.05 %", "0.04 %", *["none drawn"] * 5]
    assert "a chance of a trip of 0.05 %" in screen_summary(house)


def test_cells_that_begin_like_a_formula_are_neutral_in_the_export(house: Screening) -> None:
    # Such names are refused when a register is read; the export does not rely on that.
    devices = {f"=cmd({name})": device for name, device in house.register.devices.items()}
    named = replace(house, register=replace(house.register, devices=devices))
    rows = list(csv.reader(io.StringIO(csv_text(ranking_table(named)))))
    assert {row[1][:6] for row in rows[1:]} == {"'=cmd("}


def test_regrouping_says_what_to_move(house: Screening) -> None:
    part = regrouping_part(house)
    assert part is not None
    first = part.blocks[0]
    assert isinstance(first, Paragraph)
    assert "No grouping is better by more than 1 %" in first.text
    assert house.regrouping is not None
    assert f"with {len(house.regrouping.moves)} moves" in first.text


def test_contents_and_results(house: Screening) -> None:
    text = (SITES / "heron-house-register.csv").read_bytes()
    contents = screen_contents(house, text, date=DAY, command="unlanded screen x.csv")
    assert contents.case_name == "register.csv"
    assert [t.key for t in contents.memo.tables] == ["most-pressing", "moves"]
    assert [t.key for t in contents.more_tables] == ["ranking"]
    headings = [p.heading for p in contents.memo.parts]
    assert headings[:2] == ["The register", "Caution"]
    assert all(isinstance(p, Part) for p in contents.memo.parts)
    devices = screen_results(house)["devices"]
    assert isinstance(devices, list)
    assert len(devices) == 7


def test_summary_and_figure_count_alike(house: Screening) -> None:
    over = int((house.screened.worst > house.screened.non_operating).sum())
    assert f"{over} of them are above what must not trip them" in screen_summary(house)
    assert screen_figure(house).numbers == (f"above 100 %: {over} of 7 devices",)
