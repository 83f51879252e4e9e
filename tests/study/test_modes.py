"""Modes and widths against closed forms, and that both explanations of a far reading are found."""

from __future__ import annotations

import numpy as np
import pytest

from unlanded.study.modes import Problem, closed_in

Array = np.ndarray


class Normal:
    """Readings y with normal errors of standard deviation s."""

    def __init__(self, y: Array, s: float) -> None:
        self.y, self.s = y[:, None], s

    def gain(self, volts: Array) -> Array:
        return np.exp(-((volts - self.y) / self.s) ** 2 / 2)

    def misfit(self, volts: Array) -> Array:
        return (volts - self.y) / self.s


def test_a_linear_problem_has_its_known_mode_and_width() -> None:
    # y = A x + e: the posterior of x has precision 1 + Aᵀ A / s², mean that times Aᵀ y / s².
    # With readings that the mode fits exactly no search forgives anything.
    a, s, x = np.array([[1.0, 0.5], [-0.3, 2.0]]), 1e-3, np.array([0.4, -0.2])
    nodes = closed_in(Problem(lambda _, z: a @ z.T, Normal(a @ x, s), 2, False))
    precision = np.eye(2) + a.T @ a / s**2
    mean = np.linalg.solve(precision, a.T @ (a @ x) / s**2)
    for mode in range(2):
        np.testing.assert_allclose(nodes.score[0, mode], mean, rtol=1e-6)
        covariance = nodes.root[0, mode] @ nodes.root[0, mode].T
        np.testing.assert_allclose(covariance, np.linalg.inv(precision), rtol=1e-4)
    assert nodes.root.shape == (1, len(nodes.shares), 2, 2)


def test_a_reading_far_off_is_wrong_or_the_unknown_is() -> None:
    nodes = closed_in(Problem(lambda _, z: np.sinh(z.T) / np.sinh(1), Normal(np.array([6.0]), 0.05),
                              1, False, (0,)))
    forgiving, strict = nodes.score[0, :2, 0]
    assert abs(forgiving) < 0.5
    assert strict == pytest.approx(6.0, rel=0.01, abs=0)


def test_nodes_close_in_on_the_sizes_that_matter() -> None:
    nodes = closed_in(Problem(lambda u, _: u[None], Normal(np.array([0.387]), 1e-3), 1, True))
    assert (np.diff(nodes.size) > 0).all()
    best = nodes.size[np.argmax(nodes.height)]
    assert abs(best - 0.387) < 1e-3  # one standard deviation
    assert np.diff(nodes.size).min() < 1e-3


def test_a_value_with_wide_tails_is_held_far_out_where_the_other_makes_up_for_it() -> None:
    # y = e^(0.12 v) e^(0.15 z) pinned at 1: with v held at ±3 the other must be ∓0.36 / 0.15.
    def predict(_: Array, z: Array) -> Array:
        return np.exp(0.12 * np.sinh(z[:, 0]) / np.sinh(1) + 0.15 * z[:, 1])[None]

    nodes = closed_in(Problem(predict, Normal(np.array([1.0]), 0.005), 2, False, (0,)))
    for v, z in nodes.score[0, 2:]:
        assert abs(v) == pytest.approx(3.0, rel=0.2, abs=0)
        assert z == pytest.approx(-0.12 * v / 0.15, rel=0.02, abs=0)
    assert nodes.shares.sum() < 1  # the rest is drawn from the prior
