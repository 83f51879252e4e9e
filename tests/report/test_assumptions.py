from __future__ import annotations

from collections.abc import Callable

import pytest

from unlanded.report.assumptions import assumptions_part
from unlanded.report.investigation import Investigation
from unlanded.report.memo import Bullets


def said(investigation: Investigation) -> str:
    lines = next(b for b in assumptions_part(investigation).blocks if isinstance(b, Bullets)).items
    assert len(set(lines)) == len(lines)
    assert all(line.endswith(".") for line in lines)
    return "\n".join(lines)


@pytest.mark.parametrize("words", [
    "steady sine of 230 V line to neutral at 50 Hz, taken as stated",
    "bonded to earth at the source",
    "relative permittivity 4.8 (3.5 to 6.5), cable makers' material tables",
    "common sheath is not modelled",
    "at 20 °C",
    "100 Ω·m",
    "A range holds 95 % of the draws of what is not known: permittivity of the covers and",
    "the impedance and the accuracy of each instrument",
    "No earthed metal lies near the run",
    "typical of their class",
    "Low-impedance meter, 3 kΩ: cold value",
])
def test_a_cord_in_air(quay: Investigation, words: str) -> None:
    assert words in said(quay)


def test_singles_in_a_conduit_are_one_arrangement_of_many(house: Investigation) -> None:
    assert "one arrangement of many, seed 4" in said(house)
    assert "earthed all along it" in said(house)
    assert "common sheath" not in said(house)


def test_a_filler_and_an_instrument_from_its_data_sheet(
    written: Callable[..., Investigation]
) -> None:
    text = said(written(
        ('instruments = ["digital-10M", "bench-1M", "low-impedance", "moving-coil", '
         '"coil-tester", "two-pole"]', "instruments = []"),
        ('layout = "laid up"', 'layout = "laid up"\nfiller_permittivity = 2.5'),
        ("[[readings]]\ninstrument = \"digital-10M\"",
         '[[own_instruments]]\nkey = "mine"\nname = "my meter"\nresistance = "1 Mohm"\n\n'
         "[[readings]]\ninstrument = \"mine\"")))
    assert "What lies between the covers has relative permittivity 2.5." in text
    assert "typical of their class" not in text


@pytest.mark.parametrize(("earthed", "words"), [
    ("none", "The outside of the screen has 50 pF/m to earth, which depends on what the cable"),
    ("near", "takes nothing off what is induced magnetically"),
    ("both", "The screen is earthed at both ends. It closes round the cores without gaps, and has "
             "15 Ω/km, a usual value")])
def test_what_is_taken_for_granted_of_a_screen(
    screened: Callable[[str], Investigation], earthed: str, words: str
) -> None:
    assert words in said(screened(earthed))
