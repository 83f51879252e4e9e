"""The stretched scores against what defines them, by numerical means."""

from __future__ import annotations

import numpy as np
import pytest
from scipy import integrate, stats

from unlanded.study.tails import FARTHEST, density, pull, relaxed, stretched

VALUES = np.array([-20.0, -1.5, -0.2, 0.3, 1.0, 7.0])


def test_density_is_scipys_johnson() -> None:
    # scipy's johnsonsu(a, b): a + b arcsinh(x) is normal; here x is scaled by sinh 1.
    want = stats.johnsonsu(0, 1, scale=1 / np.sinh(1))
    np.testing.assert_allclose(density(VALUES), want.pdf(VALUES), rtol=1e-12)
    np.testing.assert_allclose(stats.norm.cdf(relaxed(VALUES)), want.cdf(VALUES), rtol=1e-12)


def test_one_is_one_and_there_and_back() -> None:
    np.testing.assert_allclose(stretched([-1.0, 1.0]), [-1.0, 1.0], rtol=1e-15)
    np.testing.assert_allclose(stretched(relaxed(VALUES)), VALUES, rtol=1e-12)
    assert float(stretched(9.0)) == float(stretched(FARTHEST))


def test_pull_is_the_slope_of_the_density() -> None:
    step = 1e-5
    slope = (np.log(density(VALUES - step)) - np.log(density(VALUES + step))) / (2 * step)
    np.testing.assert_allclose(pull(VALUES) * VALUES, slope, rtol=1e-6)


@pytest.mark.parametrize("score", [2.0, 3.0])
def test_tails_lie_between_students_with_two_and_with_three_degrees(score: float) -> None:
    share = stats.norm.cdf([1.0, score])
    two, three = (np.divide(*stats.t(n).ppf(share)[::-1]) for n in (2, 3))
    assert three < float(stretched(score)) < two


def test_all_of_it_adds_to_one() -> None:
    far = float(stretched(FARTHEST))
    whole, _ = integrate.quad(lambda x: float(density(x)), -far, far, limit=400)
    assert whole == pytest.approx(1.0, rel=1e-6, abs=0)
