"""Where things stand in a file: lines of keys, against a scan of the lines themselves."""

from __future__ import annotations

import tomllib
from typing import Any

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from case_text import NAMES, SITES
from unlanded.case.places import Place, line_numbers, spell, unspell
from unlanded.errors import Refused


def every_place(plain: Any, place: Place = ()) -> list[Place]:
    """All keys and entries of plain values, found without the module under test."""
    inner = plain.items() if isinstance(plain, dict) else (
        enumerate(plain) if isinstance(plain, list) else ())
    found = [place] if place else []
    for key, value in inner:
        found += every_place(value, (*place, key))
    return found


@pytest.mark.parametrize("name", NAMES)
def test_every_key_of_a_demo_site_has_the_line_that_it_is_written_on(name: str) -> None:
    text = (SITES / f"{name}.toml").read_text(encoding="utf-8")
    lines = line_numbers(text)
    written = text.split("\n")
    places = every_place(tomllib.loads(text))
    assert set(places) <= set(lines)
    for place in places:
        last = place[-1] if isinstance(place[-1], str) else next(
            p for p in reversed(place) if isinstance(p, str))
        assert last in written[lines[place] - 1]


TRICKY = '''a = 1   # b = 2
"quoted = key" = """
c = 3
[d]
"""
e.f."g h" = 'x#y'
list = [ # remark ]
  "one", ["two"],
  { k = 1 },
]
[t]
date = 1979-05-27T07:32:00.5Z
"ü" = "a\\"b"
[[rows]]
x = 1
[[rows]]
x = 1.5e-3
[rows.inner]
y = \'\'\'
\'\'\'
z = 2
'''


def test_strings_remarks_and_lists_do_not_lead_astray() -> None:
    assert line_numbers(TRICKY) == {
        ("a",): 1, ("quoted = key",): 2, ("e",): 6, ("e", "f"): 6, ("e", "f", "g h"): 6,
        ("list",): 7, ("list", 0): 8, ("list", 1): 8, ("list", 1, 0): 8, ("list", 2): 9,
        ("list", 2, "k"): 9, ("t",): 11, ("t", "date"): 12, ("t", "ü"): 13, ("rows",): 14,
        ("rows", 0): 14, ("rows", 0, "x"): 15, ("rows", 1): 16, ("rows", 1, "x"): 17,
        ("rows", 1, "inner"): 18, ("rows", 1, "inner", "y"): 19, ("rows", 1, "inner", "z"): 21,
    }  # fmt: skip
    assert set(every_place(tomllib.loads(TRICKY))) == set(line_numbers(TRICKY))


@settings(max_examples=200, deadline=None, derandomize=True, database=None)
@given(st.lists(st.text(max_size=8), min_size=1, max_size=5), st.data())
def test_a_place_is_spelled_so_that_it_can_be_read_again(keys: list[str], data: st.DataObject
                                                        ) -> None:
    place: tuple[str | int, ...] = ()
    for key in keys:
        place += (key, *data.draw(st.lists(st.integers(0, 99), max_size=2)))
    assert unspell(spell(place)) == place


@pytest.mark.parametrize("path", ["", "a..b", ".a", "a b", "[1]", "a[0]", "a[x]", "a]", '"a', "a."])
def test_what_is_no_path_is_refused(path: str) -> None:
    with pytest.raises(Refused, match="path: "):
        unspell(path)
