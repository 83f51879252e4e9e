from __future__ import annotations

from collections.abc import Callable
from functools import cache

import pytest

from case_text import SITES
from unlanded.case.loading import read_case
from unlanded.report.circuit import circuit_part
from unlanded.report.figure import Figure
from unlanded.report.investigation import Investigation, investigate
from unlanded.report.memo import Caution, Paragraph
from unlanded.report.operation import (
    comparison_table,
    comparisons,
    operation_finding,
    operation_part,
    operation_results,
    operation_sources,
    operations,
    states_table,
)
from unlanded.report.tables import Table


def test_the_relay_of_larkmoor_stays_and_is_told(moor: Investigation) -> None:
    relay, card = operations(moor)
    assert relay.state == "may stay operated"
    assert relay.margin < 0 < card.margin
    (finding,) = operation_finding(moor)
    assert isinstance(finding, Paragraph)
    assert "the interlock relay may stay operated" in finding.text
    assert "A resistor of" in finding.text


def test_a_load_that_only_its_expected_level_lets_go_is_not_said_to(moor: Investigation) -> None:
    card = operations(moor)[1]
    assert card.level < card.watched.limits[0] < card.high
    (finding,) = operation_finding(moor)
    assert isinstance(finding, Paragraph)
    assert "the input card may stay on" in finding.text
    assert f"which {100 * (1 - card.chances[0]):.0f} % of the draws pass" in finding.text
    assert states_table((card,)).rows[0][4] == "may stay on"


def test_a_margin_far_over_is_told_as_a_multiple(moor: Investigation) -> None:
    relay, card = states_table(operations(moor)).rows
    # 81.5 V of 34.5 V, 42 V of 44 V.
    assert (relay[5], card[5]) == ("2.4 × it", "5 %")


def test_part_has_states_cures_pictures_and_a_caution(moor: Investigation) -> None:
    part = operation_part(moor)
    assert part is not None
    tables = {b.key: b for b in part.blocks if isinstance(b, Table)}
    assert list(tables) == ["operation", "cures-1", "cures-2"]
    assert [row[0].split("\n")[0] for row in tables["operation"].rows] == ["interlock relay",
                                                                          "input card"]
    assert [b.key for b in part.blocks if isinstance(b, Figure)] == [
        "operation-1", "operation-2"]
    assert isinstance(part.blocks[-1], Caution)
    watts = [row[3] for row in tables["cures-1"].rows]
    assert watts[0] == "0 W"
    assert any("bonded to earth" in row[0] for row in tables["cures-1"].rows)


def test_a_case_that_watches_nothing_has_no_part(quay: Investigation) -> None:
    assert operation_part(quay) is None
    assert operation_results(quay) is None
    assert operation_finding(quay) == []


def test_results_and_sources(moor: Investigation) -> None:
    results = operation_results(moor)
    assert results is not None
    assert results[0]["name"] == "interlock relay"
    assert results[0]["limits_V"] == (34.5, 195.5)
    sources = {str(s) for _, s in operation_sources(moor)}
    assert any("IEC 61810-1" in s and "from memory" in s for s in sources)
    assert any("IEC 61131-2" in s for s in sources)


LAMP = """[run.switching]
arrangement = "two-way"
travellers = ["brown", "black"]
neutral = "blue"
load = {name = "landing lamp"}
[run.ends.near]
green-yellow = "earth"
[[operation]]
name = "lamp on the landing"
kind = "LED lamp"
load = "landing lamp"
"""
RELAY = LAMP.replace('{name = "landing lamp"}', '{name = "landing lamp", resistance = "20 kohm"}'
                     ).replace('"LED lamp"', '"relay"\nrated_voltage = "230 V"')


@pytest.fixture(scope="module")
def landing() -> Callable[[str], Investigation]:
    """Tern Quay's cord with its load switched in an arrangement, and nothing read on it."""
    text = (SITES / "tern-quay.toml").read_text(encoding="utf-8")

    @cache
    def make(ends: str) -> Investigation:
        return investigate(read_case(text[:text.index("# What each core meets")] + ends))
    return make


def test_other_arrangements_are_held_against_each_other(
    landing: Callable[[str], Investigation]
) -> None:
    found = landing(LAMP)
    part = operation_part(found)
    assert part is not None
    table = next(b for b in part.blocks if isinstance(b, Table) and b.key == "arrangements-1")
    assert [row[0].split("\n")[0] for row in table.rows] == [
        "two-way, brown live (as it is)", "remote contact", "contact at supply", "switched live",
        "switched neutral", "two-way, black live"]
    assert table.rows[0][0].endswith("black to blue, far end")
    assert "Current" not in table.titles  # a lamp's level is one already
    assert {row[2] for row in table.rows} == {"may glow", "stays dark"}
    assert "many codes forbid it" in table.note
    (finding,) = operation_finding(found)
    assert isinstance(finding, Paragraph)
    assert finding.text.endswith("other arrangements of the same cable, contact at supply would.")
    results = operation_results(found)
    assert results is not None
    assert [a["as_built"] for a in results[0]["arrangements"]] == [True] + [False] * 5
    assert results[0]["arrangements"][0]["level_A"] == results[0]["level_A"]


def test_a_relay_has_a_voltage_and_a_current(landing: Callable[[str], Investigation]) -> None:
    found = landing(RELAY)
    (relay,) = operations(found)
    others = comparisons(found, relay)
    table = comparison_table(others, 1)
    assert table.titles[1:4] == ("Coupled in", "Current", "Load")
    assert others[0].found.current == pytest.approx(relay.level / 20e3, rel=1e-9, abs=0)
    assert others[0].found.level == pytest.approx(relay.level, rel=1e-9, abs=0)


def test_ends_drawn_by_hand_are_not_compared(moor: Investigation) -> None:
    assert all(comparisons(moor, one) == () for one in operations(moor))
    results = operation_results(moor)
    assert results is not None
    assert results[0]["arrangements"] == []


def test_the_circuit_says_how_the_load_is_switched(
    landing: Callable[[str], Investigation]
) -> None:
    text = next(b.text for b in circuit_part(landing(LAMP)).blocks
                if isinstance(b, Paragraph) and b.text.startswith("A run of"))
    assert text.endswith(
        "The landing lamp is switched in the arrangement two-way (travellers brown and black, "
        "neutral blue), drawn with its contacts open, and brown live.")


def test_a_load_that_stays_live_is_no_advice(landing: Callable[[str], Investigation]) -> None:
    # With no core earthed the switched one follows the live one: little is left for a coil between.
    found = landing(RELAY.replace("20 kohm", "300 kohm").replace(
        '[run.ends.near]\ngreen-yellow = "earth"\n', ""))
    others = {c.switched.word: c for c in comparisons(found, operations(found)[0])}
    assert others["two-way"].found.margin < 0 < others["switched neutral"].found.margin
    (finding,) = operation_finding(found)
    assert isinstance(finding, Paragraph)
    assert "switched neutral" not in finding.text
    assert "other arrangements of the same cable, contact at supply would." in finding.text
