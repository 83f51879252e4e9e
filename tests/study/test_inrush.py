"""Inrush: against a stepwise solution of the same circuit, and the geometry of its loop."""

from __future__ import annotations

import math

import numpy as np
import pytest
from scipy import integrate

from unlanded.errors import Refused
from unlanded.physics.section import Conductor, Plane, Section
from unlanded.study.ends import Bonded, Driven
from unlanded.study.inrush import inrush, loop_inductance, run_inrush
from unlanded.study.run import Run
from unlanded.study.supply import Supply

MAINS = Supply(230.0, 50.0)


def two_wires(**near):
    cores = (Conductor("hot", 0.0, 0.02, 1e-3), Conductor("cpc", 0.01, 0.02, 1e-3))
    ends = {"hot": Driven("L"), **near}
    return Run(Section(cores, Plane(0.0)), 30.0, MAINS, ends, {}, (7e-3,) * 2)


def test_against_the_differential_equation():
    c, inductance = 47e-9, 30e-6
    crest = math.sqrt(2) * 230
    period = 2 * math.pi * math.sqrt(inductance * c)
    found = integrate.solve_ivp(lambda _, y: [(crest - y[1]) / inductance, y[0] / c], (0, period),
                                [0.0, 0.0], rtol=1e-10, atol=1e-12, max_step=period / 500)
    given = inrush(capacitance=c, voltage=230.0, inductance=inductance)
    assert given.peak == pytest.approx(found.y[0].max(), rel=1e-4, abs=0)
    assert 2 * given.charge == pytest.approx(c * found.y[1].max(), rel=1e-4, abs=0)
    assert given.frequency == pytest.approx(1 / period, rel=1e-12, abs=0)


def test_the_loop_is_that_of_the_line_and_the_earth_conductor():
    # Two solid wires at 50 Hz: L = (µ0/π)·(ln(d/r) + 1/4), here 10 mm and 1 mm, 30 m.
    loop = loop_inductance(two_wires(cpc=Bonded("earth")))
    assert loop == pytest.approx(4e-7 * (math.log(10) + 0.25) * 30, rel=1e-6, abs=0)
    assert loop_inductance(two_wires()) > 2 * loop  # back through the soil


def test_of_a_run_with_filters():
    run = two_wires()
    bare, with_filter = run_inrush(run), run_inrush(run, 47e-9)
    omega = 2 * math.pi * 50
    own = abs(run.residual) / (omega * 230)
    ratio = (own + 47e-9) / own
    assert with_filter.charge == pytest.approx(ratio * bare.charge, rel=1e-9, abs=0)
    assert with_filter.peak == pytest.approx(np.sqrt(ratio) * bare.peak, rel=1e-9, abs=0)


def test_nothing_where_nothing_leaks_or_is_fed():
    cores = (Conductor("a", 0.0, 0.02, 1e-3), Conductor("b", 0.01, 0.02, 1e-3))
    run = Run(Section(cores, Plane(0.0)), 30.0, MAINS, {}, {}, (7e-3,) * 2)
    assert run_inrush(run, 47e-9) is None


def test_refusal():
    with pytest.raises(Refused, match="capacitance and inductance must be above 0"):
        inrush(capacitance=1e-9, voltage=230.0, inductance=0.0)
