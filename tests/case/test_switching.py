"""Switching arrangements as a case names them, against the same ends drawn by hand."""

from __future__ import annotations

from pathlib import Path

import pytest

from case_text import changed, refusals, site
from unlanded.case.loading import load_case, read_case
from unlanded.case.runs import run_of, switched_of
from unlanded.case.saving import save_case
from unlanded.physics.burden import Burden
from unlanded.study.ends import Driven
from unlanded.study.readings import Pair

QUAY = site("tern-quay")
_near = QUAY.index("[run.ends.near]")
_sheet = QUAY.index("[sheet]")
MOTOR = 'load = {name = "motor", resistance = "2 kohm"}'
TWO_WAY = f"""[run.switching]
arrangement = "two-way"
travellers = ["brown", "black"]
neutral = "blue"
{MOTOR}
"""
EARTHED = '[run.ends.near]\ngreen-yellow = "earth"\n'


def table(arrangement: str, **parts: str) -> str:
    """Of an arrangement whose parts are one core each."""
    rows = (f'{part} = "{core}"\n' for part, core in parts.items())
    return f'[run.switching]\narrangement = "{arrangement}"\n{"".join(rows)}{MOTOR}\n'


def switched(switching: str, ends: str = EARTHED, more: str = "") -> str:
    """Tern Quay's cord with its ends described so, without its readings."""
    rest = QUAY[_sheet:QUAY.index("[[readings]]")]
    return QUAY[:_near] + switching + ends + rest + more


DRAWN = {
    TWO_WAY: """[run.ends.near]
brown = "L"
blue = "N"
green-yellow = "earth"
[run.ends.far]
black = {load = {name = "motor", resistance = "2 kohm"}, to = "blue"}
""",
    table("remote contact", live="brown", switched="black"):
    """[run.ends.near]
brown = "L"
black = {load = {name = "motor", resistance = "2 kohm"}, to = "N"}
green-yellow = "earth"
""",
    table("contact at supply", live="brown", neutral="blue"):
    """[run.ends.near]
blue = "N"
green-yellow = "earth"
[run.ends.far]
brown = {load = {name = "motor", resistance = "2 kohm"}, to = "blue"}
""",
    table("switched live", live="brown", switched="black"):
    """[run.ends.near]
brown = "L"
green-yellow = "earth"
[run.ends.far]
black = {load = {name = "motor", resistance = "2 kohm"}, to = "N"}
""",
    table("switched neutral", live="brown", switched="black"):
    """[run.ends.near]
brown = "L"
green-yellow = "earth"
[run.ends.far]
brown = {load = {name = "motor", resistance = "2 kohm"}, to = "black"}
""",
}


@pytest.mark.parametrize("switching", DRAWN)
def test_an_arrangement_is_its_ends_drawn_by_hand(switching: str) -> None:
    named = run_of(read_case(switched(switching)).content)
    drawn = run_of(read_case(switched("", DRAWN[switching])).content)
    assert (named.near, named.far) == (drawn.near, drawn.far)


@pytest.mark.parametrize("switching", DRAWN)
def test_the_load_is_on_the_pair_that_it_closes(switching: str) -> None:
    content = read_case(switched(switching, more=RELAY)).content
    run = run_of(content)
    ((a, b, closing),) = run.closed
    pair = content.operation[0].watched().pair
    assert {run.node(pair.a), run.node(pair.b)} == {a, b}
    assert closing.label == "motor"
    built = switched_of(content.run, run.supply)
    assert built is not None
    assert (built.arrangement.load, built.name) == (pair, "motor")


def test_ends_may_be_left_out_or_tell_the_far_end_alone() -> None:
    assert refusals(switched(TWO_WAY, "")) == []
    assert refusals(switched(TWO_WAY, '[run.ends.far]\ngreen-yellow = "earth"\n')) == []


def test_the_line_is_the_first_unless_given() -> None:
    three = changed(switched(TWO_WAY), ("phases = 1", "phases = 3"))
    content = read_case(three).content
    assert run_of(content).near["brown"].phase == "L1"  # type: ignore[union-attr]
    other = read_case(changed(three, ('arrangement =', 'line = "L3"\narrangement ='))).content
    assert run_of(other).near["brown"].phase == "L3"  # type: ignore[union-attr]
    for switching in DRAWN:
        third = changed(switched(switching), ("phases = 1", "phases = 3"),
                        ("arrangement =", 'line = "L3"\narrangement ='))
        near = run_of(read_case(third).content).near.values()
        fed = {t.phase for t in near if isinstance(t, Driven)}
        assert fed == (set() if "at supply" in switching else {"L3"})
    (said,) = refusals(changed(three, ('arrangement =', 'line = "L4"\narrangement =')))
    assert "run.switching.line: is not a line of the supply of this case; given L4." in said


@pytest.mark.parametrize(("old", "new", "says"), [
    ('"two-way"', '"two way"', "run.switching.arrangement: must be remote contact, contact at"),
    ('"two-way"', '"switched live"', "run.switching.travellers: has no part in the arrangement"),
    ('travellers = ["brown", "black"]', "", "run.switching.travellers: is missing"),
    ('["brown", "black"]', '["brown"]', "run.switching.travellers: must be two cores"),
    ('["brown", "black"]', '["brown", "brown"]', "a core can have one part only; given brown"),
    ('["brown", "black"]', '["brown", "purple"]', "is not a core of this case; given purple"),
    ('neutral = "blue"', 'neutral = "brown"', "a core can have one part only; given brown"),
    ('neutral = "blue"', 'live = "blue"', "run.switching.live: has no part in the arrangement two"),
    (MOTOR, "", "run.switching.load: is missing. (for example load = {name"),
    (MOTOR, 'load = {name = "motor", power = "5 W"}', "run.switching.load.voltage: is missing"),
    ("green-yellow =", "blue =", "run.ends.near.blue: is given by [run.switching] already; given"),
    ("travellers =", "traveler =", "run.switching.traveler: is not a key that belongs here"),
])  # fmt: skip
def test_what_does_not_fit_is_refused_at_its_line(old: str, new: str, says: str) -> None:
    text = changed(switched(TWO_WAY), (old, new))
    said = refusals(text)
    assert any(says in s for s in said), said
    key = says.split(":")[0]
    if key.startswith("run.switching.") and old != MOTOR and new:
        line = next(k for k, row in enumerate(text.split("\n"), 1)
                    if row.startswith(f"{key.rpartition('.')[2]} ="))
        assert any(s.startswith(f"c.toml line {line}, ") for s in said)


@pytest.mark.parametrize("word", ["remote contact", "switched neutral"])
def test_a_neutral_has_a_part_only_where_the_cable_has_it(word: str) -> None:
    (said,) = refusals(switched(table(word, live="brown", switched="black", neutral="blue")))
    assert f"run.switching.neutral: has no part in the arrangement {word}. (it takes live" in said


def test_ends_are_asked_for_where_no_arrangement_gives_them() -> None:
    (said,) = refusals(switched("", ""))
    assert "run.ends: is missing. (for example ends = {near" in said
    assert "or describe [run.switching]" in said
    (said,) = refusals(switched("", '[run.ends.far]\nbrown = "L"\n'))
    assert "run.ends.near: is missing. (for example near = {brown" in said


RELAY = '[[operation]]\nname = "coil"\nkind = "relay"\nrated_voltage = "230 V"\nload = "motor"\n'


def test_an_operation_refers_to_a_load_by_name() -> None:
    content = read_case(switched(TWO_WAY, more=RELAY)).content
    assert content.operation[0].watched().pair == Pair("black@far", "blue@far")
    drawn = read_case(changed(QUAY, ("[device]", RELAY.replace("motor", "fan motor") + "[device]")))
    assert drawn.content.operation[0].watched().pair == Pair("brown@far", "blue@far")


@pytest.mark.parametrize(("old", "new", "says"), [
    ('load = "motor"', 'load = "moter"',
     'operation[1].load: is not a load of this run; given moter. (did you mean "motor"'),
    ('load = "motor"', 'load = "motor"\nfrom = "black@far"',
     "operation[1].from: is given twice: load says where it is."),
    ('load = "motor"\n', 'from = "black@far"\n', "operation[1].to: is missing. (for example to"),
    (MOTOR, 'load = {name = "motor"}', "operation[1].kind: has an impedance, and the load there"),
    (EARTHED, EARTHED + f'[run.ends.far]\ngreen-yellow = {{{MOTOR}, to = "N"}}\n',
     "operation[1].load: is the name of more than one load; given motor."),
])  # fmt: skip
def test_a_load_that_cannot_be_found_is_refused(old: str, new: str, says: str) -> None:
    (said,) = refusals(changed(switched(TWO_WAY, more=RELAY), (old, new)))
    assert says in said


def test_a_lamp_needs_its_name_alone() -> None:
    text = changed(switched(TWO_WAY, more=RELAY), (MOTOR, 'load = {name = "motor"}'),
                   ('kind = "relay"\nrated_voltage = "230 V"', 'kind = "LED lamp"'))
    content = read_case(text).content
    built = switched_of(content.run, run_of(content).supply)
    assert built is not None
    assert built.load == Burden()
    assert abs(run_of(content).port("black@far", "blue@far").voltage) > 50


def test_the_power_of_an_led_lamp_is_no_impedance() -> None:
    lamp = RELAY.replace('kind = "relay"\nrated_voltage = "230 V"', 'kind = "LED lamp"')
    watt = switched(TWO_WAY.replace('resistance = "2 kohm"', 'power = "5 W", voltage = "230 V"'))
    for where in ('load = "motor"', 'from = "black@far"\nto = "blue@far"'):
        (said,) = refusals(watt + lamp.replace('load = "motor"', where))
        assert "operation[1].kind: draws nothing until its chips conduct: its power is no" in said


def test_a_load_by_its_name_has_a_spread() -> None:
    assert refusals(switched(TWO_WAY, more='[spread]\nloads = {"motor" = "10 %"}\n')) == []


def test_saving_changes_the_arrangement_and_keeps_the_remarks(folder: Path) -> None:
    path = folder / "c.toml"
    path.write_text(switched(TWO_WAY.replace('"blue"', '"blue"  # of the lamp')), encoding="utf-8")
    saved = save_case(load_case(path), {
        "run.switching.travellers": ["black", "brown"], "run.switching.load.resistance": "3 kohm",
        "run.ends.near.green-yellow": None}, overwrite=True)
    text = path.read_text(encoding="utf-8")
    assert 'neutral = "blue"  # of the lamp' in text
    assert 'travellers = ["black", "brown"]' in text
    assert saved.content.run.switching is not None
    assert saved.content.run.switching.cores.live == "black"


def test_a_nameplate_is_an_impedance_at_the_supplys_frequency() -> None:
    # 5 VA at 230 V are 10.58 kΩ; of them 0.6 are resistance and 0.8 ωL, at 60 Hz 22.45 H.
    plate = 'apparent_power = "5 VA", power_factor = 0.6, voltage = "230 V"'
    text = changed(switched(TWO_WAY), ('resistance = "2 kohm"', plate), ("50 Hz", "60 Hz"))
    content = read_case(text).content
    built = switched_of(content.run, run_of(content).supply)
    assert built is not None
    assert built.load.resistance == pytest.approx(6348.0, rel=1e-6, abs=0)
    assert built.load.inductance == pytest.approx(22.45, rel=2.3e-4, abs=0)
