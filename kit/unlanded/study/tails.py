"""Normal scores stretched outward, for what is now and then far from what is described.

A score z stands for the value sinh z / sinh 1, so that 1 stays 1: a symmetric case of Johnson's
unbounded system (Biometrika 36, 1949). Out to a score of 3, one in 400, it is between Student's
distributions with 2 and with 3 degrees of freedom; farther out its tails fall faster than theirs.
"""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import ArrayLike, NDArray

Real = NDArray[np.float64]

FARTHEST = 6.0  # score: one in 10⁹ is beyond, and counts as this
_SINH = math.sinh(1.0)


def stretched(score: ArrayLike) -> Real:
    """The value of a normal score, any shape.

    >>> stretched([-1.0, 0.0, 1.0, 2.0]).round(2)
    array([-1.  ,  0.  ,  1.  ,  3.09])
    """
    held = np.clip(score, -FARTHEST, FARTHEST)
    return np.asarray(np.sinh(held) / _SINH)


def relaxed(value: ArrayLike) -> Real:
    """The normal score of a stretched value.

    >>> relaxed([1.0, 3.09]).round(2)
    array([1., 2.])
    """
    return np.asarray(np.arcsinh(np.asarray(value) * _SINH))


def density(value: ArrayLike) -> Real:
    """Of stretched values, any shape; it integrates to 1.

    >>> round(float(density(0.0)), 3)  # sinh 1 / √(2π)
    0.469
    """
    x = np.asarray(value, dtype=float)
    normal = np.exp(-relaxed(x) ** 2 / 2) / math.sqrt(2 * math.pi)
    return np.asarray(normal * _SINH / np.sqrt(1 + (_SINH * x) ** 2))


def pull(value: ArrayLike) -> Real:
    """Slope of −ln density over the value: 1 would be a normal distribution's, far out it is less.

    >>> pull([1e-6, 1.0, 10.0]).round(2)
    array([2.76, 1.34, 0.04])
    """
    x = np.maximum(np.abs(value), 1e-6)
    root = 1 + (_SINH * x) ** 2
    return np.asarray(relaxed(x) * _SINH / (np.sqrt(root) * x) + _SINH**2 / root)
