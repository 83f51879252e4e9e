"""A part of the memo as text for a terminal: everything but its pictures."""

from __future__ import annotations

from collections.abc import Iterator

from .memo import Block, Bullets, Caution, Paragraph, Part, Verbatim
from .tables import Table, plain
from .words import filled, printable


def part_text(part: Part, width: int = 100) -> str:
    """The part's headings, words and tables, in lines of at most `width` characters.

    >>> print(part_text(Part("Margin", (Paragraph("Enough."),))))
    Margin
    ──────
    <BLANKLINE>
    Enough.
    """
    heading = printable(part.heading)
    blocks = [text for block in part.blocks for text in _block(block, width)]
    return "\n\n".join([f"{heading}\n{'─' * len(heading)}", *blocks])


def _block(block: Block, width: int) -> Iterator[str]:
    match block:
        case Paragraph() | Verbatim():
            yield filled(block.text, width)
        case Bullets():
            yield _list(block.items, width)
        case Caution():
            yield f"{printable(block.title)}:\n{_list(block.items, width)}"
        case Table():
            yield plain(block, width)
        case Part():
            yield part_text(block, width)


def _list(items: tuple[str, ...], width: int) -> str:
    return "\n".join(filled(item, width, first="• ", then="  ") for item in items)
