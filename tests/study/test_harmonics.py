"""Harmonics against the divider at each order, and the refusal beyond the π sections."""

from __future__ import annotations

import math

import numpy as np
import pytest

from unlanded.errors import Refused
from unlanded.physics.burden import Burden
from unlanded.physics.section import Conductor, Plane, Section
from unlanded.study.ends import Driven
from unlanded.study.harmonics import spectrum, switching, total
from unlanded.study.readings import Pair
from unlanded.study.run import Run
from unlanded.study.supply import Supply

SECTION = Section((Conductor("live", 0, 0.02, 1e-3), Conductor("spare", 0.01, 0.02, 1e-3)),
                  Plane(0))
CM, CG = 12.5e-12, 63.6e-12
RUN = Run(SECTION, 50.0, Supply(230.0, 50.0, harmonics={5: 0.06, 3: 0.05}), {"live": Driven("L")},
          {}, (7e-3, 7e-3), capacitance=np.array([[CM + CG, -CM], [-CM, CM + CG]]))
FAR = Pair("spare@far")


def by_hand(volts: float, hertz: float, ohms: float) -> float:
    return volts * CM / abs(CM + CG - 1j / (2 * math.pi * hertz * 50 * ohms))


def test_each_order_is_the_divider_at_its_frequency() -> None:
    found = spectrum(RUN, FAR, Burden(2000.0))
    assert [c.frequency for c in found] == [50.0, 150.0, 250.0]
    for c, share in zip(found, (1.0, 0.05, 0.06), strict=True):
        assert c.unloaded == pytest.approx(share * 230 * CM / (CM + CG), rel=1e-4, abs=0)
        assert c.voltage == pytest.approx(by_hand(share * 230, c.frequency, 2000.0), rel=1e-4,
                                          abs=0)
    # Into a low impedance the current grows with the order: shares of 15 % and 30 %.
    assert found[1].current / found[0].current == pytest.approx(0.15, rel=1e-3, abs=0)
    assert total(found).current / found[0].current == pytest.approx(
        math.sqrt(1 + 0.15**2 + 0.30**2), rel=1e-3, abs=0)


def test_a_switching_band_passes_where_the_sections_hold() -> None:
    # The divider leaves out the run's own inductance, which counts from some 10 kHz on.
    found = switching(RUN, FAR, Burden(2000.0), frequencies=[1e3, 4e3], voltage=20.0)
    for c in found:
        assert c.voltage == pytest.approx(by_hand(20.0, c.frequency, 2000.0), rel=1e-3, abs=0)


def test_beyond_the_sections_it_is_refused() -> None:
    with pytest.raises(Refused, match="too long electrically"):
        switching(RUN, FAR, Burden(2000.0), frequencies=[5e6], voltage=20.0)
    with pytest.raises(Refused, match="above 0 V"):
        switching(RUN, FAR, Burden(2000.0), frequencies=[4e3], voltage=0.0)
