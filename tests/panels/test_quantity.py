"""What a box holds: round values in the system of units that is shown, and what it refuses."""

from __future__ import annotations

import pytest

from unlanded.errors import Refused
from unlanded.panels.quantity import Quantity, written
from unlanded.units import FOOT, si

LENGTH = Quantity("Run length", "m", 1.0, 1000.0)


@pytest.mark.parametrize("customary", [False, True])
def test_handle_s_values_are_round_as_they_are_shown(customary: bool) -> None:
    grid = LENGTH.grid(customary=customary)
    assert list(grid) == sorted(set(grid))
    shown = [v / (FOOT if customary else 1.0) for v in grid]
    assert all(f"{v:.9g}" == f"{float(f'{v:.3g}'):.9g}" for v in shown)
    assert grid[0] == pytest.approx(1.0, rel=2e-3, abs=0)
    assert grid[-1] == pytest.approx(1000.0, rel=2e-3, abs=0)


def test_whole_numbers() -> None:
    pieces = Quantity("Pieces", "1", 0.0, 20.0, log=False)
    assert pieces.grid() == tuple(float(n) for n in range(21))
    assert pieces.si("12") == 12.0
    for text in ("1.5", "-1"):
        with pytest.raises(Refused, match="Pieces: must be a whole number"):
            pieces.si(text)


@pytest.mark.parametrize(("value", "unit"), [
    (45.72, "m"), (0.00508, "m"), (0.25, "m"), (3.3e6, "ohm"), (999e6, "ohm"), (1e3, "ohm"),
])  # fmt: skip
@pytest.mark.parametrize("customary", [False, True])
def test_what_is_written_means_the_value(value: float, unit: str, customary: bool) -> None:
    assert si(written(value, unit, customary=customary), unit) == pytest.approx(
        value, rel=5e-6, abs=0)
