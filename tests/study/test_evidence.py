"""The integral against cases whose evidence is known in closed form."""

from __future__ import annotations

import math

import numpy as np
import pytest
from scipy import stats

from unlanded.study.evidence import Integral
from unlanded.study.modes import Problem

Array = np.ndarray


class Normal:
    """Readings y with normal errors of standard deviation s."""

    def __init__(self, y: Array, s: float) -> None:
        self.y, self.s = y[:, None], s

    def gain(self, volts: Array) -> Array:
        return stats.norm.pdf(self.y, volts, self.s)

    def misfit(self, volts: Array) -> Array:
        return (volts - self.y) / self.s


def settled(problem: Problem, error: float = 0.003) -> Integral:
    made = Integral(problem)
    while made.error > error and not made.exhausted:
        made.double()
    return made


def test_a_conjugate_case_has_its_known_evidence_and_posterior() -> None:
    # y = A x + e with x ~ N(0, 1) and e ~ N(0, s²): y ~ N(0, A Aᵀ + s² 1).
    rng = np.random.default_rng(1)
    a, s = rng.normal(size=(5, 3)), 0.05
    y = a @ np.array([0.6, -1.1, 0.3]) + rng.normal(scale=s, size=5)
    made = settled(Problem(lambda _, x: a @ x.T, Normal(y, s), 3, False))
    covariance = a @ a.T + s**2 * np.eye(5)
    want = stats.multivariate_normal(np.zeros(5), covariance).pdf(y)
    assert made.value == pytest.approx(want, rel=0.01, abs=0)
    assert abs(made.value / want - 1) < 4 * made.error
    draws = made.draws
    mean = (draws.weight[:, None] * draws.score).sum(axis=0) / draws.weight.sum()
    np.testing.assert_allclose(mean, a.T @ np.linalg.solve(covariance, y), rtol=0.01)


@pytest.mark.parametrize("s", [0.3, 0.01, 3e-4, 1e-5])
def test_a_size_that_the_readings_pin_down_sharply_is_found(s: float) -> None:
    # One reading of the size itself, even over 0 to 1: the evidence is the mass within it.
    y = 0.387
    made = settled(Problem(lambda u, _: u[None], Normal(np.array([y]), s), 1, True))
    want = stats.norm.cdf((1 - y) / s) - stats.norm.cdf(-y / s)
    assert made.value == pytest.approx(want, rel=0.01, abs=0)


def test_a_size_and_a_score_along_a_curved_ridge() -> None:
    # y = 10^(4u) e^(0.3x): integrate over x for each u by the trapezoidal rule.
    y, s = 300.0, 3.0
    made = settled(Problem(lambda u, x: (10 ** (4 * u) * np.exp(0.3 * x[:, 0]))[None],
                           Normal(np.array([y]), s), 1, True))
    u, x = np.linspace(0, 1, 2001)[:, None], np.linspace(-7, 7, 1501)
    density = stats.norm.pdf(y, 10 ** (4 * u) * np.exp(0.3 * x), s) * stats.norm.pdf(x)
    want = np.trapezoid(np.trapezoid(density, x), u[:, 0])
    assert made.value == pytest.approx(want, rel=0.01, abs=0)


@pytest.mark.parametrize(("y", "s"), [(0.4, 0.3), (6.0, 0.3), (6.0, 0.01)])
def test_a_value_with_wider_tails_is_found_far_out(y: float, s: float) -> None:
    # y = sinh z / sinh 1 + x + e: over z by the trapezoidal rule, over x and e in closed form.
    made = settled(Problem(lambda _, x: (np.sinh(x[:, 0]) / np.sinh(1) + x[:, 1])[None],
                           Normal(np.array([y]), s), 2, False, (0,)))
    z = np.linspace(-6, 6, 20_001)
    given = stats.norm.pdf(y, np.sinh(z) / np.sinh(1), np.hypot(1, s))
    want = np.trapezoid(given * stats.norm.pdf(z), z)
    assert made.value == pytest.approx(want, rel=0.01, abs=0)


def test_readings_that_say_nothing_leave_the_prior() -> None:
    class Nothing:
        def gain(self, volts: Array) -> Array:
            return np.ones_like(volts)

        def misfit(self, volts: Array) -> Array:
            return np.zeros_like(volts)

    made = settled(Problem(lambda u, _: u[None], Nothing(), 2, True))
    assert made.value == pytest.approx(1.0, rel=0.01, abs=0)
    draws = made.draws
    assert np.average(draws.size, weights=draws.weight) == pytest.approx(0.5, rel=0.02, abs=0)


def test_the_stated_error_is_that_of_the_integral() -> None:
    # Over cases with known evidence, (value − truth) / error scatters by about 1.
    scores = []
    for seed in range(24):
        rng = np.random.default_rng(seed)
        a = rng.normal(size=(3, 4))
        y = a @ rng.normal(size=4)
        made = Integral(Problem(lambda _, x, a=a: a @ x.T, Normal(y, 0.1), 4, False))
        want = stats.multivariate_normal(np.zeros(3), a @ a.T + 0.01 * np.eye(3)).pdf(y)
        scores.append((made.value / want - 1) / made.error)
    assert 0.6 < math.sqrt(np.mean(np.square(scores))) < 1.6


def test_the_same_problem_gives_the_same_number() -> None:
    problem = Problem(lambda _, x: x.T[:1], Normal(np.array([0.4]), 0.1), 2, False)
    assert Integral(problem).value == Integral(problem).value
