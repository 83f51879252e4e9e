"""Other arrangements of one cable, each against its capacitor network worked by hand."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest

from unlanded.physics.burden import Burden
from unlanded.physics.section import Conductor, Plane, Section
from unlanded.reference.loads import threshold
from unlanded.study.arrangements import Cores
from unlanded.study.comparison import Switched, alternatives, compare, rearranged
from unlanded.study.ends import Bonded, Driven, Ends, Joined, Open, Through
from unlanded.study.operation import Watched
from unlanded.study.run import Run
from unlanded.study.supply import Supply
from unlanded.study.uncertain import UncertainRun

SECTION = Section(tuple(Conductor(n, 0.004 * k, 0.01, 7e-4) for k, n in enumerate("abcd")),
                  Plane(0))
C_AB, C_AC, C_BC, C_G = 20e-12, 8e-12, 30e-12, 40e-12
LENGTH, OMEGA = 40.0, 2 * math.pi * 50
LAMP = Switched("two-way", Cores("a", "b", "c"), Burden(), name="lamp")


def run_of(built: Switched, far: Ends | None = None, near: Ends | None = None) -> Run:
    """Four cores: a, b, c as above, and d that couples to nothing but earth."""
    c = np.zeros((4, 4))
    for i, j, value in ((0, 1, C_AB), (0, 2, C_AC), (1, 2, C_BC)):
        c[i, j] = c[j, i] = -value
    np.fill_diagonal(c, C_G - c.sum(axis=1))
    ends = built.arrangement
    return Run(SECTION, LENGTH, Supply(230.0, 50.0), {**ends.near, **(near or {})},
               {**ends.far, **(far or {})}, (0.0,) * 4, capacitance=c)


def lamp_current(coupling: float, rest: float) -> float:
    """Mean current of a lamp lit from 50 V: 4 f C (√2 U − 50 V) behind the divider, by hand."""
    c = (coupling + rest) * LENGTH
    return 4 * 50 * c * (math.sqrt(2) * 230 * coupling / (coupling + rest) - 50)


def test_a_two_way_lamp_and_what_else_the_cable_could_do() -> None:
    watched = Watched("lamp", LAMP.arrangement.load, threshold("LED lamp"))
    found = {c.words: c for c in compare(UncertainRun(run_of(LAMP)), watched, LAMP)}
    assert list(found) == ["two-way, a live", "remote contact", "contact at supply",
                           "switched live", "switched neutral", "two-way, b live"]
    assert [c.as_built for c in found.values()] == [True] + [False] * 5
    own = lamp_current(C_AB, C_G + C_BC)
    for words, amperes in (("two-way, a live", own), ("switched live", own),
                           ("two-way, b live", lamp_current(C_AB, C_G + C_AC))):
        assert found[words].found.level == pytest.approx(amperes, rel=1e-3, abs=0)
    # 28 µA or so lie between what is dark (10 µA) and what is plainly lit (500 µA).
    assert found["two-way, a live"].found.state == "may glow"
    assert found["contact at supply"].found.level == 0
    assert found["contact at supply"].found.state == "stays dark"
    # Beside a remote contact the neutral is spare: c floats between a, b and earth.
    star = C_AC + C_BC + C_G
    assert found["remote contact"].found.level == pytest.approx(lamp_current(
        C_AB + C_AC * C_BC / star, C_G + C_BC * C_G / star), rel=1e-3, abs=0)


def test_a_relay_has_a_current_and_the_longest_run() -> None:
    relay = Switched("switched live", Cores("a", "b", "c"), Burden(20e3), name="relay")
    watched = Watched("relay", relay.arrangement.load, threshold("relay"), 230.0)
    own, *_ = compare(UncertainRun(run_of(relay)), watched, relay)
    # |U| = 230 ωCₘl / |ω(Cₘ + C)l − j/R| and at 15 % of 230 V that is a length.
    volts = 230 * OMEGA * LENGTH * C_AB / abs(OMEGA * LENGTH * (C_AB + C_G + C_BC) - 1j / 20e3)
    assert own.found.level == pytest.approx(volts, rel=1e-3, abs=0)
    assert own.found.current == pytest.approx(volts / 20e3, rel=1e-3, abs=0)
    longest = 1 / (20e3 * OMEGA * math.sqrt((C_AB / 0.15)**2 - (C_AB + C_G + C_BC)**2))
    assert own.found.longest.stretches[0][1] == pytest.approx(longest, rel=1e-3, abs=0)
    assert own.found.cures == ()


def words(built: Switched, **ends: Ends) -> list[tuple[str, tuple[str, ...]]]:
    return [(s.word, s.cores.names) for s in alternatives(run_of(built, **ends), built)]


def test_spare_cores_take_the_parts_that_are_new() -> None:
    contact = Switched("contact at supply", Cores("a", neutral="c"), Burden(1e3))
    assert words(contact)[1:] == [
        ("remote contact", ("a", "b")), ("switched live", ("a", "b", "c")),
        ("switched neutral", ("a", "b")), ("two-way", ("a", "b", "c")),
        ("two-way", ("b", "a", "c"))]
    remote = Switched("remote contact", Cores("a", "b"), Burden(1e3))
    assert ("switched live", ("a", "b", "c")) in words(remote)


def test_what_is_bonded_or_joined_is_no_spare() -> None:
    remote = Switched("remote contact", Cores("a", "b"), Burden(1e3))
    taken = words(remote, near={"c": Bonded("earth")}, far={"d": Joined("c")})
    assert taken == [("remote contact", ("a", "b")), ("switched neutral", ("a", "b"))]
    contact = Switched("contact at supply", Cores("a", neutral="c"), Burden(1e3))
    assert words(contact, near={"b": Driven("L"), "d": Bonded("N")}) == [
        ("contact at supply", ("a", "c"))]


def test_a_neutral_that_comes_another_way_keeps_doing_so() -> None:
    away = Switched("two-way", Cores("a", "b"), Burden(1e3))
    found = words(away, near={"c": Bonded("earth"), "d": Bonded("earth")})
    assert ("switched live", ("a", "b")) in found
    assert "contact at supply" not in [word for word, _ in found]
    # Nor is a spare core made one where the case's own arrangement has none.
    assert words(away)[1:] == [
        ("remote contact", ("a", "b")), ("contact at supply", ("a", "c")),
        ("switched live", ("a", "b")), ("switched neutral", ("a", "b")), ("two-way", ("b", "a"))]


def test_the_other_ends_stay_as_they_are() -> None:
    run = run_of(LAMP, near={"d": Bonded("earth")}, far={"d": Bonded("N")})
    other = replace(LAMP, word="switched neutral", cores=Cores("a", "b"))
    made = rearranged(run, LAMP, other)
    assert (made.near["d"], made.far["d"]) == (Bonded("earth"), Bonded("N"))
    assert made.near["c"] == made.far["c"] == Open()
    assert made.matrix is run.matrix


def test_a_spare_core_gets_its_new_ends() -> None:
    remote = Switched("remote contact", Cores("a", "b"), Burden(1e3))
    made = rearranged(run_of(remote), remote, replace(remote, word="switched live",
                                                      cores=Cores("a", "b", "c")))
    assert made.near == {"a": Driven("L"), "b": Open(), "c": Bonded("N"), "d": Open()}
    contact = Switched("contact at supply", Cores("a", neutral="c"), Burden(1e3))
    made = rearranged(run_of(contact), contact, replace(contact, word="two-way",
                                                        cores=Cores("a", "b", "c")))
    assert made.far == {"a": Open(), "b": Through(Burden(1e3), "c"), "c": Open(), "d": Open()}
