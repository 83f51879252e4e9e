"""Tables as data, and their two plain forms: CSV for spreadsheets, text for a terminal."""

from __future__ import annotations

import csv
import io
import re
import textwrap
import unicodedata
from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Literal

from ..errors import Refused
from .words import bound, filled, printable

Align = Literal["left", "right", "centre"]

# A spreadsheet runs a cell that begins so; the wide forms count in East Asian editions.
_RUNS = "=+-@\t\r\n＝＋－＠"
_NUMBER = re.compile(r"[-+]?(\d+(\.\d*)?|\.\d+)([eE][-+]?\d+)?")


@dataclass(frozen=True)
class Column:
    """A column: heading, unit (shown once, in the heading), alignment."""

    heading: str
    unit: str = ""
    align: Align = "left"

    @property
    def title(self) -> str:
        """The heading with its unit.

        >>> Column("Voltage", "V").title
        'Voltage [V]'
        """
        return f"{self.heading} [{self.unit}]" if self.unit else self.heading


@dataclass(frozen=True)
class Table:
    """Rows of text under columns, with a caption and a note below.

    `key` is the stem of its file's name; every row has one cell for each column.
    """

    key: str
    caption: str
    columns: tuple[Column, ...]
    rows: tuple[tuple[str, ...], ...]
    note: str = ""

    def __post_init__(self) -> None:
        for number, row in enumerate(self.rows, 1):
            if len(row) != len(self.columns):
                raise Refused(f'table "{self.key}", row {number}',
                              f"needs {len(self.columns)} cells", given=len(row))

    @property
    def titles(self) -> tuple[str, ...]:
        """Heading and unit of each column."""
        return tuple(c.title for c in self.columns)


def shares(table: Table) -> tuple[float, ...]:
    """Each column's share of a page's width: room for its longest word, and for its text up to a
    limit that is lower in a table of many columns.

    >>> shares(Table("t", "Two", (Column("Core"), Column("U", "V")), (("12345", "12345"),)))
    (0.5, 0.5)
    """
    cells = [table.titles, *table.rows]
    body = table.rows or (table.titles,)
    limit = 34 if len(table.columns) < 7 else 24
    letters = [max(_least(cells, c) + 2, min(_natural(body, c) + 2, limit))
               for c in range(len(table.columns))]
    return tuple(n / sum(letters) for n in letters)


def csv_text(table: Table) -> str:
    """The table as CSV: commas, CRLF, quotes where needed, no cell that a spreadsheet runs."""
    out = io.StringIO()
    writer = csv.writer(out, lineterminator="\r\n")
    writer.writerows([neutral(cell) for cell in row] for row in (table.titles, *table.rows))
    return out.getvalue()


def write_csv(table: Table, path: Path) -> None:
    """Write `csv_text` as UTF-8 with a byte-order mark, without which spreadsheets misread Ω."""
    path.write_bytes(csv_text(table).encode("utf-8-sig"))


def neutral(cell: str) -> str:
    """A cell as a spreadsheet may have it: numbers stay numbers, formulas become text.

    The true minus sign of our text becomes a hyphen in numbers, for a spreadsheet to read.

    >>> neutral("−3.2"), neutral("=1+1"), neutral("-cmd"), neutral("spare")
    ('-3.2', "'=1+1", "'-cmd", 'spare')
    """
    number = cell.strip().replace("−", "-")
    if _NUMBER.fullmatch(number):
        return number
    cell = cell.replace("\x00", "").replace("\xa0", " ").replace("\n", " ")
    begins = cell.lstrip(" ")[:1]
    return f"'{cell}" if begins and begins in _RUNS else cell


def plain(table: Table, width: int = 100) -> str:
    """The table as aligned text of at most `width` characters a line, for a terminal.

    Long cells are wrapped; columns that do not fit continue in a second block, which repeats
    the first column.

    >>> print(plain(Table("t", "Two", (Column("Core"), Column("U", "V", "right")),
    ...                   (("spare", "103.4"), ("N", "0")))))
    Two
    Core   U [V]
    ─────  ─────
    spare  103.4
    N          0
    """
    cells = [[_tame(c) for c in row] for row in (table.titles, *table.rows)]
    blocks = _blocks(cells, width)
    parts = [_fill(table.caption, width)]
    parts += ["\n".join(_block(table, cells, block, width)) for block in blocks]
    if table.note:
        parts.append(_fill(table.note, width))
    return "\n\n".join(parts).replace("\n\n", "\n", 1).replace("\N{NO-BREAK SPACE}", " ")


def _fill(text: str, width: int) -> str:
    return filled(_tame(text), width)


def _tame(text: str) -> str:
    return bound(" ".join(printable(text).split()))


def _length(text: str) -> int:
    """Columns a terminal gives the text: two for a wide letter, none for an accent on another."""
    return sum(
        0 if unicodedata.combining(c) else 2 if unicodedata.east_asian_width(c) in "WF" else 1
        for c in text
    )


def _least(cells: Sequence[Sequence[str]], column: int) -> int:
    """The narrowest a column can be: its longest word, 24 at most."""
    words = (w for row in cells for w in re.split("[ \n]", row[column]))
    return min(24, max(map(_length, words), default=1))


def _natural(cells: Sequence[Sequence[str]], column: int) -> int:
    return max(_length(line) for row in cells for line in row[column].split("\n"))


def _blocks(cells: Sequence[Sequence[str]], width: int) -> list[list[int]]:
    """Columns grouped so that each group can be made to fit; each begins with column 0."""
    first = _least(cells, 0)
    blocks, used = [[0]], first
    for column in range(1, len(cells[0])):
        need = _least(cells, column) + 2
        if used + need > width and len(blocks[-1]) > 1:
            blocks.append([0])
            used = first
        blocks[-1].append(column)
        used += need
    return blocks


def _widths(cells: Sequence[Sequence[str]], block: Sequence[int], width: int) -> list[int]:
    """Natural widths, then the widest column narrowed by one until the block fits."""
    widths = [_natural(cells, c) for c in block]
    least = [_least(cells, c) for c in block]
    while sum(widths) + 2 * (len(widths) - 1) > width:
        spare = [w - m for w, m in zip(widths, least, strict=True)]
        if max(spare) <= 0:
            break
        widest = max((i for i, s in enumerate(spare) if s > 0), key=lambda i: widths[i])
        widths[widest] -= 1
    return widths


def _block(
    table: Table, cells: Sequence[Sequence[str]], block: Sequence[int], width: int
) -> list[str]:
    widths = _widths(cells, block, width)
    aligns = [table.columns[c].align for c in block]
    lines = []
    for number, row in enumerate(cells):
        wrapped = [textwrap.wrap(row[c], w) or [""] for c, w in zip(block, widths, strict=True)]
        for i in range(max(map(len, wrapped))):
            texts = [w[i] if i < len(w) else "" for w in wrapped]
            padded = map(_padded, texts, widths, aligns)
            lines.append("  ".join(padded).rstrip())
        if number == 0:
            lines.append("  ".join("─" * w for w in widths))
    return lines


def _padded(text: str, width: int, align: Align) -> str:
    room = max(0, width - _length(text))
    before = {"left": 0, "right": room, "centre": room // 2}[align]
    return " " * before + text + " " * (room - before)
