"""Reading a register: a CSV of residual-current devices and the circuits behind them.

A row without a circuit is a device; the others are circuits, each behind a device of the register.
Headings that carry a unit are written so: "length [m]". Rows are counted from 1, the heading's.

A device's row has its rated current, kind and type, and in "line" the lines it can serve, all of
them where it is empty. A circuit's row has its line, length and cable (such as "150 pF/m", or the
name of a case file beside the register), and its equipment by class with pieces and use; a
"leakage [mA]" that was measured stands for cable and equipment both.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from functools import cached_property
from pathlib import Path
from typing import TYPE_CHECKING, Any

import numpy as np

from ..errors import Mistake, Refused, nearest
from ..reference.devices import Device
from ..reference.equipment import equipment
from ..study.regrouping import Circuit, Place
from ..study.residual import recommended_current
from ..units import si
from .behind import capacitance_per_metre
from .build import build_run
from .loading import load_case
from .sheets import read_sheet

if TYPE_CHECKING:
    import pandas as pd

NEEDED = ("device", "circuit", "rated [mA]", "line", "length [m]", "cable")
OPTIONAL = ("board", "kind", "waveform", "equipment", "pieces", "leakage [mA]", "use [%]", "pinned")
LINES = ("L1", "L2", "L3")
NAMED = 20  # mistakes told one by one
_NUMBERS: Mapping[str, tuple[float, float]] = {
    "rated [mA]": (1.0, 1e5), "length [m]": (0.0, 1e5), "pieces": (0.0, 10_000.0),
    "leakage [mA]": (0.0, 1e5), "use [%]": (0.0, 100.0),
}
_FORMULA = "=+-@"


@dataclass(frozen=True, eq=False)
class Register:
    """Devices and circuits; circuits are in the order of their devices.

    Parameters
    ----------
    name : of the file
    devices : by name, in the file's order
    boards, device_lines : of each device; "" where the register does not say
    circuits : the rows of circuits as text, with the numbers of the numeric columns as floats
    owner : number of each circuit's device
    """

    name: str
    devices: Mapping[str, Device]
    boards: tuple[str, ...]
    device_lines: tuple[str, ...]
    circuits: pd.DataFrame
    owner: np.ndarray[Any, np.dtype[np.int64]]

    @cached_property
    def cables(self) -> tuple[str, ...]:
        """What the register says of cables, each once: identical runs are solved once."""
        return tuple(dict.fromkeys(self.circuits["cable"]))


def read_register(path: Path) -> Register:
    """The register in a CSV file; refused with every mistake found, by row and column."""
    table = read_sheet(path)
    _refuse_columns(path.name, list(table.columns))
    for column in OPTIONAL:
        if column not in table:
            table[column] = ""
    table = table.apply(lambda column: column.str.strip())
    table["row"] = np.arange(2, len(table) + 2)
    found = [*_formulas(table), *_numbers(table)]
    is_device = table["circuit"] == ""
    devices = _devices(table[is_device], found)
    circuits = table[~is_device]
    found += _circuits(circuits, devices)
    if not devices and not found:
        found.append((1, "circuit", "no row is a device: a device's row has no circuit", ""))
    if found:
        raise Refused.all_of(_told(path.name, found))
    owner = circuits["device"].map({name: k for k, name in enumerate(devices)}).to_numpy(np.int64)
    order = np.argsort(owner, kind="stable")
    rows = table[is_device]
    return Register(path.name, devices, tuple(rows["board"]), tuple(rows["line"]),
                    circuits.iloc[order].reset_index(drop=True), owner[order])


_Found = tuple[int, str, str, str]
"""Row, column, rule, what was given."""


def _told(name: str, found: Sequence[_Found]) -> Iterator[Mistake]:
    """In the order of the rows; of several mistakes in one cell, the first that was found."""
    cells: dict[tuple[int, str], _Found] = {}
    for one in found:
        cells.setdefault(one[:2], one)
    ordered = sorted(cells.values(), key=lambda f: f[0])
    for row, column, rule, given in ordered[:NAMED]:
        yield Mistake(f'{name} row {row}, column "{column}"', rule, given)
    if len(ordered) > NAMED:
        yield Mistake(name, f"has {len(ordered) - NAMED} mistakes more")


def _refuse_columns(name: str, headings: Sequence[str]) -> None:
    known = (*NEEDED, *OPTIONAL)
    found = [Mistake(f'{name} row 1, column "{c}"', "is missing", "", nearest(c, headings))
             for c in NEEDED if c not in headings]
    found += [Mistake(f'{name} row 1, column "{c}"', "is not a column of a register", "",
                      nearest(c, known)) for c in headings if c not in known]
    found += [Mistake(f'{name} row 1, column "{c}"', "is there twice")
              for c in dict.fromkeys(headings) if list(headings).count(c) > 1]
    if found:
        raise Refused.all_of(found)


def _formulas(table: pd.DataFrame) -> list[_Found]:
    """Cells that a spreadsheet would run; a negative number is left to the check of numbers."""
    found: list[_Found] = []
    for column in (c for c in (*NEEDED, *OPTIONAL) if c not in _NUMBERS):
        runs = table[column].str[:1].isin(list(_FORMULA)).to_numpy()
        found += [(int(r), column, "begins like a formula that a spreadsheet would run", str(t))
                  for r, t in zip(table["row"][runs], table[column][runs], strict=True)]
    return found


def _numbers(table: pd.DataFrame) -> list[_Found]:
    """Turns the numeric columns into floats, NaN where empty; what is not a number is found."""
    import pandas as pd

    found: list[_Found] = []
    for column, (low, high) in _NUMBERS.items():
        text = table[column]
        value = pd.to_numeric(text.str.replace(",", ".", regex=False), errors="coerce")
        table[column] = value
        unread = (text != "") & value.isna()
        whole = column == "pieces"
        outside = (value < low) | (value > high) | (whole & (value % 1 > 0))
        rules = ((unread, "is not a number"),
                 (outside, f"must be {low:g} to {high:g}{' and whole' * whole}"))
        for wrong, rule in rules:
            found += [(int(r), column, rule, str(t))
                      for r, t in zip(table["row"][wrong], text[wrong], strict=True)]
    return found


def _devices(rows: pd.DataFrame, found: list[_Found]) -> dict[str, Device]:
    devices: dict[str, Device] = {}
    for row in rows.itertuples(index=False):
        name, rated, kind, waveform, number = (
            row[rows.columns.get_loc(c)]
            for c in ("device", "rated [mA]", "kind", "waveform", "row"))
        if not name or name in devices:
            found.append((number, "device", "is there twice" if name else "is missing", name))
        elif np.isnan(rated):
            found.append((number, "rated [mA]", "is missing", ""))
        else:
            try:
                devices[name] = Device(float(f"{rated / 1e3:.12g}"), kind or "general",
                                       waveform or None)
            except Refused as refusal:
                for m in refusal.mistakes:
                    column = m.place.rpartition(", ")[2].replace("rated", "rated [mA]")
                    found.append((number, column, m.rule, m.given))
    return devices


def _circuits(rows: pd.DataFrame, devices: Mapping[str, Device]) -> list[_Found]:
    found: list[_Found] = []

    def check(column: str, wrong: Any, rule: Any) -> None:
        found.extend((int(r), column, rule(t) if callable(rule) else rule,
                      t if isinstance(t, str) else "")
                     for r, t in zip(rows["row"][wrong], rows[column][wrong], strict=True))

    check("device", ~rows["device"].isin(list(devices)),
          lambda t: f"is not a device of this register ({nearest(t, list(devices))})")
    check("line", ~rows["line"].isin(["", "L", *LINES, "balanced"]),
          "must be L, L1, L2, L3, balanced or empty")
    measured = rows["leakage [mA]"].notna()
    check("length [m]", rows["length [m]"].isna() & ~measured, "is missing")
    check("cable", (rows["cable"] == "") & ~measured, "is missing")
    check("pinned", ~rows["pinned"].isin(["", "yes", "no"]), "must be yes, no or empty")
    classes = rows["equipment"].map({t: _is_class(t) for t in rows["equipment"].unique()})
    check("equipment", ~classes.astype(bool), "is not a known class of equipment")
    return found


def _is_class(name: str) -> bool:
    if name == "":
        return True
    try:
        equipment(name)
    except Refused:
        return False
    return True


def cable_capacitances(register: Register, folder: Path) -> dict[str, tuple[float, float, float]]:
    """Likely, lowest and highest capacitance of a line to earth [F/m] of each cable.

    A cable is a capacitance per metre, such as "150 pF/m", or the name of a case file in `folder`,
    whose run is solved once however many circuits have it.
    """
    return {text: _cable(register.name, text, folder) for text in register.cables if text}


def _cable(name: str, text: str, folder: Path) -> tuple[float, float, float]:
    try:
        if text.endswith(".toml"):
            case = load_case(folder / text)
            likely, low, high = (capacitance_per_metre(build_run(case, limit))
                                 for limit in ("likely", "low", "high"))
            return likely, low, high
        value = si(text, "F/m", place="cable")
        return value, value, value
    except Refused as refusal:
        raise refusal.at(f'{name}, cable "{text}"') from None


def board(
    register: Register, currents: np.ndarray[Any, np.dtype[np.float64]], name: str
) -> tuple[list[Circuit], list[Place]]:
    """One board for regrouping: its circuits with the most they leak [A], and its devices."""
    names = list(register.devices)
    here = [k for k, b in enumerate(register.boards) if b == name]
    places = [Place(names[k], _limit(register.devices[names[k]]),
                    tuple(register.device_lines[k].split()) or ("L", *LINES)) for k in here]
    rows = register.circuits
    circuits = [
        Circuit(f"{names[owner]}: {rows['circuit'][i]}", rows["line"][i] or "L1",
                float(currents[i]),
                names[owner], rows["pinned"][i] == "yes")
        for i, owner in enumerate(register.owner)
        if owner in here and rows["line"][i] != "balanced"]
    return circuits, places


def _limit(device: Device) -> float:
    recommended = recommended_current(device)
    return device.non_operating if np.isnan(recommended) else recommended
