"""The chance of a display: a blend of rectangle and normal, and what stands beside it."""

from __future__ import annotations

import itertools

import numpy as np
import pytest
from scipy import integrate, stats

from example_causes import seen
from unlanded.study.likelihood import error_chance, likelihood, reference_chance

TOP = 287.5


def test_the_blend_has_the_standard_deviation_of_the_rectangle() -> None:
    # JCGM 100, 4.3.7: a rectangular distribution of half width a has a/√3.
    points = np.linspace(-6, 6, 200_001)
    density = np.gradient(error_chance(points, 1.0), points)
    spread = integrate.trapezoid(density * points**2, points)
    assert spread == pytest.approx(1 / 3, rel=1e-4, abs=0)


def test_the_blend_against_scipy() -> None:
    x = np.array([-1.2, -0.3, 0.0, 0.9, 1.7])
    blend = (stats.uniform(-1, 2).cdf(x) + stats.norm(scale=1 / np.sqrt(3)).cdf(x)) / 2
    np.testing.assert_allclose(error_chance(x, 1.0), blend, rtol=1e-12)


def test_all_displays_of_a_meter_together_have_chance_one() -> None:
    texts = ["0.0 V", *(f"{v:.1f} V" for v in np.arange(0.1, TOP, 0.1))]
    shown = [seen("digital-10M", t) for t in texts]
    made = likelihood(shown, top=TOP)
    # One statement for all, since the ranges' differ and a reading takes its own.
    made = type(made)(made.low, made.high, np.full_like(made.half_width, 0.5), made.reference,
                      made.misread)
    chance = made.gain(np.full((len(texts), 1), 60.0)) * made.reference
    assert float(chance.sum()) == pytest.approx(1.0, rel=2e-4, abs=0)


def test_the_reference_adds_up_to_one() -> None:
    edges = np.linspace(0, TOP, 500)
    whole = sum(reference_chance(a, b, top=TOP) for a, b in itertools.pairwise(edges))
    assert whole == pytest.approx(1.0, rel=1e-6, abs=0)
    assert reference_chance(300.0, np.inf, top=TOP) == 1e-6


def test_a_misread_value_weighs_no_more_than_its_share() -> None:
    made = likelihood([seen("digital-10M", "105.4 V")], top=TOP)
    far_off = float(made.gain(np.array([[20.0]]))[0, 0])
    assert far_off == pytest.approx(0.05, rel=1e-6, abs=0)
    fits = float(made.gain(np.array([[105.4]]))[0, 0])
    assert fits > 20


def test_a_proximity_detector_says_little() -> None:
    made = likelihood([seen("proximity", "lit")], top=TOP)
    low, high = (float(made.gain(np.array([[v]]))[0, 0]) for v in (0.0, 200.0))
    assert 1 < high / low < 8


def test_misfit_is_in_standard_deviations_and_zero_inside_an_open_interval() -> None:
    made = likelihood([seen("digital-10M", "100.0 V"), seen("coil-tester", "lit")], top=TOP)
    got = made.misfit(np.array([[101.3], [150.0]]))
    sigma = np.sqrt((0.01 * 100 + 0.3) ** 2 / 3 + 0.1**2 / 12)
    assert got[0, 0] == pytest.approx(1.3 / sigma, rel=1e-9, abs=0)
    assert got[1, 0] == 0.0
