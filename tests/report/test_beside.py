"""A resistor beside a load: against the network with it connected, and the figure's words."""

from __future__ import annotations

import numpy as np
import pytest
from numpy.testing import assert_allclose

from case_text import site
from unlanded.case.loading import read_case
from unlanded.physics.burden import Burden
from unlanded.report.beside import (
    RESISTANCES,
    band_beside,
    beside_figure,
    levels_beside,
    power_beside,
)
from unlanded.report.investigation import Investigation, investigate


@pytest.fixture(scope="module")
def pump() -> Investigation:
    return investigate(read_case(site("larkmoor")))


def test_level_is_the_voltage_with_the_resistor_connected(pump: Investigation) -> None:
    watched = pump.case.content.operation[0].watched()
    some = np.array([1e3, 22e3, 1e6])
    wanted = [abs(pump.run.connect(Burden(r), "2@near", "N").voltage) for r in some]
    assert_allclose(levels_beside(pump.run, watched, some), wanted, rtol=1e-9)


def test_power_is_that_of_the_supply_on_the_resistor(pump: Investigation) -> None:
    wanted = pump.run.connect(Burden(22e3), "1@near", "N").power
    assert power_beside(pump.run, 22e3) == pytest.approx(wanted, rel=1e-6, abs=0)


def test_band_holds_the_nominal_curve_and_figure_tells_both(pump: Investigation) -> None:
    watched = pump.case.content.operation[0].watched()
    low, high = band_beside(pump.uncertain, watched)
    levels = levels_beside(pump.run, watched, RESISTANCES)
    assert np.all((low < levels) & (levels < high))
    drawn = beside_figure(pump.run, watched, 22e3, band=(low, high))
    assert_allclose(drawn.lines[0].y, levels, rtol=1e-12)
    assert drawn.numbers[0].startswith("22 kΩ: ")
    assert "2.4 W while on" in drawn.numbers[0]
    assert "34.5 V" in drawn.references[0].label
