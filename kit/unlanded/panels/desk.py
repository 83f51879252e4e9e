"""The case on the desk: what every panel of a notebook reads, changes, and saves.

The text of the case is the truth. A change goes through the same checks as the file, so that a
panel can hold nothing that the file could not. No widget is imported here.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace
from pathlib import Path
from typing import Any

import traitlets

from ..case.loading import Case, load_case, parse, read_case
from ..case.saving import changed_text, save_case
from ..errors import Mistake, Refused

FOLDER = "sites"
MEMO = "memo.added"


class Desk(traitlets.HasTraits):
    """One case, as read and as changed since.

    Traits
    ------
    case : the case with all changes made; panels observe it
    unsaved : whether there are changes that the file does not have
    """

    case = traitlets.Instance(Case)
    unsaved = traitlets.Bool(False)

    def __init__(self, path: str | Path) -> None:
        self._read = load_case(path)
        self._changes: dict[str, Any] = {}
        self._around = ("", "", "")
        super().__init__(case=self._read)

    @property
    def path(self) -> Path:
        """Where the case was read, and is saved."""
        assert self._read.path is not None
        return self._read.path

    @property
    def customary(self) -> bool:
        """Whether lengths are shown in feet."""
        return self.case.content.units == "US customary"

    @property
    def plain(self) -> dict[str, Any]:
        """The values of the case as they are written: text with units, lists and tables."""
        return parse(self.case.text, self.case.name)

    def change(self, changes: Mapping[str, Any]) -> None:
        """Make changes, by path as messages spell it: {"run.length": "50 m"}; None takes one out.

        At least one. Refused as the file would be, and the case stays as it is.
        """
        kept = {path: value for path, value in self._changes.items() if path not in changes}
        wanted = {**kept, **changes}
        try:
            text = self._retyped(changes) or changed_text(self._read, wanted)
            case = replace(read_case(text, self.path.name), path=self.path)
        except Refused as refusal:
            # Line numbers of a text that nobody sees would mislead.
            raise Refused.all_of(_without_line(m) for m in refusal.mistakes) from None
        self._around = self._found_around(changes, case.text)
        self._changes = wanted
        self.unsaved = case.text != self._read.text
        self.case = case

    def _retyped(self, changes: Mapping[str, Any]) -> str:
        """The text with the one value typed over that was changed last; "" if it is another.

        Setting a value so that remarks stay takes longer than all the rest that a slider's step
        asks for, so what stands around the value is kept from one step to the next.
        """
        (path, value), *more = changes.items()
        if more or path != self._around[0] or not (literal := _literal(value)):
            return ""
        return literal.join(self._around[1:])

    def _found_around(self, changes: Mapping[str, Any], text: str) -> tuple[str, str, str]:
        """The path that was changed, and the texts before and after its value; "" if unknown.

        They are known where the new text is the old one but for that value.
        """
        (path, value), *more = changes.items()
        old, new = _literal(self._changes.get(path)), _literal(value)
        if path == self._around[0] and new and not more:
            return self._around
        if not more and old and new:
            at = text.find(new)
            while at >= 0:
                before, after = text[:at], text[at + len(new):]
                if f"{before}{old}{after}" == self.case.text:
                    return path, before, after
                at = text.find(new, at + 1)
        return "", "", ""

    def add_to_memo(self, entry: Mapping[str, Any]) -> bool:
        """Put a figure or table into the case's memo; False where it is in there already."""
        added = self.added
        if dict(entry) in added:
            return False
        self.change({MEMO: [*added, dict(entry)]})
        return True

    def take_from_memo(self, number: int) -> None:
        """Take the entry of that number, from 0, out of the case's memo again."""
        left = [entry for k, entry in enumerate(self.added) if k != number]
        rest = {key: value for key, value in self.plain["memo"].items() if key != "added"}
        # A table that is only there by its entries goes with the last of them.
        self.change({MEMO: left} if left else {"memo": rest or None})

    @property
    def added(self) -> list[dict[str, Any]]:
        """What the case adds to its memo, as it is written."""
        return list(self.plain.get("memo", {}).get("added", []))

    def save(self, path: str | Path | None = None) -> None:
        """Write the changes to the file, or to another that is not there yet.

        Refused when the file has changed since it was read.
        """
        self._read = save_case(self._read, self._changes, path, overwrite=path is None)
        self._take_over()

    def open(self, path: str | Path | None = None) -> None:
        """Read another case, or this one again; changes that were not saved are dropped."""
        self._read = load_case(path or self.path)
        self._take_over()

    def _take_over(self) -> None:
        self._changes, self._around, self.unsaved = {}, ("", "", ""), False
        self.case = self._read


def cases_beside(folder: Path | None = None) -> tuple[Path, ...]:
    """The case files that a notebook can pick: in this folder and in `sites`."""
    here = folder or Path.cwd()
    return tuple(sorted([*here.glob("*.toml"), *(here / FOLDER).glob("*.toml")]))


def _literal(value: Any) -> str:
    """A text or a whole number as the file has it; "" for another, or a text that needs escapes."""
    if isinstance(value, str) and value.isprintable() and not set(value) & {'"', "\\"}:
        return f'"{value}"'
    return str(value) if isinstance(value, int) and not isinstance(value, bool) else ""


def _without_line(mistake: Mistake) -> Mistake:
    return replace(mistake, place=mistake.place.rpartition(", ")[2])
