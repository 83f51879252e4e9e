"""From a register to the margins of all its devices."""

from __future__ import annotations

import cmath
import math
from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import NDArray

from ..errors import Refused, nearest
from ..reference.equipment import equipment
from ..study.regrouping import Regrouping, regroup
from ..study.screening import COLUMNS, Screened, ranks, screen
from ..study.standing import Bank, Complex, Real
from ..study.supply import Supply
from .register import LINES, Register, board, cable_capacitances

LARGEST_BOARD = 60  # circuits that are regrouped without being asked


@dataclass(frozen=True, eq=False)
class Screening:
    """A register worked out.

    Parameters
    ----------
    most : of each circuit, everything on and at its likely size [A]
    arithmetic : the same added as numbers behind each device [A]
    regrouping : of the board that was asked for, or of the only one when it is small
    """

    register: Register
    supply: Supply
    screened: Screened
    most: Real
    arithmetic: Real
    regrouping: Regrouping | None


def screen_register(
    register: Register,
    folder: Path,
    supply: Supply,
    *,
    progress: Callable[[int], object] = lambda _: None,
    regroup_board: str | None = None,
) -> Screening:
    """Screen every device; `folder` holds the case files that the register names as cables.

    L1, L2 and L3 are 120° apart. `regroup_board` is refused where the register has no such board.
    """
    cable, spread = _cables(register, folder, supply)
    loads = _loads(register)
    turns, line = _turns(register), register.circuits["line"].to_numpy()
    balanced = line == "balanced"
    three = bool(np.isin(line, LINES).any())
    uncertain = ((spread[1] > spread[0]) | ((line == "") & three)) & ~balanced
    count = len(register.devices)
    fixed = np.zeros(count, dtype=complex)
    np.add.at(fixed, register.owner, np.where(uncertain | balanced, 0.0, 1j * cable * turns))
    most = np.where(balanced, 0.0, cable + loads["count"] * loads["likely"])
    # An unknown board is refused here, before the long work.
    regrouping = _regrouped(register, most, regroup_board)
    rows = _bank(register, (1j * cable * turns, *spread, uncertain), loads, turns, three)
    screened = screen(list(register.devices.values()), rows, fixed, progress=progress)
    return Screening(register, supply, screened, most,
                     np.bincount(register.owner, most, minlength=count).astype(float), regrouping)


def _turns(register: Register) -> Complex:
    """Phasor of unit size of each circuit's line; that of an unknown line is drawn."""
    of = {line: cmath.exp(-2j * math.pi * k / 3) for k, line in enumerate(LINES)}
    return np.asarray(register.circuits["line"].map(of).fillna(1.0).to_numpy(dtype=complex))


def _cables(register: Register, folder: Path, supply: Supply) -> tuple[Real, tuple[Real, Real]]:
    """Likely cable current of each circuit [A], and its limits against that [1]."""
    omega = 2 * math.pi * supply.frequency
    solved = {"": (0.0, 0.0, 0.0), **cable_capacitances(register, folder)}
    of = np.array([solved[c] for c in register.cables]).reshape(-1, 3)
    number = {c: k for k, c in enumerate(register.cables)}
    likely, low, high = of[register.circuits["cable"].map(number).to_numpy(dtype=int)].T
    measured = register.circuits["leakage [mA]"].notna().to_numpy()
    length = np.where(measured, 0.0, register.circuits["length [m]"].fillna(0.0))
    scale = np.where(likely > 0, likely, 1.0)
    current = omega * supply.voltage * likely * length
    return current, (np.where(current > 0, low / scale, 1.0),
                     np.where(current > 0, high / scale, 1.0))


def _loads(register: Register) -> dict[str, Any]:
    """Of each circuit's equipment: pieces, likely current of one [A], limits, use."""
    rows = register.circuits
    measured = rows["leakage [mA]"].to_numpy() * 1e-3
    classes = {name: equipment(name) for name in rows["equipment"].unique() if name}
    kinds = {"": (0.0, 1.0, 1.0),
             **{n: (v.likely, v.low / v.likely, v.high / v.likely) for n, v in classes.items()}}
    likely, low, high = np.array(rows["equipment"].map(kinds).to_list()).reshape(-1, 3).T
    known = ~np.isnan(measured)
    pieces = rows["pieces"].fillna(1.0).to_numpy()
    return {
        "likely": np.where(known, measured, likely), "low": np.where(known, 1.0, low),
        "high": np.where(known, 1.0, high), "count": np.where(known, 1, pieces).astype(np.int64),
        "use": np.where(known, 1.0, rows["use [%]"].fillna(100.0).to_numpy() / 100),
    }


def _bank(
    register: Register,
    cable: tuple[Complex, Real, Real, NDArray[np.bool_]],
    loads: dict[str, Any],
    turns: Complex,
    three: bool,
) -> Bank:
    """Rows with something to draw: uncertain cables, and the equipment of each circuit.

    `cable` is its phasor [A], its limits [1], and whether it is to be drawn.
    """
    line = register.circuits["line"].to_numpy()
    phasor, low, high, uncertain = cable
    loaded = (loads["likely"] * loads["count"] > 0) & (line != "balanced")
    of = np.concatenate([np.flatnonzero(uncertain), np.flatnonzero(loaded)])
    is_load = np.arange(len(of)) >= uncertain.sum()
    order = np.argsort(register.owner[of], kind="stable")
    of, is_load = of[order], is_load[order]
    owner = register.owner[of]

    def pick(of_cable: Any, of_load: Any) -> Any:
        return np.where(is_load, np.broadcast_to(of_load, line.shape)[of],
                        np.broadcast_to(of_cable, line.shape)[of])

    return Bank(
        (1,), pick(phasor, loads["likely"] * turns)[None], np.zeros(len(of)),
        pick(low, loads["low"]), pick(high, loads["high"]), is_load,
        np.asarray((line[of] == "") & three), pick(1, loads["count"]), pick(1.0, loads["use"]),
        COLUMNS * ranks(owner)[:, None] + np.arange(COLUMNS), 3 if three else 1, owner)


def _regrouped(register: Register, most: Real, name: str | None) -> Regrouping | None:
    if name is None:
        small = len(set(register.boards)) == 1 and len(register.owner) <= LARGEST_BOARD
        if not small:
            return None
        name = register.boards[0]
    if name not in register.boards:
        raise Refused("board", "is not in this register", given=name,
                      hint=nearest(name, sorted(set(register.boards))))
    circuits, places = board(register, most, name)
    return regroup(circuits, places) if circuits and len(places) > 1 else None
