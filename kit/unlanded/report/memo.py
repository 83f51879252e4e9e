"""A memo as data: a title block and sections of blocks, which the Word and PDF writers set.

Nothing here knows how a memo looks. Whatever the study grows (margin, causes, cures) joins
as another `Part` with its own blocks.
"""

from __future__ import annotations

import datetime
from collections.abc import Iterator
from dataclasses import dataclass
from typing import TypeAlias

from ..errors import Mistake, Refused
from .figure import Figure
from .tables import Table


@dataclass(frozen=True)
class Paragraph:
    """Running text."""

    text: str


@dataclass(frozen=True)
class Bullets:
    """A list, one item a line."""

    items: tuple[str, ...]


@dataclass(frozen=True)
class Caution:
    """A box that must not be overlooked."""

    title: str
    items: tuple[str, ...]


@dataclass(frozen=True)
class Verbatim:
    """Text as it is, in type of one width: a case file, a command."""

    text: str


Block: TypeAlias = "Paragraph | Bullets | Caution | Verbatim | Table | Figure | Part"


@dataclass(frozen=True)
class Part:
    """A heading and what stands under it; a part within a part has a lesser heading."""

    heading: str
    blocks: tuple[Block, ...]


@dataclass(frozen=True)
class Memo:
    """The whole memo.

    Parameters
    ----------
    title, site : as the case has them
    case_file : its name, without folders
    fingerprint : of the case file, as the reader can compute it again
    date : that the memo bears; the same case and date give the same bytes
    language : tag of the text's language
    """

    title: str
    site: str
    case_file: str
    fingerprint: str
    date: datetime.date
    parts: tuple[Part, ...]
    prepared_by: str = ""
    checked_by: str = ""
    language: str = "en-GB"

    def __post_init__(self) -> None:
        mistakes = [
            Mistake("memo", f"needs its {word}")
            for word in ("title", "case_file", "fingerprint")
            if not getattr(self, word).strip()
        ]
        for kind, found in (("figure", self.figures), ("table", self.tables)):
            keys = [x.key for x in found]
            mistakes += [Mistake(f'{kind} "{key}"', "its key may be used once in a memo")
                         for key in sorted({k for k in keys if keys.count(k) > 1})]
        if mistakes:
            raise Refused.all_of(mistakes)

    @property
    def figures(self) -> tuple[Figure, ...]:
        """Every figure, in the order of its number."""
        return tuple(b for b in _walk(self.parts) if isinstance(b, Figure))

    @property
    def tables(self) -> tuple[Table, ...]:
        """Every table, in the order of its number."""
        return tuple(b for b in _walk(self.parts) if isinstance(b, Table))


def _walk(blocks: tuple[Block, ...] | tuple[Part, ...]) -> Iterator[Block]:
    for block in blocks:
        yield block
        if isinstance(block, Part):
            yield from _walk(block.blocks)


def facts(memo: Memo) -> tuple[tuple[str, str], ...]:
    """The title block's lines: a name and what it says; a line that says nothing is left out."""
    lines = (
        ("Site", memo.site),
        ("Case file", memo.case_file),
        ("Fingerprint", memo.fingerprint),
        ("Date", long_date(memo.date, memo.language)),
    )
    return tuple(line for line in lines if line[1].strip())


def long_date(date: datetime.date, language: str = "en-GB") -> str:
    """A date that no reader takes for another.

    >>> long_date(datetime.date(2026, 3, 9)), long_date(datetime.date(2026, 3, 9), "en-US")
    ('9 March 2026', 'March 9, 2026')
    """
    months = ("January", "February", "March", "April", "May", "June", "July", "August",
              "September", "October", "November", "December")
    month = months[date.month - 1]
    american = language == "en-US"
    return f"{month} {date.day}, {date.year}" if american else f"{date.day} {month} {date.year}"
