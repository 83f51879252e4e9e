from __future__ import annotations

from collections.abc import Callable

from unlanded.report.investigation import Investigation
from unlanded.report.memo import Paragraph
from unlanded.report.spread import main_row, spread_finding, spread_part, spread_results
from unlanded.report.tables import Table


def words(blocks: object) -> str:
    assert isinstance(blocks, list | tuple)
    return " ".join(b.text for b in blocks if isinstance(b, Paragraph))


def test_the_input_to_pin_down_is_named_everywhere(moor: Investigation) -> None:
    first = spread_results(moor)["sensitivity"][0]["input"]
    assert first == "permittivity of the covers"
    part = spread_part(moor)
    assert part is not None
    assert f"is the {first}" in words(spread_finding(moor))
    assert f"Pin down the {first} first" in words(part.blocks)


def test_what_lies_at_random_is_not_to_be_pinned_down(house: Investigation) -> None:
    part = spread_part(house)
    assert part is not None
    said = words(spread_finding(house)) + words(part.blocks)
    assert "How the singles lie decides what the digital meter (10 MΩ) shows: nearly all" in said
    assert "count on the whole range" in said
    assert "pin down" not in said.lower()


def test_inputs_stand_with_their_limits(moor: Investigation) -> None:
    part = spread_part(moor)
    assert part is not None
    table = next(b for b in part.blocks if isinstance(b, Table))
    rows = {row[0]: row[1:] for row in table.rows}
    assert rows["length of the run"] == ("380 m", "420 m")
    assert rows["supply voltage"] == ("218 V", "244 V")
    assert rows["impedance of input card"] == ("−10 %", "+10 %")


def test_what_a_floating_screen_has_to_earth_is_in_farads_a_metre(
    screened: Callable[[str], Investigation]
) -> None:
    part = spread_part(screened("none"))
    assert part is not None
    table = next(b for b in part.blocks if isinstance(b, Table))
    rows = {row[0]: row[1:] for row in table.rows}
    low, high = rows["capacitance of the screen to earth"]
    assert low.startswith("10")
    assert low.endswith(" pF/m")
    assert high == "200 pF/m"


def test_singles_at_random_have_no_limits_to_print(house: Investigation) -> None:
    part = spread_part(house)
    assert part is not None
    table = next(b for b in part.blocks if isinstance(b, Table))
    assert ("how the singles lie", "at random", "") in table.rows


def test_the_sheets_bands_are_the_intervals(moor: Investigation) -> None:
    row = main_row(moor)
    assert row is not None
    k = moor.sheet.rows.index(row)
    spread = moor.spread.spread
    assert row.low.text == row.instrument.show(float(spread.low[k])).text
    assert row.high.text == row.instrument.show(float(spread.high[k])).text
    assert spread.low[k] < abs(row.voltage) < spread.high[k]
    assert spread.coverage == 0.95
