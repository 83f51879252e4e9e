"""What the memo says of the residual-current margin."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator

import pytest

from unlanded.report.figure import Figure
from unlanded.report.investigation import Investigation
from unlanded.report.margin import (
    CAUTION,
    limits_table,
    margin_finding,
    margin_of,
    margin_part,
    margin_results,
    margin_sources,
    shares_table,
    trips_of,
)
from unlanded.report.memo import Block, Bullets, Caution, Paragraph, Part
from unlanded.report.tables import Table


def walk(part: Part | None) -> Iterator[Block]:
    assert part is not None
    for block in part.blocks:
        yield block
        if isinstance(block, Part):
            yield from walk(block)


def words(part: Part | None) -> str:
    return " ".join(b.text for b in walk(part) if isinstance(b, Paragraph))


def test_every_site_has_the_section_with_its_caution_first(
    sites: tuple[Investigation, ...]
) -> None:
    for site in sites:
        part = margin_part(site)
        if site.case.content.device is None:
            assert part is None
            continue
        first = next(walk(part))
        assert isinstance(first, Caution)
        assert first.items == CAUTION


def test_no_device_no_section(written: Callable[..., Investigation]) -> None:
    text = '[device]\nrated = "30 mA"'
    none = written((text, "# "), ('kind = "general"', "#"), ('waveform = "A"', "#"))
    assert margin_part(none) is None
    assert margin_finding(none) == []
    assert margin_results(none) is None
    assert list(margin_sources(none)) == []


def test_heron_house_in_numbers(house: Investigation) -> None:
    said = words(margin_part(house))
    margin = margin_of(house)
    assert margin is not None
    assert "18.7 mA" in said  # as numbers, everything on
    assert margin.arithmetic == pytest.approx(18.7e-3, rel=0.05 / 18.7, abs=0)
    assert "9 mA" in said  # the recommended share
    assert "What else stands behind the device exceeds that already." in said
    assert "can be said not to" in said


def test_tables_agree_with_the_margin(house: Investigation) -> None:
    margin = margin_of(house)
    assert margin is not None
    rows = {row[0]: row for row in limits_table(margin).rows}
    expected, worst = margin.to(15e-3)
    assert [float(c.replace("−", "-")) for c in rows["must not trip"][1:]] == pytest.approx(
        [15, 1e3 * expected, 1e3 * worst], rel=5e-3, abs=0)
    total = sum(float(row[4]) for row in shares_table(margin).rows[:-1])
    assert total == pytest.approx(float(shares_table(margin).rows[-1][4]), rel=1e-2, abs=0)


def test_alder_mill_shows_what_practice_knows(mill: Investigation) -> None:
    tables = {b.key: b for b in walk(margin_part(mill)) if isinstance(b, Table)}
    trips = tables["trips"]
    heading = [c.heading for c in trips.columns]
    row = dict(zip(heading, next(r for r in trips.rows if r[0].startswith("black to")),
                   strict=True))
    low = next(h for h in heading if h.startswith("low-impedance"))
    assert row[low] == "will (370 ms)"
    assert row["coil tester"].startswith("will")
    said = words(margin_part(mill))
    assert "it will not trip the device" in said
    assert "black to N" in said  # line to neutral, among the pairs where nothing happens
    assert "recommended" not in said  # a rule for other devices than this


def test_a_run_in_feet_leaks_per_foot(mill: Investigation) -> None:
    said = " ".join(b.text for b in walk(margin_part(mill)) if isinstance(b, Paragraph))
    assert "This run leaks 387 nA per foot." in said  # 9.66 µA over 25 ft


def test_a_margin_below_nothing_is_said_to_be_exceeded(
    house: Investigation, mill: Investigation
) -> None:
    exceeded, kept = ([b.text for b in margin_finding(site) if isinstance(b, Paragraph)]
                      for site in (house, mill))
    assert "(below 0: exceeded)" in exceeded[0]
    assert "exceeded" not in kept[0]


def test_the_summary_names_what_trips(mill: Investigation) -> None:
    block, = margin_finding(mill)
    assert isinstance(block, Paragraph)
    assert "Measuring will trip it with" in block.text
    assert "coil tester" in block.text


def test_words_for_the_other_kinds(written: Callable[..., Investigation]) -> None:
    ramp = written(('rated = "30 mA"', 'rated = "30 mA"\nramp_test = "14 mA"'))
    assert "A ramp test tripped it at 14 mA" in words(margin_part(ramp))
    assert "have it replaced" in words(margin_part(ramp))
    delayed = written(('kind = "general"', 'kind = "delayed"'))
    assert "time-delayed (type S)" in words(margin_part(delayed))


def test_cures_fit_what_stands_there(written: Callable[..., Investigation]) -> None:
    damp = written(('[[readings]]\ninstrument = "digital-10M"',
                    '[[standing]]\nname = "damp wall"\nresistance = "18 kohm"\nline = "L"\n'
                    '[[standing]]\nname = "pump drive"\nhigh_frequency = "5 mA"\n'
                    '[[readings]]\ninstrument = "digital-10M"'))
    part = margin_part(damp)
    cures = " ".join(i for b in walk(part) if isinstance(b, Bullets) for i in b.items)
    assert "damp wall: a resistive leak" in cures
    assert "Drives: a filter of low leakage" in cures
    assert "no standard states" in words(part)


def test_results_hold_every_row(house: Investigation) -> None:
    results = margin_results(house)
    assert results is not None
    assert len(results["trips"]) == len(trips_of(house))
    assert {t["verdict"] for t in results["trips"]} <= {
        "will", "may", "will not", "not covered by the standard"}
    assert sum(c["towards_total_A"] for c in results["contributions"]) == pytest.approx(
        results["expected_A"], rel=0.02, abs=0)
    assert math.isfinite(results["chance"])


def test_sources_name_the_judgement(house: Investigation) -> None:
    said = [str(source) for _, source in margin_sources(house)]
    assert any("judgement" in s for s in said)
    assert any("BS 7671" in s for s in said)


def test_output_never_calls_a_conductor_safe(
    mill: Investigation, house: Investigation
) -> None:
    for site in (mill, house):
        for block in walk(margin_part(site)):
            if isinstance(block, Paragraph):
                text = block.text.lower()
            elif isinstance(block, Figure):
                text = f"{block.caption} {block.alternative}".lower()
            else:
                continue
            assert not any(f" {word}" in text for word in ("safe", "harmless", "dead"))
