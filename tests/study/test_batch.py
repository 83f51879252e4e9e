"""A batch against the same runs one by one."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from unlanded.errors import Refused
from unlanded.physics.burden import Burden
from unlanded.physics.section import Conductor, Plane, Section
from unlanded.study.batch import RunBatch
from unlanded.study.ends import Bonded, Driven, Joined, Through
from unlanded.study.run import Run
from unlanded.study.supply import Supply

SECTION = Section(tuple(Conductor(n, 0.004 * k, 0.01, 7e-4, 1.5e-3, 4.0)
                        for k, n in enumerate("abcde")), Plane(0.0))
RUN = Run(SECTION, 300.0, Supply(230.0, 50.0, resistance=0.2),
          {"a": Driven("L"), "b": Bonded("N"), "e": Bonded("earth"),
           "c": Through(Burden(40e3, 30.0), "N", "coil")},
          {"a": Through(Burden(400.0), "b", "lamp"), "d": Joined("c")}, (7e-3,) * 5)
POINTS = [("d@near", "earth"), ("c@near", "N"), ("a@far", "b@far")]


@pytest.fixture(scope="module")
def varied() -> tuple[RunBatch, list[Run]]:
    rng = np.random.default_rng(4)
    count = 7
    scale = rng.uniform(0.7, 1.3, (count, 1, 1))
    matrix, length = RUN.matrix * scale, rng.uniform(50, 900, count)
    supply, load = rng.uniform(0.9, 1.1, count), rng.uniform(0.5, 2.0, count)
    batch = RunBatch(RUN, matrix, length, supply, {"coil": load})
    single = [
        replace(RUN, length=float(length[k]), capacitance=matrix[k],
                supply=replace(RUN.supply, voltage=230.0 * supply[k]),
                near=RUN.near | {"c": Through(Burden(40e3 * load[k], 30.0 * load[k]), "N", "coil")})
        for k in range(count)]
    return batch, single


@pytest.mark.parametrize(("a", "b"), POINTS)
def test_ports_are_those_of_the_runs(
    varied: tuple[RunBatch, list[Run]], a: str, b: str
) -> None:
    batch, runs = varied
    ports, single = batch.port(a, b), [run.port(a, b) for run in runs]
    np.testing.assert_allclose(ports.voltage, [p.voltage for p in single], rtol=1e-9)
    np.testing.assert_allclose(ports.impedance, [p.impedance for p in single], rtol=1e-9)
    np.testing.assert_allclose(ports.residual_per_ampere,
                               [p.residual_per_ampere for p in single], rtol=1e-7)
    np.testing.assert_allclose(batch.voltage(a, b), [r.voltage(a, b) for r in runs], rtol=1e-9)


def test_residuals_and_loaded_voltages_are_those_of_the_runs(
    varied: tuple[RunBatch, list[Run]]
) -> None:
    batch, runs = varied
    np.testing.assert_allclose(batch.residual, [r.residual for r in runs], rtol=1e-7)
    tool = Burden(1e6, capacitance=1e-10)
    loaded = batch.port("d@near").loaded(complex(tool.admittance(50.0)))
    np.testing.assert_allclose(loaded, [r.connect(tool, "d@near").voltage for r in runs],
                               rtol=1e-9)


def test_long_cases_divide_all_of_them_into_sections() -> None:
    batch = RunBatch.of(RUN, length=[10.0, 4000.0])
    alone = replace(RUN, length=4000.0, capacitance=RUN.matrix)
    assert batch.lumps == alone.lumps > 1
    np.testing.assert_allclose(batch.voltage("d@near")[1], alone.voltage("d@near"), rtol=1e-9)


def test_at_another_order() -> None:
    third = RUN.at_order(3)
    run = replace(third, supply=replace(RUN.supply, harmonics={3: 0.05}))
    batch = RunBatch.of(run, length=[300.0, 300.0])
    np.testing.assert_allclose(batch.voltage("d@near")[0], run.voltage("d@near"), rtol=1e-9)
    assert abs(run.voltage("a@near")) == pytest.approx(0.05 * 230, rel=0.01, abs=0)


@pytest.mark.parametrize(("make", "message"), [
    (lambda: RunBatch(RUN, RUN.matrix[None].repeat(3, 0), np.ones(2)), "same number of cases"),
    (lambda: RunBatch.of(RUN, length=[1.0, -1.0]), "above 0 m; given -1 m"),
    (lambda: RunBatch.of(RUN).port("a@near", "L"), "are the same node"),
    (lambda: RunBatch.of(replace(RUN, supply=Supply(230.0, 1e6))).port("d@near"),
     "too long electrically"),
])
def test_refusals(make: object, message: str) -> None:
    with pytest.raises(Refused, match=message):
        make()  # type: ignore[operator]
