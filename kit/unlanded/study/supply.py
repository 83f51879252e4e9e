"""What feeds a run."""

from __future__ import annotations

import cmath
import math
from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Literal

from ..errors import Mistake, Refused

NEUTRAL = "N"


@dataclass(frozen=True)
class Supply:
    """What feeds the run, with its neutral bonded to earth at the source.

    Parameters
    ----------
    voltage : line to neutral, RMS [V], above 0
    frequency : [Hz], above 0
    phases : 1 (line L), 2 (L1 and L2, 180° apart) or 3 (L1, L2, L3, 120° apart)
    resistance, inductance : of the source, in each line [ohm], [H], at least 0
    harmonics : by order, the share of `voltage` at that multiple of the frequency

    >>> Supply(230.0, 50.0, phases=3).lines
    ('L1', 'L2', 'L3')
    """

    voltage: float
    frequency: float
    phases: Literal[1, 2, 3] = 1
    resistance: float = 0.0
    inductance: float = 0.0
    harmonics: Mapping[int, float] = field(default_factory=dict)

    def __post_init__(self) -> None:
        mistakes = [
            Mistake(f"supply {name}", f"must be above 0 {unit}", f"{value:g} {unit}")
            for name, unit, value in (("voltage", "V", self.voltage),
                                      ("frequency", "Hz", self.frequency))
            if not (value > 0 and math.isfinite(value))
        ]
        if self.phases not in (1, 2, 3):
            mistakes.append(Mistake("supply phases", "must be 1, 2 or 3", str(self.phases)))
        if not (min(self.resistance, self.inductance) >= 0
                and math.isfinite(self.resistance + self.inductance)):
            mistakes.append(Mistake("supply", "resistance and inductance must be at least 0",
                                    f"{self.resistance:g} Ω, {self.inductance:g} H"))
        if not all(n >= 2 and 0 <= share <= 1 for n, share in self.harmonics.items()):
            mistakes.append(Mistake("supply harmonics", "are orders from 2 with a share of 0 to 1",
                                    str(dict(self.harmonics))))
        if mistakes:
            raise Refused.all_of(mistakes)

    @property
    def lines(self) -> tuple[str, ...]:
        """Names of the live lines."""
        return ("L",) if self.phases == 1 else tuple(f"L{k + 1}" for k in range(self.phases))

    def phasor(self, line: str, *, order: int = 1) -> complex:
        """Open-circuit voltage of a line to neutral at a multiple of the frequency, RMS [V].

        >>> Supply(120.0, 60.0, phases=2).phasor("L2").real
        -120.0
        """
        share = 1.0 if order == 1 else self.harmonics.get(order, 0.0)
        turn = self.lines.index(line) / self.phases
        return self.voltage * share * cmath.exp(-2j * math.pi * order * turn)
