"""The case on the desk: what every panel of a notebook reads, changes, and saves.

The text of the case is the truth. A change goes through the same checks as the file, so that a
panel can hold nothing that the file could not. No widget is imported here.
"""

from __future__ import annotations

from collections.abc import Mapping
from pathlib import Path
from typing import Any

import traitlets

from ..case.loading import Case, load_case, read_case
from ..case.saving import changed_text, save_case
from ..errors import Refused
from ..units import FOOT, show

FOLDER = "sites"


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

    def change(self, changes: Mapping[str, Any]) -> None:
        """Make changes, by path as messages spell it: {"run.length": "50 m"}.

        Refused as the file would be, and the case stays as it is.
        """
        wanted = {**self._changes, **changes}
        try:
            case = read_case(changed_text(self._read, wanted), self.path.name)
        except Refused as refusal:
            # Line numbers of a text that nobody sees would mislead.
            raise Refused.all_of(_without_line(m) for m in refusal.mistakes) from None
        self._changes = wanted
        self.unsaved = case.text != self._read.text
        self.case = case

    def save(self) -> None:
        """Write the changes to the file; refused when it has changed since it was read."""
        self._read = save_case(self._read, self._changes, overwrite=True)
        self._changes, self.unsaved = {}, False
        self.case = self._read

    def open(self, path: str | Path | None = None) -> None:
        """Read another case, or this one again; changes that were not saved are dropped."""
        self._read = load_case(path or self.path)
        self._changes, self.unsaved = {}, False
        self.case = self._read


def cases_beside(folder: Path | None = None) -> tuple[Path, ...]:
    """The case files that a notebook can pick: in this folder and in `sites`."""
    here = folder or Path.cwd()
    return tuple(sorted([*here.glob("*.toml"), *(here / FOLDER).glob("*.toml")]))


def written(value: float, unit: str, *, customary: bool = False) -> str:
    """A quantity as a case file and an entry box take it.

    >>> written(45.72, "m"), written(45.72, "m", customary=True), written(3.3e6, "ohm")
    ('45.72 m', '150 ft', '3.3 Mohm')
    """
    if unit == "m" and customary:
        return f"{value / FOOT:.6g} ft"
    if unit == "m":
        return f"{value:.6g} m" if value >= 0.1 else f"{value * 1e3:.6g} mm"
    return show(value, unit, 6)


def _without_line(mistake: Any) -> Any:
    from dataclasses import replace

    return replace(mistake, place=mistake.place.rpartition(", ")[2])
