"""The memo's folder, which appears whole or not at all."""

from __future__ import annotations

import json
import math
import os
import shutil
import tempfile
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import numpy as np

from ..errors import Refused
from .figure import Figure
from .memo import Memo
from .tables import Table, write_csv

OURS = frozenset({"memo.docx", "memo.pdf", "figures", "tables", "results.json", "case.toml",
                  "register.csv"})


@dataclass(frozen=True)
class Contents:
    """What a memo's folder is made from.

    Parameters
    ----------
    memo : with its figures and tables
    case_text : the case file as it was read, copied byte for byte
    results : for results.json: text, numbers, truth values, lists and mappings of them; keys
        name the unit; a complex number is written as its real and imaginary parts
    template : a firm's own .docx
    paper : "a4" or "us-letter"
    more_tables : written beside the memo's own as CSV, too large for it
    case_name : of the copy of the case: "case.toml" or "register.csv"
    """

    memo: Memo
    case_text: bytes
    results: Mapping[str, Any]
    template: Path | None = None
    paper: str = "a4"
    more_tables: tuple[Table, ...] = ()
    case_name: str = "case.toml"


def write_folder(target: Path, contents: Contents, *, overwrite: bool = False) -> tuple[Path, ...]:
    """Write memo.docx, memo.pdf, figures, tables, results.json and case.toml; return their paths.

    Everything is first made in a folder beside `target`, which is then renamed. `target` must
    not exist, unless `overwrite` is asked for and it holds nothing but a memo.
    """
    target = target.absolute()
    _check(target, overwrite)
    room = Path(tempfile.mkdtemp(prefix=f".{target.name}-", dir=target.parent))
    try:
        _fill(room, contents)
        _open_to_readers(room)
        _put(room, target)
    except BaseException:
        shutil.rmtree(room, ignore_errors=True)
        raise
    return tuple(sorted(p for p in target.rglob("*") if p.is_file()))


def draw_all(figures: Iterable[Figure], folder: Path) -> dict[str, dict[str, Path]]:
    """Each figure as SVG and PNG in `folder`; returns "svg" and "png" -> key -> path."""
    from .paper import draw

    made: dict[str, dict[str, Path]] = {"svg": {}, "png": {}}
    for figure in figures:
        for form, paths in made.items():
            paths[figure.key] = folder / f"{figure.key}.{form}"
        draw(figure, *(paths[figure.key] for paths in made.values()))
    return made


def write_tables(tables: Sequence[Table], folder: Path) -> None:
    """Each table as CSV in `folder`, named by its key."""
    for table in tables:
        write_csv(table, folder / f"{table.key}.csv")


def results_text(results: Mapping[str, Any]) -> str:
    """Results as JSON in the order given, UTF-8, no NaN: what is not a number is null.

    >>> print(results_text({"voltage_V": 3 + 4j, "limit_A": float("inf")}), end="")
    {
      "voltage_V": {
        "real": 3.0,
        "imaginary": 4.0
      },
      "limit_A": null
    }
    """
    return json.dumps(_plain(results), indent=2, ensure_ascii=False, allow_nan=False) + "\n"


def _plain(value: Any) -> Any:
    if isinstance(value, Mapping):
        return {str(k): _plain(v) for k, v in value.items()}
    if isinstance(value, np.ndarray):
        return _plain(value.tolist())
    if isinstance(value, list | tuple):
        return [_plain(v) for v in value]
    if isinstance(value, np.generic):
        return _plain(value.item())
    if isinstance(value, complex):
        return {"real": _plain(value.real), "imaginary": _plain(value.imag)}
    if isinstance(value, float) and not math.isfinite(value):
        return None
    return value


def _check(target: Path, overwrite: bool) -> None:
    place = f'folder "{target.name}"'
    if not target.parent.is_dir():
        raise Refused(place, "the folder that it should stand in does not exist",
                      given=target.parent)
    if not target.exists() and not target.is_symlink():
        return
    if target.is_symlink() or not target.is_dir():
        raise Refused(place, "a file of that name is there already", hint="choose another name")
    if not overwrite:
        raise Refused(place, "is there already, and nothing is written over without being asked",
                      hint="choose another name, or ask for overwriting")
    others = sorted(p.name for p in target.iterdir() if p.name not in OURS)
    if others:
        raise Refused(place, "holds other things than a memo, so it is not written over",
                      given=", ".join(others))


def _fill(room: Path, contents: Contents) -> None:
    from .memo_pdf import pdf_bytes
    from .memo_word import word_bytes

    memo = contents.memo
    for name in ("figures", "tables"):
        (room / name).mkdir()
    pictures = draw_all(memo.figures, room / "figures")
    write_tables((*memo.tables, *contents.more_tables), room / "tables")
    (room / "memo.docx").write_bytes(
        word_bytes(memo, pictures["png"], template=contents.template, paper=contents.paper))
    (room / "memo.pdf").write_bytes(pdf_bytes(memo, pictures["svg"], paper=contents.paper))
    (room / "results.json").write_text(results_text(contents.results), encoding="utf-8",
                                       newline="\n")
    (room / contents.case_name).write_bytes(contents.case_text)


def _open_to_readers(room: Path) -> None:
    """A temporary folder is its owner's only; a memo gets what the user's other files get."""
    mask = os.umask(0)
    os.umask(mask)
    room.chmod(0o777 & ~mask)


def _put(room: Path, target: Path) -> None:
    """Rename `room` to `target`; an older memo there stays until the new one has its name."""
    if not target.exists():
        room.rename(target)
        return
    older = Path(tempfile.mkdtemp(prefix=f".{target.name}-older-", dir=target.parent))
    target.rename(older / target.name)
    try:
        room.rename(target)
    except BaseException:
        (older / target.name).rename(target)
        older.rmdir()
        raise
    shutil.rmtree(older, ignore_errors=True)
