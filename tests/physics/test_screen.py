"""Screens as conductors, and cores screened one by one, against networks solved otherwise."""

from __future__ import annotations

import numpy as np
import pytest

from unlanded.errors import Refused
from unlanded.physics.capacitance import capacitance_matrix
from unlanded.physics.layouts import Core, laid_up, screen_radius
from unlanded.physics.network import Network
from unlanded.physics.screen import own_screens, with_screen
from unlanded.physics.section import Pipe, Section

CORES = laid_up("abc", Core(0.7e-3, 1.4e-3, 5.0))
MATRIX = capacitance_matrix(Section(CORES, Pipe(screen_radius(CORES, clearance=0.3e-3))))


@pytest.mark.parametrize("to_earth", [0.0, 50e-12, 1e-6])
def test_a_screen_is_one_more_node(to_earth: float) -> None:
    # The same capacitor by capacitor.
    net = Network()
    for i, a in enumerate("abc"):
        net.capacitor(a, "screen", MATRIX[i].sum())
        for j in range(i):
            net.capacitor(a, "abc"[j], -MATRIX[i, j])
    if to_earth:
        net.capacitor("screen", "earth", to_earth)
    net.capacitor("c", "earth", 1e-12)
    net.voltage_source("a", "earth", 100.0)
    whole = Network()
    whole.capacitance_matrix(("a", "b", "c", "screen"), with_screen(MATRIX, to_earth=to_earth))
    whole.capacitor("c", "earth", 1e-12)
    whole.voltage_source("a", "earth", 100.0)
    for node in ("b", "c", "screen"):
        assert whole.solve(50.0).voltage(node)[0] == pytest.approx(
            net.solve(50.0).voltage(node)[0], rel=1e-6, abs=0)


def test_rows_of_cores_sum_to_nothing_and_that_of_the_screen_to_its_outside() -> None:
    sums = with_screen(MATRIX, to_earth=50e-12).sum(axis=1)
    assert np.all(np.abs(sums[:-1]) < 1e-12 * MATRIX[0, 0])
    assert sums[-1] == pytest.approx(50e-12, rel=1e-9, abs=0)


def test_matrices_and_outsides_broadcast() -> None:
    found = with_screen(MATRIX[None], to_earth=np.array([1e-12, 2e-12]))
    assert found.shape == (2, 4, 4)
    for one, outside in zip(found, (1e-12, 2e-12), strict=True):
        np.testing.assert_allclose(one, with_screen(MATRIX, to_earth=outside), rtol=1e-15)


def test_a_core_in_a_screen_of_its_own_couples_to_none() -> None:
    found = own_screens(np.stack([MATRIX, 2 * MATRIX]), [1])
    assert np.all(found[:, 1, [0, 2]] == 0)
    assert np.all(found[:, [0, 2], 1] == 0)
    assert found[1, 1, 1] == 2 * MATRIX[1, 1]
    np.testing.assert_allclose(found[0][np.ix_([0, 2], [0, 2])], MATRIX[np.ix_([0, 2], [0, 2])],
                               rtol=1e-15)


def test_refusals() -> None:
    with pytest.raises(Refused, match="at least 0 F/m"):
        with_screen(MATRIX, to_earth=-1.0)
