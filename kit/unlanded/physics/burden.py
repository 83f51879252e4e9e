"""A burden: the admittance of whatever is connected between two points of a run."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from ..errors import Refused


@dataclass(frozen=True)
class Burden:
    """Front resistance in series with [(resistance + inductance) beside capacitance].

    One form covers a digital meter (10 MΩ beside 100 pF), a coil tester (resistance with
    inductance), a bleeder, a lamp, an insulation defect and the body model
    (500 Ω before 1500 Ω beside 0.22 µF).

    Parameters
    ----------
    resistance : [ohm], at least 0; `inf` leaves only the capacitance
    inductance : in series with the resistance [H], at least 0
    capacitance : beside both [F], at least 0
    front_resistance : in series with all of it [ohm], at least 0
    """

    resistance: float = math.inf
    inductance: float = 0.0
    capacitance: float = 0.0
    front_resistance: float = 0.0

    def __post_init__(self) -> None:
        for word in ("resistance", "inductance", "capacitance", "front_resistance"):
            value = getattr(self, word)
            if not value >= 0 or (math.isinf(value) and word != "resistance"):
                finite = "" if word == "resistance" else " and finite"
                raise Refused("burden", f"{word.replace('_', ' ')} must be at least 0{finite}",
                              given=value)
        if self.resistance == self.inductance == self.front_resistance == 0:
            raise Refused("burden", "a resistance of 0 Ω is a bond", hint="bond the two points")

    def admittance(self, frequency: ArrayLike) -> NDArray[np.complex128]:
        """Admittance [S] at each frequency [Hz]; the shape of `frequency`.

        >>> complex(Burden(resistance=10e6).admittance(50.0))
        (1e-07+0j)
        """
        omega = 2 * np.pi * np.asarray(frequency, dtype=float)
        inner = np.zeros(omega.shape, dtype=complex) + 1j * omega * self.capacitance
        if self.resistance == 0 and self.inductance == 0:
            return np.full(omega.shape, 1 / self.front_resistance, dtype=complex)
        if math.isfinite(self.resistance):
            inner = inner + 1 / (self.resistance + 1j * omega * self.inductance)
        return np.asarray(inner / (1 + self.front_resistance * inner))
