"""The capacitive divider: what an open conductor offers, and what an instrument makes of it.

All arguments are in base SI; numbers and numpy arrays broadcast together, and the result has
their common shape.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from .arguments import Array, checked, number, require


@dataclass(frozen=True)
class Thevenin:
    """A capacitive source seen from the open conductor: unloaded voltage behind a capacitance.

    Parameters
    ----------
    voltage : unloaded, RMS [V]
    capacitance : of the source [F]
    """

    voltage: Array
    capacitance: Array

    def impedance(self, *, frequency: ArrayLike) -> Array:
        """Magnitude of the source impedance, 1 / (2 π f C) [ohm], at `frequency` [Hz].

        >>> source = divider(voltage=230.0, coupling=1e-9, to_earth=1e-9)
        >>> round(float(source.impedance(frequency=50.0)))  # 1 / (314.159 × 2 nF)
        1591549
        """
        return 1 / (_omega(frequency) * self.capacitance)

    def current(self, *, frequency: ArrayLike) -> Array:
        """The most it can drive, through a bond [A]: the measure of what a person would feel.

        >>> source = divider(voltage=230.0, coupling=1e-9, to_earth=1e-9)
        >>> round(float(source.current(frequency=50.0)) * 1e6, 2)  # 314.159 × 1 nF × 230 V
        72.26
        """
        return self.voltage * _omega(frequency) * self.capacitance


def divider(*, voltage: ArrayLike, coupling: ArrayLike, to_earth: ArrayLike) -> Thevenin:
    """What an open conductor offers: V Cm / (Cm + Cg) behind Cm + Cg.

    Parameters
    ----------
    voltage : V, of the live neighbour to earth, RMS [V], at least 0
    coupling : Cm, between the open conductor and the live one [F], at least 0
    to_earth : Cg, from the open conductor to everything earthed [F], at least 0

    For one live neighbour, no leakage, and a run short against its own impedance. Raises
    `Refused`. Source: circuit theory.

    >>> source = divider(voltage=120.0, coupling=3e-9, to_earth=1e-9)
    >>> float(source.voltage), float(source.capacitance)
    (90.0, 4e-09)
    """
    v, mutual, ground = checked(voltage=voltage, coupling=coupling, to_earth=to_earth)
    require(v >= 0, "voltage", "must be at least 0 V", v, "V")
    require(mutual >= 0, "coupling", "must be at least 0 F", mutual, "F")
    require(ground >= 0, "to_earth", "must be at least 0 F", ground, "F")
    require(mutual + ground > 0, "coupling and to_earth", "must not both be 0 F", ground, "F")
    return Thevenin(v * mutual / (mutual + ground), mutual + ground)


def reading(
    source: Thevenin,
    *,
    frequency: ArrayLike,
    resistance: ArrayLike,
    capacitance: ArrayLike = 0.0,
) -> Array:
    """What an instrument of the given input shows on `source`, RMS [V].

    V C / |C + Cin + 1 / (j 2π f Rin)|

    Parameters
    ----------
    source : from `divider`
    frequency : f [Hz], above 0
    resistance : Rin, of the input [ohm], above 0; `inf` leaves only the capacitance
    capacitance : Cin, beside it, with the leads [F], at least 0

    Raises `Refused`. Source: circuit theory. A low reading says only that the source is weak
    or the instrument heavy: it does not prove a conductor is disconnected.

    >>> phantom = divider(voltage=230.0, coupling=12.5e-12, to_earth=63.6e-12)  # 1 m of cable
    >>> round(float(reading(phantom, frequency=50.0, resistance=10e6, capacitance=100e-12)), 1)
    7.9
    """
    r = number("resistance", resistance)
    c = number("capacitance", capacitance)
    require(r > 0, "resistance", "must be above 0 Ω", r, "Ω")
    require((c >= 0) & np.isfinite(c), "capacitance", "must be at least 0 F", c, "F")
    loaded = source.capacitance + c - 1j / (_omega(frequency) * r)
    return np.asarray(source.voltage * source.capacitance / np.abs(loaded))[()]


def loading_error(
    source: Thevenin,
    *,
    frequency: ArrayLike,
    resistance: ArrayLike,
    capacitance: ArrayLike = 0.0,
) -> Array:
    """How far the reading lies from the unloaded voltage, relative to it [1]: −1 to 0.

    It does not depend on the voltage. Arguments, refusals and source as for `reading`.

    >>> phantom = divider(voltage=230.0, coupling=12.5e-12, to_earth=63.6e-12)
    >>> round(float(loading_error(phantom, frequency=50.0, resistance=3e3)), 4)
    -0.9999
    """
    unit = Thevenin(np.asarray(1.0), source.capacitance)
    shown = reading(unit, frequency=frequency, resistance=resistance, capacitance=capacitance)
    return np.asarray(shown - 1)[()]


def _omega(frequency: ArrayLike) -> Array:
    f = number("frequency", frequency)
    require((f > 0) & np.isfinite(f), "frequency", "must be above 0 Hz", f, "Hz")
    return np.asarray(2 * np.pi * f)
