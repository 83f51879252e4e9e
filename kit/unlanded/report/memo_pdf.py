"""The memo as PDF/UA-1, set by typst offline; figures stay vectors."""

from __future__ import annotations

import json
import tempfile
from collections.abc import Mapping
from importlib.resources import files
from pathlib import Path
from typing import Any

from ..errors import Refused
from .figure import Figure
from .memo import Block, Bullets, Caution, Memo, Paragraph, Part, Verbatim, facts
from .tables import Table, shares
from .words import bound, printable

SHORT = 12  # digits of the fingerprint on each page


def pdf_bytes(memo: Memo, pictures: Mapping[str, Path], *, paper: str = "a4") -> bytes:
    """The memo as a PDF; `pictures` has each figure's SVG by its key.

    `paper` is "a4" or "us-letter".
    """
    pdf = _set(memo, pictures, paper, pdf_standards=["ua-1"])
    assert isinstance(pdf, bytes)
    return pdf


def page_pictures(
    memo: Memo, pictures: Mapping[str, Path], *, paper: str = "a4", dots: float = 80.0
) -> tuple[bytes, ...]:
    """Its pages as PNG, `dots` to the inch, to look at before it is written."""
    pages = _set(memo, pictures, paper, format="png", ppi=dots)
    return tuple(pages) if isinstance(pages, list) else (pages,)


def _set(memo: Memo, pictures: Mapping[str, Path], paper: str, **form: Any) -> Any:
    """The memo as typst sets it in a form."""
    import typst
    from matplotlib import get_data_path

    with tempfile.TemporaryDirectory() as folder:
        room = Path(folder)
        for figure in memo.figures:
            (room / f"{figure.key}.svg").write_bytes(pictures[figure.key].read_bytes())
        (room / "memo.typ").write_bytes(files(__package__).joinpath("memo.typ").read_bytes())
        (room / "data.json").write_text(_json(memo, paper), encoding="utf-8")
        try:
            return typst.compile(
                room / "memo.typ",
                root=room,
                font_paths=[Path(get_data_path()) / "fonts" / "ttf"],
                ignore_system_fonts=True,
                **form,
            )
        except typst.TypstError as problem:
            raise Refused("memo.pdf", "could not be set", given=problem.message) from None


def _json(memo: Memo, paper: str) -> str:
    # Characters that no font shows would end the setting, so they are marked first.
    return json.dumps(_tamed(_data(memo, paper)), ensure_ascii=False)


def _tamed(value: Any) -> Any:
    if isinstance(value, str):
        return bound(printable(value))
    if isinstance(value, dict):
        verbatim = value.get("kind") == "verbatim"
        return {k: printable(v) if verbatim else _tamed(v) for k, v in value.items()}
    return [_tamed(v) for v in value] if isinstance(value, list | tuple) else value


def _data(memo: Memo, paper: str) -> dict[str, Any]:
    language, _, region = memo.language.partition("-")
    date = memo.date
    return {
        "title": memo.title,
        "author": memo.prepared_by or "not stated",
        "language": language,
        "region": region or None,
        "paper": paper,
        "date": {"year": date.year, "month": date.month, "day": date.day},
        "short": memo.fingerprint[:SHORT],
        "facts": [list(fact) for fact in facts(memo)],
        "signatures": [["Prepared by", memo.prepared_by], ["Checked by", memo.checked_by]],
        "blocks": [_block(part) for part in memo.parts],
    }


def _block(block: Block) -> dict[str, Any]:
    match block:
        case Part():
            return {"kind": "part", "heading": block.heading,
                    "blocks": [_block(b) for b in block.blocks]}
        case Paragraph():
            return {"kind": "paragraph", "text": block.text}
        case Bullets():
            return {"kind": "bullets", "items": block.items}
        case Caution():
            return {"kind": "caution", "title": block.title, "items": block.items}
        case Verbatim():
            return {"kind": "verbatim", "text": block.text}
        case Table():
            return {"kind": "table", "caption": block.caption, "note": block.note,
                    "columns": [{"title": c.title, "align": c.align, "share": share}
                                for c, share in zip(block.columns, shares(block), strict=True)],
                    "rows": block.rows}
        case Figure():
            return {"kind": "figure", "file": f"{block.key}.svg", "caption": block.caption,
                    "alternative": block.alternative}
