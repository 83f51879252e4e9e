"""What python-docx has no words for, as marks in the Word file's own XML."""

from __future__ import annotations

import io
import zipfile
from typing import Any

from docx.oxml import OxmlElement
from docx.oxml.ns import qn
from docx.shared import Pt


def field(paragraph: Any, code: str, shown: str) -> Any:
    """A field that Word can count again, with the text it shows until then."""
    made = OxmlElement("w:fldSimple")
    made.set(qn("w:instr"), code)
    run = paragraph.add_run(shown)
    paragraph._p.remove(run._r)
    made.append(run._r)
    paragraph._p.append(made)
    return run


def shaded(paragraph: Any, fill: str) -> None:
    """The paragraph on a ground of that colour, RRGGBB."""
    shade = OxmlElement("w:shd")
    for word, value in (("val", "clear"), ("color", "auto"), ("fill", fill)):
        shade.set(qn(f"w:{word}"), value)
    paragraph._p.get_or_add_pPr().insert_element_before(
        shade, "w:tabs", "w:suppressAutoHyphens", "w:spacing", "w:ind", "w:jc", "w:outlineLvl",
        "w:rPr", "w:sectPr")


def boxed(paragraph: Any) -> None:
    """Part of one box: Word joins the borders of paragraphs that follow each other."""
    borders = OxmlElement("w:pBdr")
    edge = OxmlElement("w:left")
    for word, value in (("val", "single"), ("sz", "24"), ("space", "6"), ("color", "D9822B")):
        edge.set(qn(f"w:{word}"), value)
    borders.append(edge)
    paragraph._p.get_or_add_pPr().insert_element_before(
        borders, "w:shd", "w:tabs", "w:suppressAutoHyphens", "w:spacing", "w:ind", "w:jc",
        "w:outlineLvl", "w:rPr", "w:sectPr")
    shaded(paragraph, "FFF6E0")
    paragraph.paragraph_format.space_after = Pt(3)


def ruled(table: Any) -> None:
    """Rules above, under the headings and between rows; none between columns; narrow margins."""
    borders = OxmlElement("w:tblBorders")
    lines = {"top": ("8", "1F2D3D"), "left": None, "bottom": ("4", "9AA5B1"), "right": None,
             "insideH": ("4", "9AA5B1"), "insideV": None}
    for side, line in lines.items():
        edge = OxmlElement(f"w:{side}")
        edge.set(qn("w:val"), "single" if line else "nil")
        if line:
            edge.set(qn("w:sz"), line[0])
            edge.set(qn("w:color"), line[1])
        borders.append(edge)
    table._tbl.tblPr.insert_element_before(
        borders, "w:shd", "w:tblLayout", "w:tblCellMar", "w:tblLook", "w:tblCaption")
    margins = OxmlElement("w:tblCellMar")
    for side in ("left", "right"):
        margin = OxmlElement(f"w:{side}")
        margin.set(qn("w:w"), "50")
        margin.set(qn("w:type"), "dxa")
        margins.append(margin)
    table._tbl.tblPr.insert_element_before(margins, "w:tblLook", "w:tblCaption")


def row_marks(row: Any, *, heading: bool) -> None:
    """A row stays on one page; a heading is repeated on each."""
    marks = row._tr.get_or_add_trPr()
    for name in ("w:cantSplit", *(("w:tblHeader",) if heading else ())):
        mark = OxmlElement(name)
        mark.set(qn("w:val"), "true")
        marks.append(mark)


def reproducible(document: bytes) -> bytes:
    """The same zip with every time stamp at the format's first day."""
    out = io.BytesIO()
    with zipfile.ZipFile(io.BytesIO(document)) as old, zipfile.ZipFile(out, "w") as new:
        for name in old.namelist():
            entry = zipfile.ZipInfo(name, (1980, 1, 1, 0, 0, 0))
            entry.compress_type = zipfile.ZIP_DEFLATED
            entry.external_attr = 0o600 << 16
            new.writestr(entry, old.read(name))
    return out.getvalue()
