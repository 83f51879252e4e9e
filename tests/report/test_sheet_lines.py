from __future__ import annotations

import math

import pytest

from unlanded.reference.instruments import Shown, instrument
from unlanded.report.investigation import Investigation
from unlanded.report.sheet_lines import sheet_lines, shown_words


def volts(value: float, decimals: int = 1) -> Shown:
    return Shown(f"{value:.{decimals}f} V", value, 0.1)


def word(text: str) -> Shown:
    return Shown(text, math.nan, 1.0)


OVER = Shown("OL", math.inf, math.nan)


@pytest.mark.parametrize(("reading", "low", "high", "said"), [
    (volts(230.0), volts(227.4), volts(232.6), "230.0 (227.4 … 232.6)"),
    (volts(101.139, 3), volts(96.329, 3), volts(104.717, 3), "101.139 (96.3 … 104.7)"),
    (volts(107.5), volts(95.0), volts(120.0), "107.5 (95 … 120)"),
    (volts(0.0, 3), volts(0.0, 3), volts(0.003, 3), "0.000 (0.000 … 0.003)"),
    (volts(5.0), volts(5.0), volts(5.0), "5.0"),
    (word("lit"), word("lit"), word("lit"), "lit"),
    (word("lit"), word("not lit"), word("lit"), "lit (or not lit)"),
    (word("not lit"), word("not lit"), word("lit"), "not lit (or lit)"),
    (volts(590.0), volts(570.0), OVER, "590.0 V (570.0 V … OL)"),
    (OVER, OVER, OVER, "OL"),
])
def test_readings_in_words(reading: Shown, low: Shown, high: Shown, said: str) -> None:
    assert shown_words(reading, [low], [high]).replace("\xa0", " ") == said


def test_the_unit_where_it_is_asked() -> None:
    said = shown_words(volts(230.0), [volts(227.4)], [volts(232.6)], "V")
    assert said.replace("\xa0", " ") == "230.0 V (227.4 … 232.6 V)"


def test_tern_quay_in_a_few_lines(quay: Investigation) -> None:
    lines = {(line.name, line.end): line for line in quay.lines}
    assert set(lines) == {
        ("black to earth, blue or green-yellow", "both ends"),
        ("brown to black", "both ends"),
        ("brown to earth, blue or green-yellow", "both ends"),
        ("blue to earth", "near end"),
        ("blue to earth or green-yellow", "far end"),
        ("green-yellow to earth", "far end"),
    }
    assert [line.pulled for line in quay.lines] == [True] * 2 + [False] * 4


def test_no_pair_is_lost_and_every_reading_is_within_the_lines_band(
    sites: tuple[Investigation, ...]
) -> None:
    for site in sites:
        pairs = [p for line in site.lines for p in line.pairs]
        assert sorted(pairs, key=str) == sorted(site.sheet.pairs, key=str)
        for line in site.lines:
            for row in line.rows:
                first = line.on(row.instrument)[0]
                if math.isfinite(row.reading.value):
                    assert abs(row.reading.value - first.reading.value) <= max(
                        first.reading.half_width, row.reading.half_width,
                        0.02 * max(row.reading.value, first.reading.value))
            assert line.residual_added == max(abs(r.residual_added) for r in line.rows)


def test_unmerged_lines_are_the_pairs(moor: Investigation) -> None:
    lines = sheet_lines(moor.sheet, merged=False)
    assert all(len(line.pairs) == 1 for line in lines)
    assert len(lines) == len(moor.sheet.pairs) == 56
    assert len(moor.lines) <= 24


def test_short_circuit_is_the_thevenin_current(quay: Investigation) -> None:
    black = quay.lines[0]
    port = quay.run.port("black@near")
    assert black.short_circuit == pytest.approx(abs(port.voltage / port.impedance), rel=1e-9, abs=0)
    level = next(line for line in quay.lines if line.name == "blue to earth")
    assert math.isnan(level.short_circuit)


def test_an_instrument_that_cannot_be_used_there_shows_a_dash(mill: Investigation) -> None:
    across = next(line for line in mill.lines if line.name == "black to white")
    assert across.reading(instrument("proximity")) == "–"
