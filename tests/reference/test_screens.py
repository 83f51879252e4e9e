"""What a screen is taken to have, against the formula of a wire over a plane."""

from __future__ import annotations

import pytest

from unlanded.physics.closed_forms import wire_over_plane
from unlanded.reference.screens import SCREEN_RESISTANCE, SCREEN_TO_EARTH


@pytest.mark.parametrize(("radius", "above"), [
    (2.5e-3, 1.0e-3), (5e-3, 1.2e-3), (7.5e-3, 1.5e-3), (2.5e-3, 0.1), (5e-3, 0.3), (7.5e-3, 0.3)])
def test_a_screen_on_a_tray_or_away_from_it_is_within_the_range(
    radius: float, above: float
) -> None:
    found = wire_over_plane(radius=radius, height=radius + above)
    assert SCREEN_TO_EARTH.low <= found <= SCREEN_TO_EARTH.high


def test_the_resistance_is_that_of_a_millimetre_or_two_of_copper() -> None:
    # Common practice, no source: 17.24 nΩ·m over 0.5 to 3.5 mm² of wires.
    assert SCREEN_RESISTANCE.low == pytest.approx(17.24e-9 / 3.5e-6, rel=0.02, abs=0)
    assert SCREEN_RESISTANCE.low < 17.24e-9 / 1.15e-6 < SCREEN_RESISTANCE.high
