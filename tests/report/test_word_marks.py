from __future__ import annotations

import io
import zipfile

from docx import Document
from docx.oxml.ns import qn

from unlanded.report.word_marks import boxed, field, reproducible, row_marks, ruled, shaded


def test_a_field_shows_its_text_until_it_is_counted() -> None:
    line = Document().add_paragraph("Table ")
    field(line, "SEQ Table", "7")
    made = line._p.find(qn("w:fldSimple"))
    assert made.get(qn("w:instr")) == "SEQ Table"
    assert [t.text for t in made.iter(qn("w:t"))] == ["7"]


def test_properties_stand_in_the_order_that_the_format_asks() -> None:
    line = Document().add_paragraph("text")
    line.paragraph_format.left_indent = 10
    line.paragraph_format.keep_with_next = True
    shaded(line, "F5F6F8")
    assert [e.tag for e in line._p.pPr] == [qn(f"w:{n}") for n in ("keepNext", "shd", "ind")]
    box = Document().add_paragraph("text")
    boxed(box)
    assert [e.tag for e in box._p.pPr] == [qn(f"w:{n}") for n in ("pBdr", "shd", "spacing")]


def test_rows_and_rules() -> None:
    table = Document().add_table(2, 1)
    ruled(table)
    row_marks(table.rows[0], heading=True)
    row_marks(table.rows[1], heading=False)
    assert [[e.tag for e in r._tr.trPr] for r in table.rows] == [
        [qn("w:cantSplit"), qn("w:tblHeader")], [qn("w:cantSplit")]]
    borders = table._tbl.tblPr.find(qn("w:tblBorders"))
    assert borders.find(qn("w:insideV")).get(qn("w:val")) == "nil"
    assert borders.find(qn("w:insideH")).get(qn("w:val")) == "single"


def test_a_zip_without_its_times() -> None:
    out = io.BytesIO()
    with zipfile.ZipFile(out, "w") as made:
        made.writestr(zipfile.ZipInfo("a", (2026, 3, 9, 1, 2, 4)), b"text")
    with zipfile.ZipFile(io.BytesIO(reproducible(out.getvalue()))) as same:
        assert [(i.filename, i.date_time) for i in same.infolist()] == [
            ("a", (1980, 1, 1, 0, 0, 0))]
        assert same.read("a") == b"text"
