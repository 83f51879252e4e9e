"""From the plain values of a case file to its schema, every mistake at its line."""

from __future__ import annotations

import re
from collections.abc import Mapping
from dataclasses import replace
from typing import Any

from pydantic import BaseModel, ValidationError
from pydantic.fields import FieldInfo

from ..errors import Mistake, Refused, nearest
from ..reference.instruments import INSTRUMENTS
from ..study.ends import SCREEN
from .fields import MOST_CORES, Vocabulary, is_core_name, written
from .places import Place, spell, unspell
from .schema import CaseFile, RunTable

_PHASES = {1: ("L",), 2: ("L1", "L2"), 3: ("L1", "L2", "L3")}
_ANY_PHASE = ("L", "L1", "L2", "L3")

_LONGEST_PATH = 120

Found = tuple[Place, Mistake]
"""A mistake whose own place is still empty, and where in the file it is."""


class Index:
    """The file's name and lines: turns a place into what a reader can find."""

    def __init__(self, name: str, lines: Mapping[Place, int]) -> None:
        self._name = name
        self._lines = lines

    def line(self, place: Place) -> int:
        """The line of the place, or of the nearest table that holds it; 1 for the file."""
        while place and place not in self._lines:
            place = place[:-1]
        return self._lines.get(place, 1)

    def at(self, place: Place) -> str:
        """Such as "my-case.toml line 12, supply.voltage"."""
        path = spell(place)
        if len(path) > _LONGEST_PATH:
            path = f"{path[: _LONGEST_PATH // 2]}…{path[-_LONGEST_PATH // 2 :]}"
        return f"{self._name} line {self.line(place)}{path and ', '}{printable(path)}"

    def told(self, found: Found) -> Mistake:
        """The mistake with its place in words, and nothing in it that could steer a terminal."""
        place, mistake = found
        return replace(mistake, place=self.at(place), given=printable(mistake.given),
                       hint=printable(mistake.hint))


def printable(text: str) -> str:
    """In one line, with a mark in the place of every control and formatting character.

    >>> printable("a\\x1b[31m")
    'a�[31m'
    """
    mark = "\N{REPLACEMENT CHARACTER}"
    return "".join(c if c.isprintable() else " " if c.isspace() else mark for c in text)


def validate(plain: Mapping[str, Any]) -> tuple[CaseFile | None, list[Found]]:
    """The case, or None with everything that is wrong with it."""
    names = _vocabulary(plain)
    try:
        return CaseFile.model_validate(plain, context=names), []
    except ValidationError as error:
        return None, [f for e in error.errors() for f in _found(dict(e), plain, names.tables)]


def validate_run(plain: Mapping[str, Any]) -> RunTable | None:
    """The run alone, where it can be read although something else in the file is wrong."""
    try:
        return RunTable.model_validate(plain.get("run"), context=_vocabulary(plain))
    except ValidationError:
        return None


def _vocabulary(plain: Mapping[str, Any]) -> Vocabulary:
    phases = _table(plain, "supply").get("phases", 1)
    run = _table(plain, "run")
    surround = _table(run, "surround")
    own = plain.get("own_instruments", [])
    keys = [i.get("key") for i in own if isinstance(i, dict)] if isinstance(own, list) else []
    return Vocabulary(
        cores=_cores(_table(run, "cable")),
        phases=_PHASES.get(phases, _ANY_PHASE) if isinstance(phases, int) else _ANY_PHASE,
        instruments=(*INSTRUMENTS, *(k for k in keys if isinstance(k, str))),
        # A kind that is wrong may have been meant for a screen: what refers to it is no mistake.
        screen=(SCREEN,) if surround and surround.get("kind") not in ("plane", "pipe") else (),
    )


def _cores(cable: Mapping[str, Any]) -> tuple[str, ...] | None:
    """None where a name is wrong: what refers to it would only repeat the mistake."""
    listed = cable.get("cores")
    if cable.get("layout") == "free" and isinstance(cable.get("conductors"), list):
        listed = [c.get("name") for c in cable["conductors"] if isinstance(c, dict)]
    if not isinstance(listed, list) or not 1 <= len(listed) <= MOST_CORES:
        return None
    if not all(map(is_core_name, listed)) or len(set(listed)) < len(listed):
        return None
    return tuple(listed)


def _table(plain: Mapping[str, Any], key: str) -> Mapping[str, Any]:
    found = plain.get(key)
    return found if isinstance(found, dict) else {}


def _found(
    error: Mapping[str, Any], plain: Any, tables: Mapping[int, type[BaseModel]]
) -> list[Found]:
    """One of pydantic's errors in our words, at its place in the file."""
    place, parent = _locate(error["loc"], plain, tables)
    cause = error.get("ctx", {}).get("error")
    if isinstance(cause, Refused):
        return [(place + (unspell(m.place) if m.place else ()), m) for m in cause.mistakes]
    fields = _fields(tables.get(id(parent)))
    key = str(place[-1]) if place else ""
    given = written(error["input"])
    match error["type"]:
        case "missing":
            return [(place, Mistake("", "is missing", "", _example(key, fields)))]
        case "extra_forbidden":
            return [(place, Mistake("", "is not a key that belongs here", "", _near(key, fields)))]
        case "literal_error":
            return [(place, _not_a_word(error["ctx"]["expected"], given))]
        case "union_tag_invalid" | "union_tag_not_found":
            key = error["ctx"]["discriminator"].strip("'")
            if key not in error["input"]:
                return [((*place, key), Mistake("", "is missing", "", _TAG_EXAMPLES[key]))]
            given = written(error["input"][key])
            return [((*place, key), _not_a_word(error["ctx"]["expected_tags"], given))]
    if error["type"] == "bool_type":
        return [(place, Mistake("", "must be true or false, without quotes", given))]
    # What is left of pydantic's errors is a value where a table belongs.
    hint = f"written [{spell(place)}] or {key} = {{…}}" if isinstance(place[-1], str) else ""
    return [(place, Mistake("", "must be a table", given, hint))]


_TAG_EXAMPLES = {"layout": 'for example layout = "laid up"', "kind": 'for example kind = "plane"'}


def _locate(
    loc: tuple[str | int, ...], plain: Any, tables: Mapping[int, type[BaseModel]]
) -> tuple[Place, Any]:
    """Where pydantic's location is in the file, and the table that holds it.

    A location may also have steps that the file has not: the tag of a union, "[key]" after a
    key, the key that a value written alone stands for. A missing key is one that its table knows.
    """
    place: Place = ()
    here: Any = plain
    parent: Any = plain
    for step in loc:
        if step in (here if isinstance(here, dict) else _entries(here)):
            place, parent, here = (*place, step), here, here[step]
    if loc and isinstance(here, dict) and loc[-1] in _fields(tables.get(id(here))):
        return (*place, loc[-1]), here
    return place, parent


def _entries(value: Any) -> range:
    return range(len(value)) if isinstance(value, list) else range(0)


def _fields(model: type[BaseModel] | None) -> dict[str, FieldInfo]:
    """The fields of a table by the keys that the file uses."""
    return {f.alias or name: f for name, f in model.model_fields.items()} if model else {}


def _example(key: str, fields: Mapping[str, FieldInfo]) -> str:
    examples = fields[key].examples if key in fields else None
    if not examples:
        return ""
    example = examples[0]
    quoted = isinstance(example, str) and example[0] not in "[{"
    return f'for example {key} = "{example}"' if quoted else f"for example {key} = {example}"


def _near(key: str, fields: Mapping[str, FieldInfo]) -> str:
    hint = nearest(key, fields)
    if key in CaseFile.model_fields:
        return f'"{key}" belongs to the whole file: write it above the first [table]'
    return hint


def _not_a_word(expected: str, given: str) -> Mistake:
    words = re.findall(r"[^', ](?:[^',]*[^', ])?", expected.replace(" or ", ", "))
    hint = nearest(given, words)
    rule = f"must be {', '.join(words[:-1])} or {words[-1]}"
    return Mistake("", rule, given, hint if hint.startswith("did") else "")
