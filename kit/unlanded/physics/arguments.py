"""What the closed forms accept: finite numbers, or arrays of them that broadcast together."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

from ..errors import Refused

Array = NDArray[np.float64]


def number(name: str, given: ArrayLike) -> Array:
    """The argument as an array of floats; refused by name when it is anything else."""
    try:
        return np.asarray(given, dtype=float)
    except (TypeError, ValueError):
        raise Refused(name, "must be a number, or an array of them, in base SI",
                      given=repr(given)) from None


def checked(**given: ArrayLike) -> list[Array]:
    """The arguments as arrays of finite numbers that broadcast together."""
    arrays = {name: number(name, value) for name, value in given.items()}
    for name, array in arrays.items():
        require(np.isfinite(array), name, "must be a finite number", array, "")
    try:
        np.broadcast_shapes(*(array.shape for array in arrays.values()))
    except ValueError:
        shapes = ", ".join(f"{name} {array.shape}" for name, array in arrays.items())
        raise Refused("arguments", "must have shapes that broadcast together",
                      given=shapes) from None
    return list(arrays.values())


def require_above_zero(name: str, value: Array) -> None:
    """Refuses a length that is not above 0 m."""
    require(value > 0, name, "must be above 0 m", value)


def require_above(name: str, value: Array, bound: Array, words: str) -> None:
    """Refuses a length that is not above `bound` [m], which `words` express."""
    holds = np.asarray(value > bound)
    if not holds.all():
        first = np.broadcast_to(bound, holds.shape).flat[int(np.argmin(holds))]
        require(holds, name, f"must be above {words} = {first:.6g} m", value)


def require_permittivity(value: Array, name: str = "permittivity") -> None:
    """Refuses a relative permittivity below that of vacuum."""
    require(value >= 1, name, "must be at least 1", value, "")


def require(holds: NDArray[np.bool_], name: str, rule: str, value: Array, unit: str = "m") -> None:
    """Refuses with the first value of `name` where the rule does not hold."""
    if not np.all(holds):
        at = int(np.argmin(holds))
        first = np.broadcast_to(value, np.shape(holds)).flat[at]
        raise Refused(name, rule, given=f"{first:.6g} {unit}".strip())
