from __future__ import annotations

from collections.abc import Callable

import pytest

from unlanded.report.expected import (
    annex_part,
    expected_finding,
    expected_part,
    main_line,
    sheet_results,
    sheet_tables,
)
from unlanded.report.figure import Figure
from unlanded.report.investigation import Investigation
from unlanded.report.memo import Paragraph, Part
from unlanded.report.tables import Table
from unlanded.study.banded import voltage_band
from unlanded.study.readings import Pair
from unlanded.units import show


def text(blocks: object) -> str:
    assert isinstance(blocks, list | tuple)
    return " ".join(b.text for b in blocks if isinstance(b, Paragraph)).replace("\xa0", " ")


def tables(part: Part | None) -> list[Table]:
    assert part is not None
    return [b for b in part.blocks if isinstance(b, Table)]


def test_the_finding_is_what_the_run_says(quay: Investigation) -> None:
    said = text(expected_finding(quay))
    port = quay.run.port("black@near")
    assert f"carries {show(abs(port.voltage), 'V')} behind a capacitance of" in said
    assert f"can drive {show(abs(port.voltage / port.impedance), 'A')} through" in said
    reading = next(r for r in quay.sheet.rows if (r.pair.a, r.instrument.key) == (
        "black@near", "digital-10M")).reading.text
    assert f"the digital meter (10 MΩ) shows {reading} (" in said
    assert "what capacitive coupling looks like" in said
    assert f"sends {show(abs(quay.run.residual), 'A')} back by earth" in said


def test_no_conductor_is_called_free_of_danger(sites: tuple[Investigation, ...]) -> None:
    for site in sites:
        said = text([*expected_finding(site), *expected_part(site).blocks]).lower()
        assert not {"dead", "safe", "harmless"} & set(said.replace(".", " ").split())


def test_loads_that_nothing_feeds_are_named(moor: Investigation) -> None:
    said = text(expected_finding(moor))
    volts = abs(moor.run.voltage("2@near", "N"))
    low, high = voltage_band(moor.uncertain, Pair("2@near", "N"))
    assert low < volts < high
    assert (f"The interlock relay, from 2 to N, has {show(volts, 'V')} ({show(low, 'V')} "
            f"to {show(high, 'V')}) across it, although nothing feeds it.") in said
    unfed = next(b for b in expected_finding(moor) if isinstance(b, Table))
    assert [row[0].split()[0] for row in unfed.rows] == ["2", "3", "4", "5", "6"]


def test_a_load_that_is_fed_is_not(quay: Investigation) -> None:
    assert "fan motor" not in text(expected_finding(quay))


def test_where_nothing_is_pulled_down(written: Callable[..., Investigation]) -> None:
    bonded = written(('green-yellow = "earth"', 'green-yellow = "earth"\nblack = "earth"'))
    assert main_line(bonded) is None
    assert "No instrument changes the voltage on any pair" in text(expected_finding(bonded))
    assert not any(isinstance(b, Figure) for b in expected_part(bonded).blocks)


def test_the_memo_is_about_the_pair_that_was_read(
    quay: Investigation, moor: Investigation
) -> None:
    for site, name in ((quay, "black to earth"), (moor, "2 to earth")):
        line = main_line(site)
        assert line is not None
        assert line.name.startswith(name)


def test_a_short_sheet_stands_in_the_text(quay: Investigation) -> None:
    readings, behind = tables(expected_part(quay))
    assert annex_part(quay) is None
    assert len(readings.rows) == len(behind.rows) == len(quay.lines)
    assert readings.titles[1] == "digital meter, 10 MΩ [V]"
    assert readings.rows[0][0] == "black to earth, blue or green-yellow\nboth ends"


def test_a_long_sheet_has_an_annex(moor: Investigation) -> None:
    text_rows = {row[0] for row in tables(expected_part(moor))[0].rows}
    annex_rows = {row[0] for row in tables(annex_part(moor))[0].rows}
    assert len(text_rows) + len(annex_rows) == len(moor.lines)
    assert all("earth" in row for row in text_rows)
    assert f"{len(annex_rows)} more lines are in the annex" in text(expected_part(moor).blocks)


def test_the_whole_sheet_end_by_end(moor: Investigation) -> None:
    found = sheet_tables(moor.sheet)
    assert [t.key for t in found] == ["near-end-readings", "near-end-behind", "far-end-readings",
                                      "far-end-behind"]
    assert sum(len(t.rows) for t in found if "readings" in t.key) == len(moor.sheet.pairs)
    assert found[0].caption == "Expected readings, near end."


def test_more_instruments_than_a_page_holds_are_split(
    written: Callable[..., Investigation]
) -> None:
    eight = written(('"coil-tester", "two-pole"]',
                     '"coil-tester", "two-pole", "probe-10-1", "body"]'))
    readings = [t for t in tables(expected_part(eight)) if t.key.startswith("readings")]
    assert [t.key for t in readings] == ["readings-1", "readings-2"]
    assert [len(t.columns) for t in readings] == [5, 5]
    assert readings[1].caption == "Expected readings, 2 of 2."
    assert readings[1].columns[-1].title == "body model of IEC 60990"
    assert readings[1].rows[0][-1].split()[1] in ("µA", "mA")


def test_results_name_their_units(quay: Investigation) -> None:
    first = sheet_results(quay)[0]
    assert first["pair"] == ["brown@near", "earth"]
    assert abs(first["unloaded_V"]) == pytest.approx(230, rel=1e-9, abs=0)
    assert {k.rpartition("_")[2] for k in first if "_" in k} >= {"V", "A", "ohm", "F"}
