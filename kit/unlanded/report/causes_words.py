"""Plain words for readings that were taken, and for readings that could be."""

from __future__ import annotations

import math
from collections.abc import Iterable

from ..errors import listed
from ..study.next_reading import Candidate
from ..study.observation import Action, Observation
from ..units import show
from .words import pair_words


def reading_words(r: Observation) -> str:
    """A reading in a few words."""
    return (f"{r.text}, {r.instrument.name}, {pair_words(r.pair.a, r.pair.b)}"
            f"{conditions(r.actions, r.resistor)}")


def candidate_words(c: Candidate) -> str:
    """A measurement in a few words."""
    return (f"{c.instrument.name}, {pair_words(c.pair.a, c.pair.b)}"
            f"{conditions(c.actions, c.resistor)}")


def conditions(actions: Iterable[Action], resistor: float) -> str:
    """What was done before a reading, and what was put beside the instrument.

    >>> conditions(frozenset(), 100e3), conditions(["loads off"], math.inf)
    (', 100 kΩ beside it', ', loads off')
    """
    words: list[str] = sorted(actions)
    if math.isfinite(resistor):
        words.append(f"{show(resistor, 'Ω')} beside it")
    return f", {listed(words)}" if words else ""
