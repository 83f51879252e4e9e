from __future__ import annotations

from collections.abc import Callable

import pytest

from unlanded.physics.burden import Burden
from unlanded.report.circuit import (
    capacitance_table,
    circuit_finding,
    circuit_part,
    circuit_sources,
    conductor_table,
    run_results,
    termination_words,
)
from unlanded.report.figure import Figure
from unlanded.report.investigation import Investigation
from unlanded.report.memo import Paragraph
from unlanded.report.tables import Table
from unlanded.study.ends import Bonded, Driven, Joined, Open, Termination, Through


@pytest.mark.parametrize(("end", "words"), [
    (Driven("L2"), "fed by L2"), (Bonded("earth"), "bonded to earth"), (Bonded("N"), "bonded to N"),
    (Joined("blue"), "joined to blue"), (Open(), "open"),
    (Through(Burden(100.0), "blue", "fan motor"), "fan motor to blue"),
])
def test_ends_in_words(end: Termination, words: str) -> None:
    assert termination_words(end) == words


def test_conductors_in_millimetres(quay: Investigation) -> None:
    table = conductor_table(quay)
    assert table.titles == ("Conductor", "Size", "Metal [mm]", "Cover [mm]", "Permittivity",
                            "Near end", "Far end")
    assert [c.replace("\xa0", " ") for c in table.rows[3]] == [
        "black", "2.5 mm², flexible", "2.02", "3.66", "4.8 (3.5 … 6.5)", "open", "open"]


def test_conductors_in_inches(mill: Investigation) -> None:
    table = conductor_table(mill)
    assert table.columns[2].title == "Metal [in]"
    black = mill.run.section.conductors[0]
    assert table.rows[0][1] == "14 AWG, flexible"
    assert float(table.rows[0][2]) == pytest.approx(2 * black.radius / 0.0254, rel=1e-2, abs=0)
    assert float(table.rows[0][3]) == pytest.approx(2 * black.outer / 0.0254, rel=5e-3, abs=0)


def test_capacitances_per_metre_and_per_foot(quay: Investigation, mill: Investigation) -> None:
    metric, feet = capacitance_table(quay), capacitance_table(mill)
    assert metric.columns[0].heading == "pF/m"
    assert feet.columns[0].heading == "pF/ft"
    assert float(metric.rows[0][1]) == pytest.approx(1e12 * quay.run.matrix[0, 0], rel=1e-3, abs=0)
    assert float(feet.rows[0][1]) == pytest.approx(1e12 * 0.3048 * mill.run.matrix[0, 0], rel=1e-3,
                                                   abs=0)
    assert float(feet.rows[0][2].replace("−", "-")) < 0


def test_the_summary_says_length_supply_and_what_is_open(
    quay: Investigation, mill: Investigation, written: Callable[..., Investigation]
) -> None:
    said = [b.text for site in (quay, mill) for b in circuit_finding(site)
            if isinstance(b, Paragraph)]
    assert said == [
        "The run is 85 m long, supplied at 230 V line to neutral, 50 Hz; black is open at both "
        "ends.",
        "The run is 25 ft long, supplied at 120 V line to neutral, 60 Hz; white and green are "
        "open at both ends."]
    bonded = circuit_finding(written(('green-yellow = "earth"',
                                      'green-yellow = "earth"\nblack = "earth"')))
    assert "no conductor is open at both ends" in str(bonded)


def test_the_part_has_the_notes_the_tables_and_the_section(quay: Investigation) -> None:
    part = circuit_part(quay)
    first = part.blocks[0]
    assert isinstance(first, Paragraph)
    assert first.text.startswith("The site is invented")
    assert [b.key for b in part.blocks if isinstance(b, Table)] == ["conductors", "capacitance"]


def test_results(quay: Investigation) -> None:
    found = run_results(quay)
    assert found["length_m"] == 85
    assert found["conductors"] == ("brown", "blue", "green-yellow", "black")
    assert found["standing_residual_A"] == quay.run.residual


@pytest.mark.parametrize(("earthed", "words", "ends"), [
    ("both", "earthed at both ends", ("bonded to earth", "bonded to earth")),
    ("near", "earthed at the near end alone", ("bonded to earth", "open")),
    ("far", "earthed at the far end alone", ("open", "bonded to earth")),
    ("none", "earthed at no end", ("open", "open"))])
def test_how_the_screen_is_earthed(
    screened: Callable[[str], Investigation], earthed: str, words: str, ends: tuple[str, str]
) -> None:
    found = screened(earthed)
    part = circuit_part(found)
    (summary,) = circuit_finding(found)
    assert isinstance(summary, Paragraph)
    assert summary.text.endswith(f"black is open at both ends; the screen is {words}.")
    assert any(isinstance(b, Paragraph) and f"in a screen that is {words}." in b.text
               for b in part.blocks)
    section = next(b for b in part.blocks if isinstance(b, Figure))
    assert f"mm inside, {words}, at " in section.caption
    assert conductor_table(found).rows[-1][0] == "screen"
    assert conductor_table(found).rows[-1][-2:] == ends
    assert [row[0] for row in capacitance_table(found).rows][-1] == "screen"
    assert run_results(found)["resistance_ohm_per_m"][-1] == 15e-3
    assert {what for what, _ in circuit_sources(found)} == {
        "resistance of the screen", *(["capacitance of the screen to earth"]
                                      if earthed == "none" else [])}


def test_without_a_screen_none_is_spoken_of(quay: Investigation) -> None:
    assert list(circuit_sources(quay)) == []
    assert "screen" not in str(circuit_finding(quay))
