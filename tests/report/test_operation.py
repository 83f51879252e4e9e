from __future__ import annotations

from unlanded.report.figure import Figure
from unlanded.report.investigation import Investigation
from unlanded.report.memo import Caution, Paragraph
from unlanded.report.operation import (
    operation_finding,
    operation_part,
    operation_results,
    operation_sources,
    operations,
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
