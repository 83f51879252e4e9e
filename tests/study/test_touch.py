"""Touch current, charge and induction against published points and textbook circuits."""

from __future__ import annotations

import math

import numpy as np
import pytest

from unlanded.errors import Refused
from unlanded.physics.section import Conductor, Pipe, Plane, Section
from unlanded.reference.limits import LET_GO_CURRENT
from unlanded.study.ends import Bonded, Driven
from unlanded.study.run import Run, Screen
from unlanded.study.supply import Supply
from unlanded.study.touch import (
    induced_voltages,
    induction_finding,
    length_for_current,
    screen_current,
    screening_factor,
    touch_network,
    touch_sheet,
)

SECTION = Section((Conductor("live", 0, 0.02, 1e-3), Conductor("spare", 0.01, 0.02, 1e-3)),
                  Plane(0))
CM, CG = 12.5e-12, 63.6e-12


def run_of(length: float, voltage: float = 230.0, **ends: object) -> Run:
    return Run(SECTION, length, Supply(voltage, 50.0), {"live": Driven("L"), **ends},  # type: ignore[dict-item]
               {}, (7e-3, 7e-3), capacitance=np.array([[CM + CG, -CM], [-CM, CM + CG]]))


@pytest.mark.parametrize(("hertz", "ohms", "weight"), [
    (50, 1990.0, 0.9974), (60, 1985.7, 0.9962), (1e3, 972.5, 0.567), (1e4, 485.4, 0.0687)])
def test_network_of_iec_60990(hertz: float, ohms: float, weight: float) -> None:
    # IEC 60990, figure of the reaction network: component values as published; impedance and
    # weighting at these frequencies worked out from them separately.
    z, w = touch_network(hertz)
    assert abs(abs(z) - ohms) <= 0.05
    assert abs(abs(w) - weight) <= (5e-5 if weight > 0.9 or weight < 0.1 else 5e-4)


def test_network_by_a_solver() -> None:
    from unlanded.physics.network import Network

    net = Network()
    net.resistor("in", "b", 1500.0)
    net.capacitor("in", "b", 0.22e-6)
    net.resistor("b", "earth", 500.0)
    net.resistor("b", "out", 10e3)
    net.capacitor("out", "earth", 0.022e-6)
    solved = net.solve([50.0, 700.0, 9000.0])
    for k, hertz in enumerate(solved.frequencies):
        z, w = touch_network(float(hertz))
        assert z == pytest.approx(solved.impedance("in")[k], rel=1e-9, abs=0)
        assert w * 500 == pytest.approx(solved.transfer("in", "earth", "out", "earth")[k],
                                        rel=1e-9, abs=0)


def test_a_coupled_conductor() -> None:
    live, spare = sorted(touch_sheet(run_of(200.0)), key=lambda t: t.point)
    assert live.fed
    assert live.dangerous
    assert "real source" in live.finding
    omega = 2 * math.pi * 50
    # Into the body's 2 kΩ nearly all of ωCm V l flows: 181 µA.
    assert spare.bonded == pytest.approx(omega * CM * 200 * 230, rel=1e-4, abs=0)
    assert spare.current == pytest.approx(spare.bonded, rel=0.01, abs=0)
    assert spare.weighted == pytest.approx(0.9974 * spare.current, rel=1e-4, abs=0)
    crest = math.sqrt(2) * 230 * CM / (CM + CG)
    charge = 200 * (CM + CG) * crest
    assert spare.charge == pytest.approx(charge, rel=1e-4, abs=0)
    assert spare.energy == pytest.approx(charge * crest / 2, rel=1e-4, abs=0)
    assert spare.finding.startswith("below what people feel")
    assert not spare.dangerous


@pytest.mark.parametrize(("length", "words"), [
    (700.0, "can be felt"), (2900.0, "can be felt"), (6500.0, "let go of")])
def test_findings_rise_with_the_length(length: float, words: str) -> None:
    spare = next(t for t in touch_sheet(run_of(length)) if not t.fed)
    assert words in spare.finding
    assert spare.dangerous == (spare.current >= LET_GO_CURRENT.likely)


def test_high_voltage_beside_a_short_run_is_dangerous() -> None:
    spare = next(t for t in touch_sheet(run_of(200.0, voltage=11e3)) if not t.fed)
    assert spare.dangerous
    assert "let go of" in spare.finding
    assert "its charge" in spare.finding


def test_length_for_a_current() -> None:
    # 0.5 mA at 230 V 50 Hz takes 6.9 nF of coupling: 554 m at 12.5 pF/m.
    found = length_for_current(run_of(100.0), "spare@far")
    assert found == pytest.approx(0.5e-3 / (2 * math.pi * 50 * 230 * CM), rel=1e-4, abs=0)
    assert round(found * CM * 1e9, 1) == 6.9


def test_an_earthed_conductor_has_no_row() -> None:
    assert [t.point[:5] for t in touch_sheet(run_of(50.0, spare=Bonded("earth")))] == ["live@"]


def pair_at(distance: float, **more: tuple[float, float]) -> Section:
    places = {"source": (0.0, 5.0), "victim": (distance, 5.0), **more}
    return Section(tuple(Conductor(n, x, y, 5e-3) for n, (x, y) in places.items()), Plane(0))


def carrying(section: Section, length: float) -> Run:
    n = len(section.names)
    return Run(section, length, Supply(230.0, 50.0), {}, {}, (0.0,) * n)


def test_an_earth_fault_beside_a_line() -> None:
    # Carson's first term, as textbooks of interference have it: at 1 m, 50 Hz and 100 Ω·m the
    # mutual impedance is 0.0493 + j 0.430 Ω/km. 1 kA along 1 km gives 433 V, of it 430 V inductive.
    found = induced_voltages(carrying(pair_at(1.0), 1000.0), {"source": 1000.0})
    assert set(found) == {"victim"}
    assert abs(found["victim"].imag - 430) <= 0.5
    assert abs(found["victim"].real - 49.3) <= 0.05
    assert induction_finding(abs(found["victim"])).startswith("above 50 V: bond to earth")


def test_go_and_return_as_a_textbook_loop() -> None:
    # M = (µ₀/2π) ln[(d_gq d_rv) / (d_gv d_rq)] = 0.2 ln 5 µH/m: 1.011 V at 100 A over 100 m, 50 Hz.
    section = pair_at(0.1, spare=(0.02, 5.0), reference=(0.5, 5.0))
    found = induced_voltages(carrying(section, 100.0), {"source": 100.0, "victim": -100.0})
    assert abs(abs(found["spare"] - found["reference"]) - 1.011) <= 0.0005


def test_refusals() -> None:
    with pytest.raises(Refused, match='did you mean "source"'):
        induced_voltages(carrying(pair_at(1.0), 10.0), {"sorce": 1.0})
    with pytest.raises(Refused, match="above 0 Hz"):
        touch_network(0.0)


def screened(**bonds: object) -> Run:
    """Two cores in a screen of 5 mm inside radius and 1 Ω/km."""
    section = Section((Conductor("go", -2e-3, 0, 1e-3), Conductor("spare", 2e-3, 0, 1e-3)),
                      Pipe(5e-3))
    ends = {end: {"screen": Bonded("earth")} for end in bonds}
    return Run(section, 1000.0, Supply(230.0, 50.0), {"go": Driven("L"), **ends.get("near", {})},
               ends.get("far", {}), (7e-3, 7e-3), screen=Screen(1e-3, 50e-12))


def test_a_screen_earthed_at_both_ends_takes_its_share_off() -> None:
    # Screen with return by earth: R 1 + 0.0493 Ω/km, ωL = 2π50 × 0.2 ln(931.3 / 0.005) = 0.7624;
    # the factor 1 / |1.0493 + 0.7624 j| = 0.7710, and a core's loop ωM is 0.7624 as well.
    run = screened(near=1, far=1)
    assert abs(screening_factor(run) - 0.7710) <= 5e-5
    current = screen_current(run, {"go": 10.0})
    assert abs(abs(current) - 10 * abs(0.0493 + 0.7624j) * 0.7710) <= 1e-3
    bare = {end: induced_voltages(screened(**{end: 1}), {"go": 10.0}) for end in ("near", "far")}
    assert bare["near"] == bare["far"]
    # The loop of the screen is a little looser than that of two cores: the rest is not screened.
    e, left = bare["near"], induced_voltages(run, {"go": 10.0})
    assert set(left) == {"spare"}
    z_screen = complex(1.0493480, 0.7623807)
    by_hand = e["spare"] - e["screen"] * (z_screen - 1.0) / z_screen
    assert left["spare"] == pytest.approx(by_hand, rel=1e-4, abs=0)


def test_a_current_that_returns_inside_induces_none_in_the_screen() -> None:
    run = screened(near=1, far=1)
    assert abs(screen_current(run, {"go": 10.0, "spare": -10.0})) < 1e-12
    assert screen_current(screened(near=1), {"go": 10.0}) == 0
    assert screening_factor(run_of(10.0)) == 1.0


def test_a_screen_that_nothing_earths_can_be_touched() -> None:
    assert "screen" in {t.point.partition("@")[0] for t in touch_sheet(screened())}
    assert "screen" not in {t.point.partition("@")[0] for t in touch_sheet(screened(far=1))}


def test_with_no_line_on_any_core_nothing_is_driven() -> None:
    # As with the contact at the supply's end: every end is at 0 V, the neutral behind 0 Ω.
    run = Run(SECTION, 50.0, Supply(230.0, 50.0), {"spare": Bonded("N")}, {}, (7e-3, 7e-3))
    found = touch_sheet(run)
    assert sorted(t.point.partition("@")[0] for t in found) == ["live", "spare"]
    assert [(t.current, t.bonded, t.charge) for t in found] == [(0.0, 0.0, 0.0)] * 2
