"""The terminals of a line from its chain matrix, by a dense solve, without the kit's network."""

from __future__ import annotations

import numpy as np


def ladder_chain(series, shunt, *, length, sections):
    """Chain matrix (2n, 2n) of π sections, shunt, series and shunt raised to a power."""
    one, none = np.eye(len(series)), np.zeros_like(series)
    z, y = series * length / sections, shunt * length / sections
    half = np.block([[one, none], [-y / 2, one]])
    return np.linalg.matrix_power(half @ np.block([[one, -z], [none, one]]) @ half, sections)


def port_admittance(chain):
    """Currents into a line at its near and far ends from the voltages there, (2n, 2n)."""
    n = len(chain) // 2
    a, b, c, d = chain[:n, :n], chain[:n, n:], chain[n:, :n], chain[n:, n:]
    inverse = np.linalg.inv(b)
    return np.block([[-inverse @ a, inverse], [d @ inverse @ a - c, -d @ inverse]])


def terminal_voltages(admittance, held):
    """Voltage of every terminal with those in `held` at their voltages and no current elsewhere."""
    fixed = list(held)
    free = [k for k in range(len(admittance)) if k not in held]
    out = np.zeros(len(admittance), dtype=complex)
    out[fixed] = list(held.values())
    inward = admittance[np.ix_(free, fixed)] @ out[fixed]
    out[free] = -np.linalg.solve(admittance[np.ix_(free, free)], inward)
    return out
