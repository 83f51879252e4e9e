from __future__ import annotations

import datetime
import io
from pathlib import Path

import pytest
from docx import Document
from docx.document import Document as WordDocument
from docx.oxml.ns import qn

from unlanded.errors import Refused
from unlanded.report.folder import Contents
from unlanded.report.memo import Bullets, Caution, Memo, Paragraph, Part, Verbatim
from unlanded.report.memo_word import word_bytes
from unlanded.report.tables import Column, Table

NASTY = '<b>&"$1$\x1b[0m\u202e =2+3'
SMALL = Memo("A title that is long enough for the header of a page to have no room for all of it",
             "S", "c.toml", "0123456789abcdef", datetime.date(2026, 3, 9), (
                 Part("One", (
                     Paragraph(NASTY), Bullets((NASTY,)), Caution("Mind", ("this",)),
                     Table("t", "Caption.", (Column("A"), Column("B", "V", "right")),
                           (("x\ny", "1"), (NASTY, "2")), "Note."),
                     Part("Two", (Verbatim("  a = 1\n\n# b"),)))),), prepared_by="A. Engineer")


def read(data: bytes) -> WordDocument:
    return Document(io.BytesIO(data))


@pytest.fixture(scope="module")
def word(folder: Path) -> WordDocument:
    return Document(str(folder / "memo.docx"))


def headings(document: WordDocument) -> list[tuple[str, str]]:
    return [(p.style.name, p.text) for p in document.paragraphs
            if p.style is not None and p.style.name.startswith("Heading")]


def test_headings_are_headings(word: WordDocument, contents: Contents) -> None:
    tops = [text for style, text in headings(word) if style == "Heading 1"]
    assert tops == [p.heading for p in contents.memo.parts]


def test_captions_count_themselves(word: WordDocument, contents: Contents) -> None:
    captions = [p for p in word.paragraphs if p.style is not None and p.style.name == "Caption"]
    codes = [f.get(qn("w:instr")) for p in captions for f in p._p.iter(qn("w:fldSimple"))]
    memo = contents.memo
    assert codes.count("SEQ Table \\* ARABIC") == len(memo.tables)
    assert codes.count("SEQ Figure \\* ARABIC") == len(memo.figures)
    said = ["".join(t.text for t in p._p.iter(qn("w:t"))) for p in captions]
    tables = [s for s in said if s.startswith("Table")]
    assert [s.split(".")[0] for s in tables] == [f"Table {i + 1}" for i in range(len(memo.tables))]
    assert [s.replace("\xa0", " ").partition(". ")[2] for s in tables] == [
        t.caption for t in memo.tables]


def test_every_picture_has_its_alternative(word: WordDocument, contents: Contents) -> None:
    described = [p.get("descr") for p in word.element.body.iter(qn("wp:docPr"))]
    assert described == [f.alternative for f in contents.memo.figures]


def test_tables_repeat_their_headings_and_hold_every_cell(
    word: WordDocument, contents: Contents
) -> None:
    assert len(word.tables) == len(contents.memo.tables)
    for made, table in zip(word.tables, contents.memo.tables, strict=True):
        marks = [row._tr.trPr.find(qn("w:tblHeader")) is not None for row in made.rows]
        assert marks == [True] + [False] * len(table.rows)
        cells = tuple(tuple(c.text.replace("\xa0", " ") for c in row.cells) for row in made.rows)
        wanted = tuple(tuple(c.replace("\xa0", " ") for c in row)
                       for row in (table.titles, *table.rows))
        assert cells == wanted
        page = word.sections[0]
        rounding = 635 * len(table.columns)  # the format counts in twentieths of a point
        widths = sum(c.width for c in made.rows[0].cells)
        assert widths <= page.page_width - page.left_margin - page.right_margin + rounding


def test_properties_and_paper(word: WordDocument, contents: Contents) -> None:
    words = word.core_properties
    assert words.title == contents.memo.title
    assert words.author == "A. Engineer"
    assert words.created.date() == contents.memo.date
    assert contents.memo.fingerprint in words.subject
    assert round(word.sections[0].page_width.mm) == 210
    letter = read(word_bytes(SMALL, {}, paper="us-letter"))
    assert round(letter.sections[0].page_width.mm, 1) == 215.9
    with pytest.raises(Refused, match="paper: must be one of a4, us-letter; given a5"):
        word_bytes(SMALL, {}, paper="a5")


def test_the_same_memo_is_the_same_bytes() -> None:
    assert word_bytes(SMALL, {}) == word_bytes(SMALL, {})


def test_text_comes_out_as_text() -> None:
    document = read(word_bytes(SMALL, {}))
    tame = '<b>&"$1$�[0m� =2+3'
    texts = [p.text for p in document.paragraphs]
    assert tame in texts
    assert document.tables[0].cell(2, 0).text == tame
    assert document.tables[0].cell(1, 0).text == "x\ny"
    assert "  a = 1\n\n# b" in texts
    assert headings(document) == [("Heading 1", "One"), ("Heading 2", "Two")]
    header = document.sections[0].header.paragraphs[0].text
    assert header.startswith("A title that is long enough")
    assert "…\tCase fingerprint 0123456789ab" in header


def firm(path: Path, *, without: tuple[str, ...] = ()) -> Path:
    document = Document()
    for name in without:
        style = document.styles[name]
        style._element.getparent().remove(style._element)
    document.add_paragraph("Text of the template.")
    document.sections[0].header.paragraphs[0].text = "The firm"
    document.save(str(path))
    return path


def test_a_template_keeps_its_edges_and_loses_its_text(tmp_path: Path) -> None:
    made = read(word_bytes(SMALL, {}, template=firm(tmp_path / "firm.docx")))
    assert made.sections[0].header.paragraphs[0].text == "The firm"
    assert "Text of the template." not in [p.text for p in made.paragraphs]
    assert headings(made)[0] == ("Heading 1", "One")


def test_a_template_without_our_styles_still_has_headings(tmp_path: Path) -> None:
    bare = firm(tmp_path / "bare.docx", without=("Heading 1", "Heading 2", "Caption", "Title",
                                                 "Table Grid", "List Bullet", "No Spacing"))
    made = read(word_bytes(SMALL, {}, template=bare))
    outlined = {p.text: p._p.pPr.find(qn("w:outlineLvl")).get(qn("w:val"))
                for p in made.paragraphs
                if p._p.pPr is not None and p._p.pPr.find(qn("w:outlineLvl")) is not None}
    assert outlined == {"One": "0", "Two": "1"}
    assert any(p.text.startswith("•  ") for p in made.paragraphs)


@pytest.mark.parametrize(("name", "data", "rule"), [
    ("firm.dotx", b"", r'template "firm.dotx": must be a .docx file; given .dotx. \(open it'),
    ("firm", b"", "given no ending"),
    ("none.docx", None, "no such file"),
    ("text.docx", b"not a zip", "not a Word document that can be read"),
])
def test_what_is_no_template_is_refused(
    tmp_path: Path, name: str, data: bytes | None, rule: str
) -> None:
    if data is not None:
        (tmp_path / name).write_bytes(data)
    with pytest.raises(Refused, match=rule):
        word_bytes(SMALL, {}, template=tmp_path / name)
