"""The memo of the case: what goes in, how it looks, and where it is written. The view is `memo`."""

from __future__ import annotations

import datetime
import tempfile
from collections.abc import Mapping
from pathlib import Path
from typing import Any

import traitlets

from ..case.memo import CHAPTERS, Added
from ..errors import Refused
from ..report.case_memo import LEFT_OUT, case_contents
from ..report.folder import Contents, draw_all, write_folder
from ..report.investigation import Investigation, investigate
from ..report.memo import Paragraph
from ..report.memo_pdf import page_pictures
from ..report.words import pair_words
from ..study.causes import Progress, silent
from ..units import show
from .desk import Desk

PAPERS = {"as the units": None, "A4": "a4", "US Letter": "us-letter"}
WORDS = {
    "expected": "Expected readings", "causes": "What the readings mean",
    "margin": "Residual-current margin", "operation": "False operation",
    "annex": "Annex: readings on the other pairs",
}
_KINDS = {
    "formulas": "Formulas near to the section", "loading": "Reading against impedance",
    "length": "Reading against run length", "readings": "Table of readings",
    "tried cause": "Cause tried", "added load": "Added load", "resistor beside": "Resistor beside",
}


class MemoModel(traitlets.HasTraits):
    """What the memo of the case on the desk holds.

    Traits
    ------
    investigation : the case worked out, renewed with it
    """

    investigation = traitlets.Instance(Investigation)

    def __init__(self, desk: Desk) -> None:
        self.desk = desk
        super().__init__(investigation=investigate(desk.case))

    def read_case(self) -> None:
        """Take over the case that is on the desk."""
        self.investigation = investigate(self.desk.case)

    @property
    def chapters(self) -> dict[str, bool]:
        """The parts that can be left out, in the memo's order, and whether each goes in."""
        left_out = self.desk.case.content.memo.leave_out
        return {c: c not in left_out for c in CHAPTERS if c in LEFT_OUT}

    def choose(self, chapter: str, into: bool) -> None:
        """Put a part into the memo, or leave it out."""
        left = [c for c, inside in {**self.chapters, chapter: into}.items() if not inside]
        self.desk.change({"memo.leave_out": left or None})

    def sign(self, key: str, name: str) -> None:
        """Set who prepared (`prepared_by`) or checked (`checked_by`) the memo."""
        self.desk.change({f"memo.{key}": name.strip() or None})

    @property
    def added(self) -> tuple[str, ...]:
        """What was added from the panels, in words."""
        return tuple(added_words(entry) for entry in self.desk.case.content.memo.added)

    def contents(
        self, *, date: datetime.date, paper: str | None = None, template: str = ""
    ) -> Contents:
        """What the memo's folder is made from."""
        given = Path(template) if template.strip() else None
        return case_contents(self.investigation, date=date, paper=paper, template=given)

    def pages(self, contents: Contents, progress: Progress = silent) -> tuple[bytes, ...]:
        """The memo's pages as PNG; long work, most of it drawing figures."""
        figures = contents.memo.figures
        with tempfile.TemporaryDirectory() as folder:
            pictures: dict[str, Path] = {}
            for count, figure in enumerate(figures):
                progress(count / (len(figures) + 1))
                pictures |= draw_all([figure], Path(folder))["svg"]
            progress(len(figures) / (len(figures) + 1))
            return page_pictures(contents.memo, pictures, paper=contents.paper)

    def write(self, folder: str, contents: Contents, *, overwrite: bool) -> tuple[Path, ...]:
        """Write the folder, whole or not at all, beside the notebook; the files in it."""
        if not folder.strip():
            raise Refused("folder", "needs a name", hint="for example my-case-memo")
        return write_folder(Path(folder.strip()), contents, overwrite=overwrite)

    def text(self) -> str:
        """The memo's parts and its summary, as lines of text."""
        memo = self.contents(date=datetime.date(2000, 1, 1)).memo
        summary = memo.parts[0]
        lines = [f"Parts: {', '.join(p.heading for p in memo.parts)}.",
                 f"{len(memo.figures)} figures and {len(memo.tables)} tables."]
        return "\n".join([*lines, *(b.text for b in summary.blocks if isinstance(b, Paragraph))])


def added_words(entry: Added) -> str:
    """What an entry of the memo is, in words."""
    about: Mapping[str, Any] = {
        "pair": pair_words(entry.a, entry.b) if entry.a and entry.b else "",
        "meter": f"meter {show(entry.meter, 'Ω')}" if entry.meter is not None else "",
        "cause": f"{entry.cause} on {entry.conductor}" if entry.cause else "",
        "size": entry.size, "leak": entry.leak or "", "load": entry.load or "",
        "resistor": show(entry.resistor, "Ω") if entry.resistor else "",
    }
    return ", ".join([_KINDS[entry.kind], *(str(v) for v in about.values() if v)])
