"""From a case's values to the run, and what its ends cannot be."""

from __future__ import annotations

import pytest

from case_text import PAIR, changed, refusals, site
from unlanded.case.loading import read_case
from unlanded.case.runs import run_of
from unlanded.study.ends import Bonded, Driven, Joined, Open, Through

QUAY, HERON = site("tern-quay"), site("heron-house")


def test_every_termination_becomes_that_of_the_study() -> None:
    text = changed(QUAY, ('green-yellow = "open"', 'black = {joined = "blue"}'))
    run = run_of(read_case(text).content)
    assert run.near == {"brown": Driven("L"), "blue": Bonded("N"),
                        "green-yellow": Bonded("earth"), "black": Open()}
    motor = run.far["brown"]
    assert isinstance(motor, Through)
    assert (motor.to, motor.label) == ("blue", "fan motor")
    assert run.far["black"] == Joined("blue")
    assert run.far["green-yellow"] == Open()


def test_the_supply_is_taken_over_whole() -> None:
    supply = run_of(read_case(HERON).content).supply
    assert (supply.voltage, supply.frequency, supply.phases) == (230.0, 50.0, 3)
    assert supply.resistance == pytest.approx(0.2, rel=1e-12, abs=0)
    assert supply.inductance == pytest.approx(0.3e-3, rel=1e-12, abs=0)
    assert supply.harmonics == {3: 0.015, 5: 0.04, 7: 0.02}


def test_a_load_with_both_terminals_on_one_point_is_refused() -> None:
    load = '{load = {resistance = "1 ohm"}, to = "black"}'
    (said,) = refusals(changed(QUAY, ('green-yellow = "open"',
                                      f'black = {{joined = "blue"}}\nblue = {load}')))
    assert "run.ends.far.blue" in said
    assert "has a load with both its terminals on one point; given black." in said


def test_a_run_that_nothing_holds_is_refused() -> None:
    (said,) = refusals(changed(PAIR, ('a = "L"', 'a = "open"')))
    assert said == (
        "c.toml line 5, run: floats: no conductor is connected to the supply or earth, and there "
        "is no earthed surround. (name an end, or describe [run.surround])"
    )


@pytest.mark.parametrize("held", [
    'a = "earth"', 'a = "N"', 'a = {load = {resistance = "1 kohm"}, to = "earth"}',
    'a = "open"\n[run.surround]\nkind = "plane"\ngap = "0.5 m"',
])  # fmt: skip
def test_a_run_that_something_holds_is_taken(held: str) -> None:
    assert refusals(changed(PAIR, ('a = "L"\nb = "open"', held))) == []
