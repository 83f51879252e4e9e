"""What an end may be connected to, and how a mistake in it is told."""

from __future__ import annotations

import pytest

from unlanded.physics.burden import Burden
from unlanded.study.ends import Bonded, Driven, Joined, Open, Through, mistakes, word

NAMES, LINES = ("brown", "blue"), ("L1", "L2")


def told(name, termination):
    return [str(m) for m in mistakes("near", {name: termination}, NAMES, LINES)]


@pytest.mark.parametrize("termination", [
    Driven("L2"), Bonded("earth"), Bonded("N"), Open(), Joined("blue"),
    *(Through(Burden(50.0), to) for to in ("blue", "earth", "N", "L1")),
])
def test_what_is_allowed(termination):
    assert told("brown", termination) == []


@pytest.mark.parametrize(("termination", "given", "hint"), [
    (Driven("L3"), "L3", "known: L1, L2"),
    (Driven("N"), "N", "known: L1, L2"),
    (Bonded("eart"), "eart", 'did you mean "earth"?'),
    (Bonded("blue"), "blue", "known: earth, N"),
    (Joined("brown"), "brown", "known: blue"),
    (Joined("earth"), "earth", "known: blue"),
    (Through(Burden(50.0), "brown"), "brown", "known: blue, earth, N, L1, L2"),
    (Through(Burden(50.0), "PE"), "PE", "known: blue, earth, N, L1, L2"),
])
def test_what_is_not(termination, given, hint):
    [sentence] = told("brown", termination)
    assert sentence.startswith(f'near end of "brown": cannot be connected there; given {given}')
    assert hint in sentence


def test_unknown_conductor_is_told_with_the_nearest_known():
    [sentence] = told("bleu", Open())
    assert sentence == 'near end of "bleu": is not a conductor. (did you mean "blue"?)'


def test_conductor_named_as_a_line_may_be_on_it():
    assert list(mistakes("near", {"L1": Driven("L1"), "N": Bonded("N")}, ("L1", "N"), LINES)) == []


def test_word_is_what_the_engineer_wrote():
    assert [word(t) for t in (Driven("L1"), Bonded("N"), Joined("blue"),
                              Through(Burden(50.0), "earth"))] == ["L1", "N", "blue", "earth"]
