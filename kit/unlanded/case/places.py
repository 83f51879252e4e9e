"""Where things stand in a case file: the line of every key, and keys spelled as one path.

TOML readers give values without their lines. The text is read a second time here, after a TOML
reader has accepted it, only to note on which line each key and each entry of a list begins.
"""

from __future__ import annotations

import json
import re
import tomllib
from collections.abc import Iterator

from ..errors import Refused

Place = tuple[str | int, ...]
"""Keys from the top of the file down; entries of lists are counted from 0."""

_TOKEN = re.compile(
    r"""(?P<newline>\n)
    | (?P<skip>[ \t\r]+ | \#[^\n]*)
    | (?P<text>"{3} (?:\\.|[^\\])*? "{3,5} | '{3} .*? '{3,5} | "(?:\\.|[^"\\\n])*" | '[^'\n]*')
    | (?P<mark>[][{}=,.])
    | (?P<bare>[^][{}=,.\#"'\s]+)""",
    re.DOTALL | re.VERBOSE,
)
_BARE_KEY = re.compile(r"[A-Za-z0-9_-]+")
_PART = re.compile(
    r"""\s*(?: (?P<bare>[A-Za-z0-9_-]+) | (?P<quoted>"(?:\\.|[^"\\])*"|'[^']*') )
    (?P<entries>(?:\[\d+\])*) \s* (?:\.(?=.)|$)""",
    re.VERBOSE,
)


def spell(place: Place) -> str:
    """A place as one path. Entries of lists are counted from 1, as a reader counts them.

    >>> spell(("readings", 0, "shows")), spell(("run", "ends", "far", "core 7"))
    ('readings[1].shows', 'run.ends.far."core 7"')
    """
    text = ""
    for part in place:
        if isinstance(part, int):
            text += f"[{part + 1}]"
        else:
            bare = _BARE_KEY.fullmatch(part)
            text += ("." if text else "") + (part if bare else _quoted(part))
    return text


def unspell(path: str) -> Place:
    """The place that `spell` wrote as `path`.

    >>> unspell("readings[1].shows")
    ('readings', 0, 'shows')
    """
    place: list[str | int] = []
    position = 0
    while position < len(path) or not place:
        match = _PART.match(path, position)
        if match is None or match.end() == position:
            raise Refused("path", "must be keys joined by points", given=path,
                          hint='for example run.length or readings[1].shows')
        place.append(match["bare"] or _unquoted(match["quoted"]))
        entries = [int(n) for n in re.findall(r"\d+", match["entries"])]
        if 0 in entries:
            raise Refused("path", "counts the entries of a list from 1", given=path)
        place.extend(n - 1 for n in entries)
        position = match.end()
    return tuple(place)


def line_numbers(text: str) -> dict[Place, int]:
    """The line, counted from 1, on which every key and list entry of valid TOML begins.

    A table that has a header of its own is at its header; one that is only implied is where
    it is first mentioned.

    >>> line_numbers('title = "x"\\n[run]\\nlength = "85 m"')
    {('title',): 1, ('run',): 2, ('run', 'length'): 3}
    """
    return _Reader(text).read()


class _Reader:
    """One pass over the tokens of valid TOML."""

    def __init__(self, text: str) -> None:
        self._tokens = list(_tokens(text))
        self._at = 0
        self._lines: dict[Place, int] = {}
        self._entries: dict[Place, int] = {}

    def read(self) -> dict[Place, int]:
        table: Place = ()
        while self._more():
            if self._word() == "\n":
                self._at += 1
            elif self._word() == "[":
                table = self._header()
            else:
                self._pair(table)
        return self._lines

    def _word(self) -> str:
        """The token here if it is a mark or a line's end; a text in quotes is never one."""
        if not self._more():
            return ""
        kind, word, _ = self._tokens[self._at]
        return word if kind in ("mark", "newline") else ""

    def _more(self) -> bool:
        return self._at < len(self._tokens)

    def _line(self) -> int:
        return self._tokens[self._at][2]

    def _header(self) -> Place:
        line = self._line()
        brackets = 0
        while self._word() == "[":
            brackets += 1
            self._at += 1
        keys = self._key()
        self._at += brackets
        place = self._within(keys[:-1], line) + keys[-1:]
        if brackets == 2:
            self._lines.setdefault(place, line)
            self._entries[place] = self._entries.get(place, -1) + 1
            place = (*place, self._entries[place])
        self._lines[place] = line
        return place

    def _within(self, keys: tuple[str, ...], line: int) -> Place:
        """The place of a header's parent: a list of tables stands for its last entry."""
        place: Place = ()
        for key in keys:
            place = (*place, key)
            self._lines.setdefault(place, line)
            if place in self._entries:
                place = (*place, self._entries[place])
        return place

    def _key(self) -> tuple[str, ...]:
        parts = []
        while True:
            kind, word, _ = self._tokens[self._at]
            parts.append(_unquoted(word) if kind == "text" else word)
            self._at += 1
            if self._word() != ".":
                return tuple(parts)
            self._at += 1

    def _pair(self, table: Place) -> None:
        line = self._line()
        keys = self._key()
        self._at += 1  # the equals sign
        for count in range(1, len(keys)):
            self._lines.setdefault(table + keys[:count], line)
        self._lines[table + keys] = line
        self._value(table + keys)

    def _value(self, place: Place) -> None:
        opening = self._word()
        if opening == "[":
            self._list(place)
        elif opening == "{":
            self._at += 1
            while self._skip_to_item("}"):
                self._pair(place)
        else:
            while self._more() and self._word() in ("", "."):
                self._at += 1

    def _list(self, place: Place) -> None:
        self._at += 1
        count = 0
        while self._skip_to_item("]"):
            entry = (*place, count)
            self._lines[entry] = self._line()
            self._value(entry)
            count += 1

    def _skip_to_item(self, closing: str) -> bool:
        """Past commas and line ends; False, and past it, at the closing mark."""
        while self._word() in (",", "\n"):
            self._at += 1
        if self._word() != closing:
            return True
        self._at += 1
        return False


def _tokens(text: str) -> Iterator[tuple[str, str, int]]:
    line = 1
    for match in _TOKEN.finditer(text):
        kind, word = str(match.lastgroup), match.group()
        if kind != "skip":
            yield kind, word, line
        line += word.count("\n")


def _quoted(key: str) -> str:
    # JSON's escapes are TOML's, but TOML also wants the delete character escaped.
    return json.dumps(key, ensure_ascii=False).replace("\x7f", "\\u007f")


def _unquoted(word: str) -> str:
    return str(tomllib.loads(f"key = {word}")["key"])
