"""Saving a changed case: comments and order stay, and nothing is overwritten unasked."""

from __future__ import annotations

import os
import secrets
import shutil
from collections.abc import Callable, Iterator, Mapping
from contextlib import suppress
from copy import deepcopy
from dataclasses import replace
from pathlib import Path
from typing import Any

import tomlkit
from tomlkit import TOMLDocument
from tomlkit.container import Container
from tomlkit.exceptions import TOMLKitError
from tomlkit.items import AoT, Array, Comment, InlineTable, Item, Null, Table, Whitespace

from ..errors import Refused
from .fields import written
from .loading import Case, parse, read_case, read_text
from .places import Place, spell, unspell

_ABSENT = object()
_NAMED_CHANGES = 5


def save_case(
    case: Case,
    changes: Mapping[str, Any],
    path: str | Path | None = None,
    *,
    overwrite: bool = False,
) -> Case:
    """The case with `changes` made, written to `path`, or to where it was read.

    `changes` has a value for each key, spelled as messages spell it: "run.length",
    "readings[1].shows" (entries count from 1). Values are what TOML holds; None takes the key
    out. Tables that are missing are made. Returns the case as saved.

    Refused, and nothing written, when the result would not be a valid case; when a file is
    there already and `overwrite` is false; when the file that the case was read from has
    changed since.
    """
    target = _target(case, path)
    text = changed_text(case, changes)
    saved = read_case(text, f"{target.name}, as changed,")
    _refuse_to_lose(case, target, overwrite)
    _write_whole(target, text.replace("\n", case.line_end).encode())
    return replace(saved, name=target.name, path=target, line_end=case.line_end)


def changed_text(case: Case, changes: Mapping[str, Any]) -> str:
    """The text of the case with `changes` made, as `save_case` writes it."""
    wanted = parse(case.text, case.name)
    document = _editable(case)
    remarks = _take_remarks(document)
    for path, value in changes.items():
        place = unspell(path)
        try:
            _change(wanted, place, deepcopy(value), dict, _set_plain)
            _change(document, place, value, tomlkit.table, _set_written)
        except Refused:
            raise
        except (LookupError, TypeError, ValueError, TOMLKitError):
            raise Refused(path, "cannot be changed to this value", given=written(value)) from None
    _give_back(document, remarks)
    text = tomlkit.dumps(document)
    # tomlkit moves text about; what a reader of TOML then finds is the only proof.
    if parse(text, case.name) != wanted:
        raise Refused(case.name, "cannot be changed without disturbing the rest of the file",
                      given=", ".join(changes), hint="make the change in a text editor")
    return text


def _editable(case: Case) -> TOMLDocument:
    try:
        document = tomlkit.parse(case.text)
    except (TOMLKitError, ValueError, RecursionError):
        document = TOMLDocument()
    if tomlkit.dumps(document) != case.text:
        raise Refused(case.name, "has a layout that cannot be changed from here",
                      hint="make the change in a text editor")
    return document


def _take_remarks(document: TOMLDocument) -> list[tuple[Table, str]]:
    """Take out the remarks and blank lines above each header, to be given back to it.

    tomlkit counts them to the table before, so that what is added to it would come after them,
    and what is taken out would take them along.
    """
    taken = []
    held: list[tuple[Container, int]] = []
    for body, index, item in _in_order(document):
        if isinstance(item, Comment | Whitespace):
            held.append((body, index))
            continue
        if isinstance(item, Table):
            taken.append((item, "".join(b.body[at][1].as_string() for b, at in held)))
            for b, at in held:
                b.body[at] = (None, Null())
        held = []
    return taken


def _give_back(document: TOMLDocument, remarks: list[tuple[Table, str]]) -> None:
    texts = {id(table): text for table, text in remarks}
    for _, _, item in _in_order(document):
        if isinstance(item, Table):
            item.trivia.indent = texts.get(id(item), "\n") + item.trivia.indent.lstrip("\n")


def _in_order(container: Container) -> Iterator[tuple[Container, int, Item]]:
    """Every key, remark and written header in the order of the file, and where it is held."""
    for index, (_, item) in enumerate(list(container.body)):
        if isinstance(item, AoT):
            for table in item.body:
                yield container, index, table
                yield from _in_order(table.value)
        elif isinstance(item, Table):
            if not item.is_super_table():
                yield container, index, item
            yield from _in_order(item.value)
        elif not isinstance(item, Null):
            yield container, index, item


def _change(
    root: Any, place: Place, value: Any, new_table: Callable[[], Any],
    put: Callable[[Any, str | int, Any], None],
) -> None:
    here = root
    for count, step in enumerate(place[:-1], start=1):
        if _is_new(here, step):
            if value is None:
                return
            put(here, step, new_table())
        here = here[step]
        if not isinstance(here, dict | list):
            raise Refused(spell(place), f"cannot be set, because {spell(place[:count])} is a value")
    last = place[-1]
    if value is not None:
        put(here, last, value)
    elif not _is_new(here, last):
        del here[last]


def _is_new(here: Any, step: str | int) -> bool:
    return step == len(here) if isinstance(here, list) else step not in here


def _set_plain(here: Any, step: str | int, value: Any) -> None:
    if isinstance(here, list) and step == len(here):
        here.append(value)
    else:
        here[step] = value


def _set_written(here: Any, step: str | int, value: Any) -> None:
    """Set key by key where a table is written under a header, so that its remarks stay."""
    old = None if _is_new(here, step) else here[step]
    if isinstance(old, Table | InlineTable) and isinstance(value, dict):
        for key in [k for k in old if k not in value]:
            del old[key]
        for key, inner in value.items():
            _set_written(old, key, inner)
    elif isinstance(old, AoT) and isinstance(value, list) and value:
        del old[len(value):]
        for count, inner in enumerate(value):
            _set_written(old, count, inner)
    elif isinstance(here, AoT) and not isinstance(value, dict):
        raise TypeError("an entry under its own header is a table")
    else:
        _set_plain(here, step, _toml(here, value))


def _toml(here: Any, value: Any) -> Any:
    if isinstance(here, InlineTable | Array) and isinstance(value, dict):
        return tomlkit.item(value, _parent=here)
    if isinstance(value, str) and "\n" in value and not isinstance(here, InlineTable):
        lines = tomlkit.string(value, multiline=True).as_string()
        return tomlkit.value(f'{lines[:3]}\n{lines[3:]}')
    return value


def _target(case: Case, path: str | Path | None) -> Path:
    if path is None and case.path is None:
        raise Refused(case.name, "was not read from a file", hint="give a path to save it to")
    try:
        target = Path(path if path is not None else case.path or "").resolve()
        target.exists()
    except (OSError, ValueError, RuntimeError) as error:
        reason = getattr(error, "strerror", None) or str(error)
        raise Refused(str(path), "cannot be written", given=reason) from None
    if target.is_dir():
        raise Refused(str(target), "is a folder, and a case is saved as one file")
    if not target.parent.is_dir():
        raise Refused(str(target.parent), "there is no such folder to save into")
    return target


def _refuse_to_lose(case: Case, target: Path, overwrite: bool) -> None:
    if not target.exists():
        return
    if not overwrite:
        raise Refused(str(target), "is there already, and is not overwritten unless asked")
    if case.path is None or target != case.path.resolve():
        return
    on_disk, _ = read_text(target)
    if on_disk != case.text:
        raise Refused(str(target), "was changed by something else since it was read",
                      given=_what_changed(case, on_disk),
                      hint="read it again, or save under another name")


def _what_changed(case: Case, on_disk: str) -> str:
    try:
        found = parse(on_disk, case.name)
    except Refused:
        return "it is no longer TOML"
    paths = [spell(place) for place in _differences(parse(case.text, case.name), found)]
    if not paths:
        return "its remarks or layout"
    more = len(paths) - _NAMED_CHANGES
    return ", ".join(paths[:_NAMED_CHANGES]) + (f" and {more} more" if more > 0 else "")


def _differences(old: Any, new: Any, place: Place = ()) -> Iterator[Place]:
    """The places where two plain values differ."""
    if isinstance(old, dict) and isinstance(new, dict):
        for key in {**old, **new}:
            yield from _differences(old.get(key, _ABSENT), new.get(key, _ABSENT), (*place, key))
    elif isinstance(old, list) and isinstance(new, list) and len(old) == len(new):
        for count, (a, b) in enumerate(zip(old, new, strict=True)):
            yield from _differences(a, b, (*place, count))
    elif old != new:
        yield place


def _write_whole(target: Path, data: bytes) -> None:
    """Write beside the target, then put in its place: a reader never sees half a file."""
    beside = target.with_name(f".{target.name}.{secrets.token_hex(4)}.tmp")
    try:
        with beside.open("xb") as file:
            file.write(data)
            file.flush()
            os.fsync(file.fileno())
        if target.exists():
            shutil.copymode(target, beside)
        beside.replace(target)
    except OSError as error:
        raise Refused(str(target), "cannot be written", given=error.strerror or error) from None
    finally:
        with suppress(OSError):
            beside.unlink(missing_ok=True)
