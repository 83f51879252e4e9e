"""Holding a computed value against one that is printed elsewhere, as the notebooks do."""

from __future__ import annotations

import re

from ..errors import Refused
from ..units import show, si

_DECIMALS = re.compile(r"\s*[-−+]?\d*\.?(\d*)\S*\s*(.*)", re.DOTALL)


def against(what: str, value: float, printed: str, unit: str, source: str) -> None:
    """Print a value in base SI beside a printed one; refused where they differ.

    Parameters
    ----------
    printed : as it stands in the source, with its unit; half its last digit is allowed
    unit : in base SI, as `units.si` takes it

    >>> against("two wires", 14.84467e-12, "14.8 pF/m", "F/m", "a textbook")
    two wires: 14.8447 pF/m here, 14.8 pF/m in a textbook
    """
    there = si(printed, unit, place=what)
    digits = _DECIMALS.match(printed)
    assert digits is not None
    half = 0.5 * si(f"1e-{len(digits[1])} {digits[2]}".strip(), unit, place=what)
    symbol = {"ohm": "Ω", "1": ""}.get(unit, unit)
    ours = show(value, symbol, 6)
    if not abs(value - there) <= half * (1 + 1e-9):
        raise Refused(what, f"is not the {printed} of {source}", given=ours)
    print(f"{what}: {ours} here, {printed} in {source}")
