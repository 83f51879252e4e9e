"""The banded reading sheet against circuits whose bands follow by hand."""

from __future__ import annotations

import math

import numpy as np
import pytest

from unlanded.physics.section import Conductor, Plane, Section
from unlanded.reference.instruments import INSTRUMENTS, custom_instrument
from unlanded.study.banded import (
    length_band,
    loading_band,
    reading_sensitivity,
    spread_sheet,
)
from unlanded.study.ends import Driven
from unlanded.study.readings import Pair, length_curve, reading_sheet
from unlanded.study.run import Run
from unlanded.study.spread import uniform, within
from unlanded.study.supply import Supply
from unlanded.study.uncertain import UncertainRun

SECTION = Section((Conductor("live", 0, 0.02, 1e-3), Conductor("spare", 0.01, 0.02, 1e-3)),
                  Plane(0))
CM, CG = 12.5e-12, 63.6e-12
RUN = Run(SECTION, 50.0, Supply(230.0, 50.0), {"live": Driven("L")}, {}, (7e-3, 7e-3),
          capacitance=np.array([[CM + CG, -CM], [-CM, CM + CG]]))
FAR = Pair("spare@far")


def test_a_band_from_the_supply_alone() -> None:
    # Unloaded by an ideal meter, the reading is 37.78 V times a share uniform over 0.9 to 1.1: the
    # middle 95 % is 0.905 to 1.095.
    tool = custom_instrument("t", "t", resistance=1e13, resolution=1e-3, full_scale=100.0)
    sheet = reading_sheet(RUN, [tool], [FAR])
    found = spread_sheet(sheet, UncertainRun(RUN, supply=within(1.0, 0.1)), stable=1e-4,
                         batch=1024)
    volts = 230 * CM / (CM + CG)
    assert found.spread.low[0] == pytest.approx(0.905 * volts, rel=5e-4, abs=0)
    assert found.spread.high[0] == pytest.approx(1.095 * volts, rel=5e-4, abs=0)
    row = found.sheet.rows[0]
    assert (row.low.text, row.high.text) == (tool.show(found.spread.low[0]).text,
                                             tool.show(found.spread.high[0]).text)


def test_accuracy_is_a_rectangular_distribution() -> None:
    tool = custom_instrument("t", "t", resistance=1e13, percent=0.02, counts=5, resolution=0.1)
    found = spread_sheet(reading_sheet(RUN, [tool], [FAR]), UncertainRun(RUN), stable=1e-4,
                         batch=1024)
    volts = 230 * CM / (CM + CG)
    half = 0.02 * volts + 0.5
    assert found.spread.high[0] - found.spread.low[0] == pytest.approx(2 * 0.95 * half, rel=1e-3,
                                                                       abs=0)
    # JCGM 100, 4.3.7: u = a / √3.
    assert found.spread.deviation[0] == pytest.approx(half / math.sqrt(3), rel=1e-3, abs=0)


def test_the_burdens_tolerance_reaches_the_reading() -> None:
    tool = custom_instrument("t", "t", resistance=1e6, resolution=1e-3, full_scale=100.0,
                             tolerance=0.2)
    found = spread_sheet(reading_sheet(RUN, [tool], [FAR]), UncertainRun(RUN), stable=1e-4,
                         batch=1024)
    x = 1 / (2 * math.pi * 50 * 50 * (CM + CG))
    ends = [230 * CM / (CM + CG) * r / math.hypot(r, x) for r in (0.81e6, 1.19e6)]
    assert found.spread.low[0] == pytest.approx(ends[0], rel=1e-3, abs=0)
    assert found.spread.high[0] == pytest.approx(ends[1], rel=1e-3, abs=0)


def test_indicator_body_and_residual() -> None:
    tools = [custom_instrument("i", "i", "indicator", resistance=1e9, threshold=37.0, percent=0.1),
             INSTRUMENTS["body"]]
    found = spread_sheet(reading_sheet(RUN, tools, [FAR]),
                         UncertainRun(RUN, length=within(50, 0.2)))
    lamp, body = found.sheet.rows
    assert (lamp.low.text, lamp.high.text) == ("not lit", "lit")
    assert body.low.text < body.reading.text < body.high.text  # 36.6 µA … 53.4 µA
    residual = abs(RUN.residual)
    assert found.spread.low[-1] == pytest.approx(0.81 * residual, rel=0.01, abs=0)
    assert found.spread.high[-1] == pytest.approx(1.19 * residual, rel=0.01, abs=0)


def test_sensitivity_finds_the_input_that_matters() -> None:
    tool = INSTRUMENTS["low-impedance"]
    (row,) = reading_sheet(RUN, [tool], [FAR]).rows
    uncertain = UncertainRun(RUN, length=within(50.0, 0.2), supply=within(1.0, 0.02))
    found = reading_sensitivity(row, uncertain, points=512)
    # On 3 kΩ ± 20 % the reading is ωCm l U R: length and burden share it alike, the supply has
    # (2/20)² of either, but for what the meter's own counts add.
    shares = {name: total for name, _, total in found.ranked()}
    assert shares["length of the run"] == pytest.approx(
        shares["burden of the low-impedance meter, 3 kΩ"], rel=0.05, abs=0)
    assert shares["supply voltage"] == pytest.approx(0.01 * shares["length of the run"], rel=0.1,
                                                     abs=0)


def test_known_exactly_a_reading_has_no_width() -> None:
    tool = custom_instrument("t", "t", resistance=1e9)
    found = spread_sheet(reading_sheet(RUN, [tool], [FAR]), UncertainRun(RUN))
    assert found.spread.low[0] == found.spread.high[0]


def test_bands_of_curves_hold_the_curves() -> None:
    uncertain = UncertainRun(RUN, length=within(50.0, 0.1), supply=uniform(0.9, 1.1))
    ohms = np.geomspace(1e3, 1e9, 9)
    low, high = loading_band(uncertain, FAR, ohms)
    expected = 230 * CM / np.abs(CM + CG - 1j / (2 * np.pi * 50 * 50 * ohms))
    assert np.all((low < expected) & (expected < high))
    tool = custom_instrument("t", "t", resistance=1e7)
    lengths = np.array([10.0, 50.0, 200.0])
    low, high = length_band(uncertain, FAR, tool, lengths)
    expected = length_curve(RUN, FAR, tool, lengths)
    np.testing.assert_allclose((low + high) / 2, expected, rtol=0.01)
    np.testing.assert_allclose((high - low) / expected, 0.19, rtol=0.02)
