"""Switching arrangements against capacitor networks worked by hand."""

from __future__ import annotations

import math

import numpy as np
import pytest

from unlanded.errors import Refused
from unlanded.physics.burden import Burden
from unlanded.physics.screen import own_screens
from unlanded.physics.section import Conductor, Plane, Section
from unlanded.study.arrangements import (
    Arrangement,
    Cores,
    Word,
    arranged,
    contact_at_supply,
    remote_contact,
    spares_earthed,
    spares_joined,
    switched_in_line,
    switched_in_neutral,
    two_way,
)
from unlanded.study.ends import Bonded, Driven
from unlanded.study.run import Run
from unlanded.study.supply import Supply

NAMES = "abc"
SECTION = Section(tuple(Conductor(n, 0.004 * k, 0.01, 7e-4) for k, n in enumerate(NAMES)), Plane(0))
C_AB, C_AC, C_BC, C_G = 20e-12, 8e-12, 30e-12, 40e-12
MATRIX = np.array([[C_AB + C_AC + C_G, -C_AB, -C_AC], [-C_AB, C_AB + C_BC + C_G, -C_BC],
                   [-C_AC, -C_BC, C_AC + C_BC + C_G]])
LENGTH, OMEGA, LOAD = 200.0, 2 * math.pi * 50, 50e3


def level(arrangement: Arrangement, matrix: np.ndarray = MATRIX) -> float:
    run = Run(SECTION, LENGTH, Supply(230.0, 50.0), arrangement.near, arrangement.far, (7e-3,) * 3,
              capacitance=matrix)
    return abs(run.voltage(arrangement.load.a, arrangement.load.b))


def divided(coupling: float, rest: float, to_load: float = LOAD) -> float:
    """230 V through `coupling` onto `rest` beside the load, over the whole length."""
    return 230 * OMEGA * LENGTH * coupling / abs(OMEGA * LENGTH * (coupling + rest) - 1j / to_load)


def test_remote_contact() -> None:
    # Core c floats too: it lies in series between a and b, and from b to earth.
    found = level(remote_contact("a", "b", load=Burden(LOAD)))
    star = C_AC + C_BC + C_G
    coupling = C_AB + C_AC * C_BC / star
    rest = C_G + C_BC * C_G / star
    assert found == pytest.approx(divided(coupling, rest), rel=1e-4, abs=0)


def test_switch_drop_with_a_neutral() -> None:
    found = level(switched_in_line("a", "b", "c", load=Burden(LOAD)))
    assert found == pytest.approx(divided(C_AB, C_G + C_BC), rel=1e-3, abs=0)


def test_travellers_couple_as_a_switch_drop_does() -> None:
    both = [level(two_way(("a", "b"), "c", load=Burden(LOAD))),
            level(switched_in_line("a", "b", "c", load=Burden(LOAD)))]
    assert both[0] == pytest.approx(both[1], rel=1e-9, abs=0)


def test_switched_in_the_neutral_the_load_stays_on_the_line() -> None:
    # The floating core is pulled toward earth by its own capacitance; the load carries the rest.
    found = level(switched_in_neutral("a", "b", load=Burden(LOAD)))
    star = C_AC + C_BC + C_G
    beside = C_AB + C_AC * C_BC / star
    to_earth = C_G + C_BC * C_G / star
    by_hand = 230 * OMEGA * LENGTH * to_earth / abs(
        OMEGA * LENGTH * (beside + to_earth) - 1j / LOAD)
    assert found == pytest.approx(by_hand, rel=1e-4, abs=0)


def test_contact_at_the_supply_leaves_nothing() -> None:
    assert level(contact_at_supply("a", "b", load=Burden(LOAD))) == 0.0


def test_earthing_the_spare_takes_its_part_away() -> None:
    plain = remote_contact("a", "b", load=Burden(LOAD))
    bonded = Arrangement(spares_earthed(plain.near, ("c",)), plain.far, plain.load)
    assert level(bonded) == pytest.approx(divided(C_AB, C_G + C_BC), rel=1e-3, abs=0)
    assert level(bonded) < level(plain)
    joined = Arrangement(spares_joined(plain.near, ("c",), "b"), plain.far, plain.load)
    assert level(joined) == pytest.approx(divided(C_AB + C_AC, 2 * C_G), rel=1e-3, abs=0)


def test_a_core_in_a_screen_of_its_own() -> None:
    plain = remote_contact("a", "b", load=Burden(LOAD))
    assert level(plain) > 100 * level(plain, own_screens(MATRIX, [0]))


@pytest.mark.parametrize(("word", "drawn"), [
    ("remote contact", remote_contact("a", "b", load=Burden(LOAD))),
    ("contact at supply", contact_at_supply("a", "c", load=Burden(LOAD))),
    ("switched live", switched_in_line("a", "b", "c", load=Burden(LOAD))),
    ("switched neutral", switched_in_neutral("a", "b", load=Burden(LOAD))),
    ("two-way", two_way(("a", "b"), "c", load=Burden(LOAD)))])
def test_an_arrangement_by_its_name(word: Word, drawn: Arrangement) -> None:
    assert arranged(word, Cores("a", "b", "c"), load=Burden(LOAD)) == drawn


def test_the_neutral_may_come_another_way() -> None:
    # Core c is spare and floats, as it does beside a remote contact; the load is at the other end.
    away = level(two_way(("a", "b"), None, load=Burden(LOAD)))
    assert away == pytest.approx(level(remote_contact("a", "b", load=Burden(LOAD))), rel=1e-4,
                                 abs=0)


@pytest.mark.parametrize(("word", "cores", "says"), [
    ("contact at supply", Cores("a", "b"), "needs cores for live and neutral"),
    ("two-way", Cores("a", neutral="c"), "needs cores for live and switched"),
    ("remote contact", Cores("a"), "needs cores for live and switched; given"),
])
def test_a_part_that_is_missing_is_refused(word: Word, cores: Cores, says: str) -> None:
    with pytest.raises(Refused, match=says):
        arranged(word, cores, load=Burden(LOAD))


def test_spares_go_to_earth_and_not_to_the_neutral() -> None:
    # Both are at 0 V; what flows back by earth is residual current, by the neutral it is none.
    assert spares_earthed({"a": Driven("L")}, ("b", "c")) == {
        "a": Driven("L"), "b": Bonded("earth"), "c": Bonded("earth")}
