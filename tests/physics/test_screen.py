"""Screens that float, and cores screened one by one, against networks solved otherwise."""

from __future__ import annotations

import numpy as np
import pytest

from unlanded.errors import Refused
from unlanded.physics.capacitance import capacitance_matrix
from unlanded.physics.layouts import Core, laid_up, screen_radius
from unlanded.physics.network import Network
from unlanded.physics.screen import floating_screen, own_screens
from unlanded.physics.section import Pipe, Section

CORES = laid_up("abc", Core(0.7e-3, 1.4e-3, 5.0))
MATRIX = capacitance_matrix(Section(CORES, Pipe(screen_radius(CORES, clearance=0.3e-3))))


@pytest.mark.parametrize("to_earth", [0.0, 50e-12, 1e-6])
def test_a_floating_screen_is_one_more_node(to_earth: float) -> None:
    # The same with the screen as a node of its own, capacitor by capacitor.
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
    whole.capacitance_matrix("abc", floating_screen(MATRIX, to_earth=to_earth))
    whole.capacitor("c", "earth", 1e-12)
    whole.voltage_source("a", "earth", 100.0)
    for node in "bc":
        assert whole.solve(50.0).voltage(node)[0] == pytest.approx(
            net.solve(50.0).voltage(node)[0], rel=1e-6, abs=0)


def test_a_screen_well_earthed_through_its_outside_is_at_earth() -> None:
    np.testing.assert_allclose(floating_screen(MATRIX, to_earth=1.0), MATRIX, rtol=1e-8)


def test_without_a_way_to_earth_rows_sum_to_nothing() -> None:
    sums = floating_screen(MATRIX, to_earth=0.0).sum(axis=1)
    assert np.all(np.abs(sums) < 1e-12 * MATRIX[0, 0])


def test_a_core_in_a_screen_of_its_own_couples_to_none() -> None:
    found = own_screens(np.stack([MATRIX, 2 * MATRIX]), [1])
    assert np.all(found[:, 1, [0, 2]] == 0)
    assert np.all(found[:, [0, 2], 1] == 0)
    assert found[1, 1, 1] == 2 * MATRIX[1, 1]
    np.testing.assert_allclose(found[0][np.ix_([0, 2], [0, 2])], MATRIX[np.ix_([0, 2], [0, 2])],
                               rtol=1e-15)


def test_refusals() -> None:
    with pytest.raises(Refused, match="at least 0 F/m"):
        floating_screen(MATRIX, to_earth=-1.0)
    with pytest.raises(Refused, match="no capacitance to anything"):
        floating_screen(np.array([[1.0, -1.0], [-1.0, 1.0]]), to_earth=0.0)
