"""Mistakes in the reader's words: places, near names, and texts garbled in every way."""

from __future__ import annotations

import math
import random
import re

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from case_text import NAMES, changed, refusals, site
from unlanded.case.build import build_run, case_instruments
from unlanded.case.loading import read_case
from unlanded.case.validation import Index, printable
from unlanded.errors import Refused

QUAY = site("tern-quay")


@pytest.mark.parametrize(("change", "says"), [
    (("length =", "lenght ="),
     'run.lenght: is not a key that belongs here. (did you mean "length"?)'),
    (("[device]", "[divice]"), 'divice: is not a key that belongs here. (did you mean "device"?)'),
    (('voltage =', 'volts ='), 'supply.voltage: is missing. (for example voltage = "230 V")'),
    (('frequency = "50 Hz"', 'frequency = "50 Hz"\nunits = "metric"'),
     'supply.units: is not a key that belongs here. ("units" belongs to the whole file: write it '
     "above the first [table])"),
    (("[run]", "[[run]]"), "run: must be a table; given a list. (written [run] or run = {…})"),
    (("[supply]", 'supply = "x"\n[other]'), "supply: must be a table; given x."),
    (("from =", "form ="), "readings[1].from: is missing. (for example from = \"black@far\")"),
    (("title =", "titel ="), 'title: is missing. (for example title = "Evaporator fan circuit")'),
])  # fmt: skip
def test_keys_that_are_missing_or_unknown(change: tuple[str, str], says: str) -> None:
    assert any(says in s for s in refusals(changed(QUAY, change)))


def test_a_list_where_tables_belong_and_the_other_way_round() -> None:
    said = refusals("title = []\nsupply = []\nrun = 5\nreadings = [[], 1]\nsheet = [1]\n"
                    "device = 1979-05-27\nown_instruments = {}\n"
                    "standing = [{name = 'x', equipment = {}}]")
    assert [s.split(", ", 1)[1] for s in said] == [
        "title: must be text in quotes; given a list.",
        "supply: must be a table; given a list. (written [supply] or supply = {…})",
        "run: must be a table; given 5. (written [run] or run = {…})",
        "readings[1]: must be a table; given a list.",
        "readings[2]: must be a table; given 1.",
        "sheet: must be a table; given a list. (written [sheet] or sheet = {…})",
        "device: must be a table; given 1979-05-27. (written [device] or device = {…})",
        "own_instruments: must be a list; given a table.",
        "standing[1].equipment: must be text in quotes; given a table.",
    ]


def test_a_place_is_told_at_the_nearest_line_that_is_there() -> None:
    index = Index("f.toml", {("run",): 3, ("run", "length"): 5})
    assert index.at(("run", "length")) == "f.toml line 5, run.length"
    assert index.at(("run", "cable", "type")) == "f.toml line 3, run.cable.type"
    assert index.at(()) == "f.toml line 1"


def test_an_endless_key_is_cut_short() -> None:
    (said,) = refusals(f'{"k" * 5000} = 1\n{QUAY}')
    assert len(said) < 400
    assert "kkk…kkk" in said


def test_what_could_steer_a_terminal_is_marked() -> None:
    assert printable("a\x1b[31m\n\u202e\0é²Ω") == "a�[31m ��é²Ω"


@pytest.mark.parametrize("place", ["[supply]", "[run.ends.near]"])
def test_a_table_of_ten_thousand_keys_is_refused_key_by_key(place: str) -> None:
    keys = "\n".join(f'k{n} = "L"' for n in range(10_000))
    said = refusals(changed(QUAY, (place, f"{place}\n{keys}")))
    assert [f".k{n}: is not a" in s for n, s in enumerate(said)] == [True] * 10_000


def test_lists_have_a_largest_size() -> None:
    many = "[[readings]]\n" * 1001
    said = refusals(QUAY.partition("[[readings]]")[0] + many)
    assert [s.split(", ", 1)[1] for s in said] == [
        "readings: may have 1000 entries; given 1001 entries."]


# What a reader of the file should never have to see.
_JARGON = re.compile(
    r"pydantic|Input should|validation|Traceback|Assertion|NoneType|<class|\bdict\b|tuple|object at"
    r"|Value error|KeyError|\bstr\b|\bint\b|None|Errno|literal|discriminator|\[key\]|: [.;]|  "
)
_VALUES = (
    "nan", "-inf", "1e400", "-1", "0", "true", "[]", "{}", "[[]]", '""', '" "', r'"\u0000"', '"💥"',
    '"1e308 m"', '"1e-300 m"', "1979-05-27", "07:32:00", '"85"', '"1 m"', '"1 V"', '"3 %"', "0x10",
    "99999999999999999999", "{a = {b = 1}}", '"earth"', '"L"', '"N"', '"open"', '{joined = "blue"}',
    '"5 GW"', '"100 km"', '"1e5 Hz"', '"1 Hz"', '"0 m"', '"bare"', '"free"', '"singles"',
)
_LINES = (
    "[run]", "[[run]]", "[run.surround]", 'kind = "pipe"', 'kind = "plane"', 'gap = "0 mm"',
    'bore = "30 mm"', 'layout = "free"', "[supply.harmonics]", "3 = 0.1", "\0", "\x1b[31m", "é = 1",
    '"""', "'", "{", "}", "[", "]", "=", "a.b.c = 1", "\u2028", "\ufeff", "[[own_instruments]]",
    'key = "x"', 'name = "y"', "[[readings]]", "centred = true",
)


def garbled(text: str, lot: random.Random) -> str:
    """The text after one to four accidents."""
    lines = text.split("\n")
    for _ in range(lot.randint(1, 4)):
        at, other = lot.randrange(len(lines)), lot.randrange(len(lines))
        key, equals, value = lines[at].partition("=")
        match lot.randrange(7):
            case 0 if len(lines) > 1:
                del lines[at]
            case 1:
                lines.insert(at, lines[other])
            case 2:
                lines[at], lines[other] = lines[other], lines[at]
            case 3 if equals:
                lines[at] = f"{key}= {lot.choice(_VALUES)}"
            case 4:
                lines.insert(at, lot.choice(_LINES))
            case 5 if value:
                spot = lot.randrange(len(lines[at]))
                mark = lot.choice('x"=\0é9-.{[@\\💥 ')
                lines[at] = lines[at][:spot] + mark + lines[at][spot + 1:]
            case _:
                figure = lot.choice(["0", "-1", "1e9", "1e-9", "1e308", "3"])
                lines[at] = re.sub(r"\d+(\.\d+)?", figure, lines[at], count=1)
    return "\n".join(lines)


@settings(max_examples=300, deadline=None, derandomize=True, database=None)
@given(st.sampled_from(NAMES), st.integers(0, 2**32))
def test_no_garbled_case_is_a_traceback_or_a_riddle(name: str, seed: int) -> None:
    try:
        case = read_case(garbled(site(name), random.Random(seed)), "c.toml")
        run = build_run(case)
        assert case_instruments(case)
        assert all(math.isfinite(abs(run.voltage(point))) for point in run.points)
    except Refused as refusal:
        for said in map(str, refusal.mistakes):
            # Only the study can tell how long a run is electrically.
            assert said.startswith(("c.toml", "run: is too long electrically"))
            assert said.isprintable()
            assert said.endswith((".", ")"))
            assert not _JARGON.search(said.partition("; given")[0]), said


@settings(max_examples=200, deadline=None, derandomize=True, database=None)
@given(st.text(max_size=60) | st.text(alphabet='[]{}="\'.,#\n a1\\', max_size=60))
def test_no_text_at_all_is_a_traceback(text: str) -> None:
    assert refusals(text)
