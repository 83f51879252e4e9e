"""A lamp behind a rectifier: it conducts only where the voltage exceeds that of its chips.

Its current behind a weak source is found in the time domain, so that lamp and source agree.
"""

from __future__ import annotations

from itertools import pairwise

import numpy as np
from numpy.typing import ArrayLike, NDArray

Real = NDArray[np.float64]
STEPS = 256  # of a cycle, a multiple of 4 so that crests are among them
CYCLES = 6  # at most, until one half of a cycle is like the other
SETTLED = 1e-9


def rectified_current(
    *, voltage: ArrayLike, impedance: ArrayLike, frequency: float, conducts_from: float
) -> Real:
    """Mean rectified current (B,) [A] through a lamp put on a Thevenin source.

    Parameters
    ----------
    voltage : of the source, unloaded, RMS phasor (B,) [V]
    impedance : of the source, with what stands in series with the lamp (B,) [ohm], not 0
    frequency : [Hz], above 0
    conducts_from : voltage of the lit chips and their rectifier [V], at least 0

    The source is taken as conductance beside capacitance, fitted at `frequency`: between two
    moments of conduction its capacitance is recharged, in conduction the voltage stays. A source
    that is not capacitive has no such dead time: its current is what drives the difference of
    voltages, while there is one. A capacitance alone passes 4 f C (√2 V − V₀), the charge pump's
    formula:

    >>> z = 1 / (2j * np.pi * 50 * 10e-9)
    >>> i = rectified_current(voltage=100.0, impedance=z, frequency=50.0, conducts_from=60.0)
    >>> round(float(i[0]) * 1e6, 2)  # 4 × 50 × 10 nF × (141.42 − 60) V
    162.84
    """
    v = np.atleast_1d(np.abs(np.asarray(voltage)))
    y = 1 / np.atleast_1d(np.asarray(impedance, dtype=complex))
    v, y = np.broadcast_arrays(v, y)
    omega = 2 * np.pi * frequency
    c, g = y.imag / omega, np.maximum(y.real, 0.0)
    stiff = c * omega <= 1e-3 * np.abs(y)
    return np.where(stiff, _solid(v, conducts_from) * np.abs(y),
                    _clamped(v, np.where(stiff, 1.0, c), g, omega, conducts_from))


def _solid(v: Real, level: float) -> Real:
    """Mean [V] of what a crest's half wave has above the level: it conducts from `dark` on."""
    crest = np.sqrt(2) * v
    lit = crest > level
    dark = np.arcsin(level / np.where(lit, crest, np.inf))
    return np.where(lit, crest * np.cos(dark) - level * (np.pi / 2 - dark), 0.0) * 2 / np.pi


def _clamped(v: Real, c: Real, g: Real, omega: float, level: float) -> Real:
    """Trapezoidal steps over half cycles; what a step would carry past ±level goes to the lamp.

    The second half of a cycle is the first with all signs turned, and so is the next start; it
    settles within two or three halves wherever the lamp conducts.
    """
    step = 2 * np.pi / omega / STEPS
    source = np.sqrt(2) * v * np.sin(2 * np.pi * np.arange(STEPS // 2 + 1) / STEPS)[:, None]
    now, charge = np.zeros_like(v), np.zeros_like(v)
    stores, leaks = c + g * step / 2, c - g * step / 2
    for _ in range(2 * CYCLES):
        start, charge = now, np.zeros_like(v)
        for before, after in pairwise(source):
            free = (now * leaks + c * (after - before) + g * step * (after + before) / 2) / stores
            now = np.clip(free, -level, level)
            charge += np.abs(free - now) * stores
        now = -now
        if np.abs(now - start).max() <= SETTLED * np.abs(v).max():
            break
    return np.asarray(charge * omega / np.pi)
