"""A refusal: place, rule, what was given, hint."""

from __future__ import annotations

import pytest

from unlanded.errors import Mistake, Refused, nearest


@pytest.mark.parametrize(("mistake", "sentence"), [
    (Mistake("length", "must be above 0 m"), "length: must be above 0 m."),
    (Mistake("length", "must be above 0 m", "-3 m"), "length: must be above 0 m; given -3 m."),
    (Mistake("length", "must be above 0 m", "-3 m", "try 3 m"),
     "length: must be above 0 m; given -3 m. (try 3 m)"),
])
def test_sentence(mistake: Mistake, sentence: str) -> None:
    assert str(mistake) == sentence


def test_what_was_given_is_cut_and_kept_on_one_line() -> None:
    sentence = str(Mistake("name", "is too long", "x" * 10_000 + "\n" + "y"))
    assert len(sentence) < 100
    assert "\n" not in sentence
    assert "…" in sentence


def test_several_mistakes_keep_their_order_and_move_out_together() -> None:
    both = Refused.all_of([Mistake("a", "one"), Mistake("b", "two")]).at("case")
    assert [m.place for m in both.mistakes] == ["case, a", "case, b"]
    assert str(both) == "case, a: one.\ncase, b: two."


@pytest.mark.parametrize(("word", "known", "hint"), [
    ("lenght", ["length", "supply"], 'did you mean "length"?'),
    ("LENGTH", ["length"], 'did you mean "length"?'),
    ("zzz", ["length", "supply"], "known: length, supply"),
    ("zzz", [f"core {k}" for k in range(20)],
     "known: " + ", ".join(f"core {k}" for k in range(12)) + " and 8 more"),
])
def test_nearest(word: str, known: list[str], hint: str) -> None:
    assert nearest(word, known) == hint
