from __future__ import annotations

import pytest

from unlanded.errors import listed
from unlanded.report.words import bound, cut, pair_words, point_words, printable
from unlanded.study.supply import NEUTRAL

NBSP = "\N{NO-BREAK SPACE}"


@pytest.mark.parametrize(("point", "words"), [
    ("black@near", "black, near end"),
    ("black@far", "black, far end"),
    ("earth", "earth"),
    (NEUTRAL, "N"),
    ("L2", "L2"),
])
def test_points(point: str, words: str) -> None:
    assert point_words(point) == words


@pytest.mark.parametrize(("a", "b", "words"), [
    ("black@near", "earth", "black to earth, near end"),
    ("black@far", "brown@far", "black to brown, far end"),
    ("black@near", "black@far", "black, near end to black, far end"),
    ("L1", "L2", "L1 to L2"),
    ("black@near", "N", "black to N, near end"),
])
def test_pairs(a: str, b: str, words: str) -> None:
    assert pair_words(a, b) == words


@pytest.mark.parametrize(("words", "last", "said"), [
    ([], "and", ""),
    (["a"], "or", "a"),
    (["a", "b"], "or", "a or b"),
    (["a", "b", "c"], "and", "a, b and c"),
])
def test_lists(words: list[str], last: str, said: str) -> None:
    assert listed(words, last) == said


@pytest.mark.parametrize(("text", "said"), [
    ("at 230 V to 3 kΩ", f"at 230{NBSP}V to 3{NBSP}kΩ"),
    ("30 pF/m and 9 pF/ft", f"30{NBSP}pF/m and 9{NBSP}pF/ft"),
    ("2.5 mm² or 14 AWG", f"2.5{NBSP}mm² or 14{NBSP}AWG"),
    ("2 %", f"2{NBSP}%"),
    ("∞ Ω", f"∞{NBSP}Ω"),
    ("3 Volts", "3 Volts"),
    ("core 3 Above", "core 3 Above"),
])
def test_numbers_stay_with_their_units(text: str, said: str) -> None:
    assert bound(text) == said


def test_cutting_marks_what_it_cut() -> None:
    assert cut("black", 5) == "black"
    assert cut("blacks", 5) == "blac…"


def test_control_and_format_characters_are_marked() -> None:
    assert printable("a\x1b[2J\u202eb\tc\nd\ue000") == "a�[2J�b\tc\nd�"
