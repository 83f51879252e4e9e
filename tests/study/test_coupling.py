"""How far capacitances may lie from those computed."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from example_causes import MATRIX, reduced, run
from unlanded.physics.section import Section
from unlanded.study.coupling import (
    DESCRIPTION_SPREAD,
    GEOMETRY_SPREAD,
    OPEN_SURROUND,
    UNDESCRIBED,
)
from unlanded.study.reduced import Reduced

SUPPLY = {"supply": np.zeros(1)}


def of(made: Reduced, **scores: float) -> tuple[float, float]:
    named = {k.replace("_", " "): np.array([v]) for k, v in scores.items()}
    live, earth = made.capacitances({**SUPPLY, **named}, "spare")
    return float(live[0]), float(earth[0])


def test_scores_of_zero_are_the_computed_matrix() -> None:
    live, earth = of(reduced())
    assert live == pytest.approx(2e-9, rel=1e-12, abs=0)
    assert earth == pytest.approx(1.5e-9, rel=1e-12, abs=0)


def test_geometry_moves_each_capacitance_alone() -> None:
    live, earth = of(reduced(), live_spare=1.0)
    assert live == pytest.approx(2e-9 * np.exp(GEOMETRY_SPREAD.likely), rel=1e-12, abs=0)
    assert earth == pytest.approx(1.5e-9, rel=1e-12, abs=0)


def test_what_the_description_has_wrong_moves_all_of_them() -> None:
    # At a score of 3, one in 400 on this side: exp(0.12 sinh 3 / sinh 1) = exp(1.0230)
    for score, factor in ((1.0, np.exp(DESCRIPTION_SPREAD.likely)), (3.0, np.exp(1.0230))):
        live, earth = of(reduced(), description=score)
        assert live == pytest.approx(2e-9 * factor, rel=2e-4, abs=0)
        assert earth == pytest.approx(1.5e-9 * factor, rel=2e-4, abs=0)


def test_the_permittivitys_limits_lie_at_two_standard_deviations() -> None:
    base = run()
    made = Reduced(base, replace(base, capacitance=0.8 * MATRIX),
                   replace(base, capacitance=1.3 * MATRIX), ("spare",))
    assert of(made, permittivity=2.0)[0] == pytest.approx(2.6e-9, rel=1e-12, abs=0)
    assert of(made, permittivity=-2.0)[0] == pytest.approx(1.6e-9, rel=1e-12, abs=0)


def test_in_the_open_there_is_something_to_the_surroundings() -> None:
    base = run()
    in_the_open = replace(base, section=Section(base.section.conductors))
    made = reduced(in_the_open)
    earth = of(made)[1]
    assert earth == pytest.approx(1.5e-9 + 50 * OPEN_SURROUND.likely, rel=1e-12, abs=0)
    spread = np.log(of(made, earth_spare=1.0)[1] / earth)
    want = np.hypot(0.15 * 1.5, 0.75 * 0.25) / 1.75
    assert spread == pytest.approx(want, rel=1e-9, abs=0)


def test_a_section_that_is_not_known_is_anywhere_in_the_range() -> None:
    base = run()
    made = Reduced(base, base, base, ("spare",), described=False)
    assert made.coordinates == ("supply", "live spare", "earth spare")
    low, high = of(made, live_spare=-9.0)[0], of(made, live_spare=9.0)[0]
    assert low == pytest.approx(50 * UNDESCRIBED.low, rel=1e-9, abs=0)
    assert high == pytest.approx(50 * UNDESCRIBED.high, rel=1e-9, abs=0)
