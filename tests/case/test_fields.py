"""Values of a case file: units, limits at their edges, names."""

from __future__ import annotations

from typing import Any

import pytest

from case_text import PAIR, changed, refusals, site
from unlanded.case.fields import LONGEST_NAME, MOST_CORES, written
from unlanded.case.loading import read_case

QUAY = site("tern-quay")


def length(value: str) -> list[str]:
    return refusals(changed(QUAY, ('length = "85 m"', f"length = {value}")))


@pytest.mark.parametrize(("value", "metres"), [
    ('"85 m"', 85.0), ('"280 ft"', 85.344), ('"0.085 km"', 85.0), ('"10 mm"', 0.01),
    ('"100 km"', 1e5), ('"8,500 cm"', 85.0),
])  # fmt: skip
def test_a_quantity_comes_out_in_si(value: str, metres: float) -> None:
    case = read_case(changed(QUAY, ('length = "85 m"', f"length = {value}")))
    assert case.content.run.length == pytest.approx(metres, rel=1e-15, abs=0)


@pytest.mark.parametrize(("value", "says"), [
    ('"85"', 'needs a unit; given 85. (write for example "85 m")'),
    ("85", 'must be a number with its unit, in quotes; given 85. (for example "85 m")'),
    ('"85 V"', "must be in m or a unit that converts to it; given 85 V."),
    ('"-85 m"', "must be 10 mm to 100 km; given -85 m."),
    ('"9.9 mm"', "must be 10 mm to 100 km; given 9.9 mm."),
    ('"100.1 km"', "must be 10 mm to 100 km; given 100.1 km."),
    ('"1e400 m"', "must be a finite number; given 1e400 m."),
    ('"inf m"', "must begin with a number, then its unit; given inf m."),
    ('"nan m"', "must begin with a number, then its unit; given nan m."),
    ("nan", "must be a number with its unit, in quotes; given nan."),
    ("-inf", "must be a number with its unit, in quotes; given -inf."),
    ("true", "must be a number with its unit, in quotes; given true."),
    ("[]", "must be a number with its unit, in quotes; given a list."),
    ("{a = 1}", "must be a number with its unit, in quotes; given a table."),
    ("1979-05-27", "must be a number with its unit, in quotes; given 1979-05-27."),
    ('"8,5 m"', "has a comma that could be read two ways; given 8,5 m. (use a point for decimals "
                "(1.5); commas only group thousands (1,500))"),
    ('"1 m^99999999"', "must be in m or a unit that converts to it; given 1 m^99999999."),
])  # fmt: skip
def test_a_wrong_quantity_is_one_sentence(value: str, says: str) -> None:
    line = QUAY.split("\n").index('length = "85 m"') + 1
    assert length(value) == [f"c.toml line {line}, run.length: {says}"]


def test_a_control_character_does_not_reach_the_reader() -> None:
    (said,) = length(r'"1 \u001b[31mm"')
    assert said.isprintable()
    assert "given 1 �[31mm" in said


@pytest.mark.parametrize(("key", "value", "rule"), [
    ("permittivity", "0.99", "must be 1 to 100"),
    ("permittivity", "100.1", "must be 1 to 100"),
    ("permittivity", '"3 V"', "must be a pure number or a percentage"),
    ("permittivity", "true", "must be a number"),
    ("permittivity", "[3]", "must be a number"),
    ("permittivity", "inf", "must be a finite number"),
    ("permittivity", "9" * 400, "must be a finite number; given a huge number"),
    ("permittivity", "{low = 5, likely = 4.8}",
     "low, likely and high must be in rising order; given 5, 4.8, 4.8"),
])  # fmt: skip
def test_a_pure_number_has_limits(key: str, value: str, rule: str) -> None:
    (said,) = refusals(changed(QUAY, ('type = "H05VV"', f'type = "H05VV"\n{key} = {value}')))
    assert f"run.cable.{key}: {rule}" in said


@pytest.mark.parametrize("value", ["1", "100", "4", "{low = 4, likely = 4.8, high = 5.5}"])
def test_a_pure_number_at_its_limits_is_taken(value: str) -> None:
    assert refusals(changed(QUAY, ('type = "H05VV"', f'type = "H05VV"\npermittivity = {value}'))
                    ) == []


@pytest.mark.parametrize("value", ["0", "4", "true", "1.0", '"1"', "[]", "nan", "9" * 4000])
def test_phases_are_a_whole_number(value: str) -> None:
    (said,) = refusals(changed(QUAY, ("phases = 1 ", f"phases = {value} ")))
    assert "supply.phases: must be a whole number from 1 to 3, without quotes; given" in said


@pytest.mark.parametrize("name", [
    "1", "green-yellow", "Ader 7", "L 1", "芯", "x" * LONGEST_NAME, "µΩ",
])  # fmt: skip
def test_a_core_may_be_called(name: str) -> None:
    assert refusals(PAIR.replace('name = "a"', f'name = "{name}"').replace("a =", f'"{name}" =')
                    ) == []


@pytest.mark.parametrize("name", [
    '""', '" a"', '"a@b"', r'"a\"b"', r'"a\u0000"', r'"a\nb"', r'"\u202e"', "7", "true", "[]",
    f'"{"x" * (LONGEST_NAME + 1)}"',
])  # fmt: skip
def test_a_core_may_not_be_called(name: str) -> None:
    (said,) = refusals(PAIR.replace('name = "a"', f"name = {name}"))
    assert said.startswith("c.toml line 10, run.cable.conductors[1].name: must be text of 1 to 40 ")
    assert said.isprintable()


@pytest.mark.parametrize("word", ["earth", "N", "L", "L1", "L2", "L3", "open"])
def test_a_core_is_not_called_as_the_supply_is(word: str) -> None:
    said = refusals(PAIR.replace('name = "a"', f'name = "{word}"'))
    assert any("is a word of the supply and cannot name a core" in s for s in said)


def test_cores_are_a_list_of_different_names() -> None:
    cores = '["brown", "blue", "green-yellow", "black"]'
    for given, rule in [
        ('"brown"', "must be a list of names; given brown."), ("[]", "must be a list of names"),
        ('["a", "a"]', "a name may be used once; given a."),
        (f"{[f'c{k}' for k in range(MOST_CORES + 1)]}", "may have 61 names; given 62 names."),
    ]:
        said = refusals(changed(QUAY, (cores, given)))
        assert len(said) == 1, "what refers to the cores must not repeat the mistake"
        assert f"run.cable.cores: {rule}" in said[0]


def test_text_has_limits() -> None:
    title = next(line for line in QUAY.split("\n") if line.startswith("title"))
    for given, rule in [
        ("7", "must be text in quotes; given 7."), ('""', "must not be empty."),
        ('"  "', "must not be empty."), (r'"a\nb"', "must be on one line; given a b."),
        (f'"{"x" * 201}"', "may be 200 characters long; given 201 characters."),
        (r'"a\u0000"', "has a control character; given U+0000."),
    ]:
        (said,) = refusals(changed(QUAY, (title, f"title = {given}")))
        assert said.endswith(f"title: {rule}")
    assert refusals(changed(QUAY, (title, f'title = "{"x" * 200}"'))) == []


@pytest.mark.parametrize("shown", ['"109.40 V"', '"0 V"', '"OL"', '"41 mV"'])
def test_a_reading_keeps_its_digits(shown: str) -> None:
    case = read_case(changed(QUAY, ('"107.9 V"', shown)))
    assert case.content.readings[0].shows == shown.strip('"')


@pytest.mark.parametrize(("shown", "rule"), [
    ('"109.4"', "needs a unit; given 109.4."),
    ("109.4", "must be a number with its unit, in quotes; given 109.4."),
    ('"lots"', "must begin with a number, then its unit; given lots. (such as"),
    ('"-1 V"', "must be 0 V to 1 MV; given -1 V."),
    ('"3 mA"', "must be in V or a unit that converts to it; given 3 mA."),
    ('"lit"', 'must be a voltage or "OL" for kind digital; given lit.'),
])  # fmt: skip
def test_a_reading_is_a_voltage_or_what_its_instrument_shows(shown: str, rule: str) -> None:
    (said,) = refusals(changed(QUAY, ('"107.9 V"', shown)))
    assert f"readings[1].shows: {rule}" in said


@pytest.mark.parametrize(("value", "spelled"), [
    (True, "true"), ("", '""'), (" ", '" "'), ([], "a list"), ({}, "a table"), (1.5, "1.5"),
    (10**31, "a huge number"), ("a\0b", '"a\\u0000b"'),
])  # fmt: skip
def test_values_are_spelled_in_the_words_of_the_file(value: Any, spelled: str) -> None:
    assert written(value) == spelled


def test_a_number_of_thousands_of_digits_can_be_told() -> None:
    assert written(10**5000) == "a huge number"
