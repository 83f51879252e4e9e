"""Runs whose inputs vary: interpolated capacitances, packings, and what goes where."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from unlanded.physics.capacitance import capacitance_matrix
from unlanded.physics.layouts import Core, control, laid_up
from unlanded.physics.packing import packed
from unlanded.physics.section import Conductor, Pipe, Plane, Section
from unlanded.study.ends import Driven
from unlanded.study.run import Run, Screen
from unlanded.study.spread import Input, quasi_random, triangular, uniform, within
from unlanded.study.supply import Supply
from unlanded.study.uncertain import (
    Conduit,
    Thickness,
    UncertainRun,
    covers_spread,
    sections_spread,
)

CORE = Core(0.8e-3, 1.6e-3, 4.8)
CORD = Section(laid_up("abc", CORE), Plane(-0.006))
PVC = {"permittivity of the covers": (triangular(3.5, 4.8, 6.5), "abc")}


def at_permittivity(section: Section, value: float) -> Section:
    return replace(section, conductors=tuple(
        replace(c, cover_permittivity=value) for c in section.conductors))


@pytest.mark.parametrize("section", [CORD, Section(control(list("abcdefg"), CORE), Plane(-0.006))])
def test_interpolated_matrices_are_those_of_the_sections(section: Section) -> None:
    spread = covers_spread(section, {"eps": (triangular(3.5, 4.8, 6.5), section.names)})
    values = np.array([[3.7], [4.8], [6.3]])
    exact = [capacitance_matrix(at_permittivity(section, float(v)), 1e-5) for v in values[:, 0]]
    assert np.all(np.abs(spread.matrices(values) / exact - 1) < 4e-3)


def test_two_smooth_inputs_are_interpolated_together() -> None:
    def built(values: np.ndarray) -> Section:
        eps, gap = values
        return Section(at_permittivity(CORD, float(eps)).conductors, Plane(-0.004 - float(gap)))

    spread = sections_spread([Input("eps", uniform(3.5, 6.5)), Input("gap", uniform(1e-3, 6e-3))],
                             built)
    values = quasi_random(spread.inputs, 8)
    exact = [capacitance_matrix(built(v), 1e-5) for v in values]
    assert np.all(np.abs(spread.matrices(values) / exact - 1) < 4e-3)


def test_packings_are_those_that_the_section_builder_makes() -> None:
    cores = [CORE] * 4
    pipe = Pipe(7e-3)
    section = Section(packed("abcd", cores, pipe_radius=7e-3, seed=1), pipe)
    spread = covers_spread(section, {}, conduit=Conduit(7e-3))
    matrices = spread.matrices(np.linspace(0.05, 0.95, 6)[:, None])
    assert [i.name for i in spread.inputs] == ["how the singles lie"]
    for matrix in matrices:
        assert np.all(np.linalg.eigvalsh(matrix) > 0)
        np.testing.assert_allclose(matrix, matrix.T, rtol=1e-9)
        # All cores are alike: whatever they touch, the self-capacitances are of one size.
        assert np.diag(matrix).max() < 2.5 * np.diag(matrix).min()
    assert np.ptp(matrices[:, 0, 1]) > 0.1 * abs(matrices[:, 0, 1]).mean()


def test_sizes_in_a_conduit_are_those_of_sections_packed_anew() -> None:
    # Each draw against a section of its own, solved by itself: "d" keeps its cover.
    radius, likely = 7e-3, CORE.cover_radius - CORE.radius
    metal = Pipe(radius)
    section = Section(packed("abcd", [CORE] * 4, pipe_radius=radius, seed=5), metal)
    spread = covers_spread(section, {}, conduit=Conduit(
        radius, arrangements=1, seed=5, bore=within(2 * radius, 0.1),
        thickness=Thickness(likely, within(likely, 0.2), "abc")))
    assert [i.name for i in spread.inputs] == ["thickness of the covers", "bore of the conduit"]
    values = quasi_random(spread.inputs, 8)
    for (thick, bore), matrix in zip(values, spread.matrices(values), strict=True):
        core = Core(CORE.radius, CORE.radius + thick, CORE.cover_permittivity)
        made = packed("abcd", [core] * 3 + [CORE], pipe_radius=bore / 2, seed=5)
        exact = capacitance_matrix(Section(made, Pipe(bore / 2)), 1e-4)
        assert np.all(np.abs(matrix - exact) <= 6e-3 * np.sqrt(np.outer(*[np.diag(exact)] * 2)))


def test_at_the_likely_sizes_the_packings_are_the_same() -> None:
    likely = CORE.cover_radius - CORE.radius
    section = Section(packed("abcd", [CORE] * 4, pipe_radius=7e-3, seed=1), Pipe(7e-3))
    plain = covers_spread(section, {}, conduit=Conduit(7e-3))
    sized = covers_spread(section, {}, conduit=Conduit(
        7e-3, bore=within(14e-3, 0.1), thickness=Thickness(likely, within(likely, 0.2), "abcd")))
    which = np.linspace(0.05, 0.95, 6)
    same = np.column_stack([np.full(6, likely), np.full(6, 14e-3), which])
    np.testing.assert_allclose(sized.matrices(same), plain.matrices(which[:, None]), rtol=1e-9)
    # What scales as a whole has the capacitances per metre of the section that it was.
    core = Core(1.1 * CORE.radius, 1.1 * CORE.cover_radius, CORE.cover_permittivity)
    larger = Section(packed("abcd", [core] * 4, pipe_radius=7.7e-3, seed=1), Pipe(7.7e-3))
    scaled = covers_spread(larger, {}, conduit=Conduit(7.7e-3))
    np.testing.assert_allclose(scaled.matrices(which[:, None]), plain.matrices(which[:, None]),
                               rtol=1e-6)


def test_the_same_draw_is_solved_once() -> None:
    calls = []

    def built(values: np.ndarray) -> Section:
        calls.append(1)
        return Section((Conductor("a", 0, 0, 1e-3), Conductor("b", float(values[0]), 0, 1e-3)))

    spread = replace(sections_spread([Input("spacing", uniform(4e-3, 9e-3))], built), smooth=False)
    found = spread.matrices(np.array([[5e-3], [6e-3], [5e-3]]))
    assert len(calls) == 2
    assert found[0, 0, 1] == found[2, 0, 1] != found[1, 0, 1]


def test_inputs_reach_their_places() -> None:
    run = Run(CORD, 100.0, Supply(230.0, 50.0), {"a": Driven("L")}, {}, (7e-3,) * 3)
    uncertain = UncertainRun(run, covers_spread(CORD, PVC), within(100.0, 0.1), within(1.0, 0.05),
                             {"coil": within(1.0, 0.2)})
    assert [i.name for i in uncertain.inputs] == [
        "permittivity of the covers", "length of the run", "supply voltage", "impedance of coil"]
    batch = uncertain.at(np.array([[4.0, 95.0, 1.02, 0.9], [5.0, 105.0, 0.98, 1.1]]))
    assert batch.length.tolist() == [95.0, 105.0]
    assert batch.supply.tolist() == [1.02, 0.98]
    assert batch.load["coil"].tolist() == [0.9, 1.1]
    assert batch.capacitance[1, 0, 0] > batch.capacitance[0, 0, 0]


def test_a_run_that_is_known_has_one_draw() -> None:
    run = Run(CORD, 100.0, Supply(230.0, 50.0), {"a": Driven("L")}, {}, (7e-3,) * 3)
    known = UncertainRun(run)
    assert known.inputs == ()
    assert len(known.draws(64)) == 1
    stretched = known.stretched([50.0, 100.0], 64)
    np.testing.assert_allclose(stretched.voltage("b@far")[1], run.voltage("b@far"), rtol=1e-9)


def test_stretched_draws_go_length_by_length() -> None:
    run = Run(CORD, 100.0, Supply(230.0, 50.0), {"a": Driven("L")}, {}, (7e-3,) * 3)
    uncertain = UncertainRun(run, covers_spread(CORD, PVC))
    batch = uncertain.stretched([10.0, 20.0, 30.0], 16)
    assert len(batch) == 48
    assert batch.length[:17].tolist() == [10.0] * 16 + [20.0]
    np.testing.assert_allclose(batch.capacitance[0], batch.capacitance[16], rtol=1e-12)


def test_the_capacitance_of_a_screen_to_earth_varies_by_itself() -> None:
    # The circuit by hand: a core with C₁ to the floating screen, the screen with C₂ to earth. The
    # screen stands at V C₁ / (C₁ + C₂), and every draw has its own C₂.
    core = Section((Conductor("core", 0, 0, 1e-3, 2e-3, 3.0),), Pipe(4e-3))
    run = Run(core, 100.0, Supply(230.0, 50.0), {"core": Driven("L")}, {}, (7e-3,),
              screen=Screen(15e-3, 200e-12))
    inner = float(capacitance_matrix(core)[0, 0])
    outside = np.array([50e-12, 100e-12, 400e-12])
    found = UncertainRun(run, screen=uniform(50e-12, 400e-12)).at(outside[:, None])
    volts = np.abs(found.port("screen@far", "earth").voltage)
    np.testing.assert_allclose(volts, 230 * inner / (inner + outside), rtol=1e-4)
    assert abs(run.voltage("screen@far")) == pytest.approx(230 * inner / (inner + 200e-12),
                                                           rel=1e-4, abs=0)
