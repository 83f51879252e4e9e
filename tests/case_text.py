"""Case texts for tests: the demo sites, a small free one, and what is refused of a text."""

from __future__ import annotations

from pathlib import Path

from unlanded.case.loading import read_case
from unlanded.errors import Refused

SITES = Path(__file__).resolve().parent.parent / "workbook" / "sites"
NAMES = ("tern-quay", "alder-mill", "heron-house", "larkmoor", "chalk-hill")

# Two covered conductors, 5 mm apart; metal 2 mm and cover 4 mm across.
PAIR = """title = "pair"
[supply]
voltage = "230 V"
frequency = "50 Hz"
[run]
length = "10 m"
[run.cable]
layout = "free"
[[run.cable.conductors]]
name = "a"
x = "0 mm"
y = "0 mm"
diameter = "2 mm"
cover_diameter = "4 mm"
permittivity = 3.0
[[run.cable.conductors]]
name = "b"
x = "5 mm"
y = "0 mm"
diameter = "2 mm"
cover_diameter = "4 mm"
permittivity = 3.0
[run.ends.near]
a = "L"
b = "open"
"""


def site(name: str) -> str:
    """The text of a demo site without its remarks, so that keys occur once."""
    text = (SITES / f"{name}.toml").read_text(encoding="utf-8")
    kept = (line for line in text.split("\n") if not line.lstrip().startswith("#"))
    return "\n".join(kept).replace("  #", " #")


def changed(text: str, *changes: tuple[str, str]) -> str:
    """The text with each old part, which must be there, put in place by the new."""
    for old, new in changes:
        assert old in text, old
        text = text.replace(old, new, 1)
    return text


def refusals(text: str) -> list[str]:
    """Every mistake in a text as its sentence; none for a valid case."""
    try:
        read_case(text, "c.toml")
    except Refused as refusal:
        return [str(m) for m in refusal.mistakes]
    return []
