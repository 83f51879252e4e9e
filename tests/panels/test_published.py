"""Holding a value against a printed one: half of the last printed digit, and not a bit more."""

from __future__ import annotations

import pytest

from unlanded.errors import Refused
from unlanded.panels.published import against


@pytest.mark.parametrize(("value", "printed", "unit"), [
    (14.849e-12, "14.8 pF/m", "F/m"), (-18.71551e-12, "-18.716 pF/m", "F/m"),
    (0.8459e6, "0.85 Mohm", "ohm"), (0.0404, "0.04 s", "s"), (1.04e1, "10 V", "V"),
])  # fmt: skip
def test_agrees(
    capsys: pytest.CaptureFixture[str], value: float, printed: str, unit: str
) -> None:
    against("what", value, printed, unit, "a book")
    assert f"here, {printed} in a book" in capsys.readouterr().out


@pytest.mark.parametrize(("value", "printed", "unit"), [
    (14.851e-12, "14.8 pF/m", "F/m"), (18.716e-12, "-18.716 pF/m", "F/m"),
    (0.8449e6, "0.85 Mohm", "ohm"), (float("nan"), "10 V", "V"), (1.01 * 37.432, "37.432 V", "V"),
])  # fmt: skip
def test_differs(value: float, printed: str, unit: str) -> None:
    with pytest.raises(Refused, match="what: is not the"):
        against("what", value, printed, unit, "a book")
