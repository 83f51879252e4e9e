from __future__ import annotations

import datetime
from dataclasses import replace
from io import BytesIO
from pathlib import Path

import pytest
from pypdf import PdfReader

from unlanded.report.folder import Contents
from unlanded.report.memo import Bullets, Caution, Memo, Paragraph, Part, Verbatim
from unlanded.report.memo_pdf import pdf_bytes
from unlanded.report.tables import Column, Table

NASTY = '#[x] *b* _i_ $1$ <b> \\n "q" @a `c` // d\x1b'
SMALL = Memo("T", "S", "c.toml", "0123456789abcdef", datetime.date(2026, 3, 9), (
    Part("One", (Paragraph(NASTY), Bullets((NASTY,)), Caution("Mind", ("this",)),
                 Table("t", "Caption.", (Column("A"), Column("B", "V", "right")),
                       (("first\nsecond", ""), ("x" * 120, "2")), "Note."),
                 Part("Two", (Verbatim("a = 1\n# b"),)))),))


def text(reader: PdfReader) -> str:
    return " ".join(" ".join(p.extract_text() for p in reader.pages).split())


@pytest.fixture(scope="module")
def pdf(folder: Path) -> PdfReader:
    return PdfReader(folder / "memo.pdf")


def test_it_is_tagged_and_says_that_it_is_accessible(pdf: PdfReader) -> None:
    root = pdf.trailer["/Root"]
    assert root["/MarkInfo"]["/Marked"]
    assert "/StructTreeRoot" in root
    assert root["/Lang"] == "en-GB"
    assert b"<pdfuaid:part>1</pdfuaid:part>" in root["/Metadata"].get_data()


def test_it_has_its_title_author_and_date(pdf: PdfReader, contents: Contents) -> None:
    meta = pdf.metadata
    assert meta is not None
    assert meta.title == contents.memo.title
    assert meta.author == "A. Engineer"
    assert meta.creation_date is not None
    assert meta.creation_date.date() == contents.memo.date


def test_it_has_every_part_caption_and_the_fingerprint(
    pdf: PdfReader, contents: Contents
) -> None:
    found = text(pdf).replace("- ", "").replace("\xa0", " ")
    memo = contents.memo
    for part in memo.parts:
        assert part.heading in found
    for i, figure in enumerate(memo.figures, 1):
        assert f"Figure {i}. {figure.caption[:30]}" in found
    for i, table in enumerate(memo.tables, 1):
        assert f"Table {i}. {table.caption[:20]}" in found
    assert found.count(memo.fingerprint[:12]) >= len(pdf.pages) - 1
    assert "never proves a conductor dead" in found


def test_bookmarks_are_the_headings(pdf: PdfReader, contents: Contents) -> None:
    tops = [o.title for o in pdf.outline if not isinstance(o, list)]
    assert tops == [p.heading for p in contents.memo.parts]


def test_pictures_carry_their_alternative(pdf: PdfReader, contents: Contents) -> None:
    described = [o["/Alt"] for i in range(1, len(pdf.xref[0]) + 1)
                 if isinstance(o := pdf.get_object(i), dict) and "/Alt" in o]
    assert sorted(d.replace("\xa0", " ") for d in described) == sorted(
        f.alternative for f in contents.memo.figures)


def test_text_is_never_taken_for_markup() -> None:
    found = text(PdfReader(BytesIO(pdf_bytes(SMALL, {}))))
    assert '#[x] *b* _i_ $1$ <b> \\n "q" @a `c` // d�' in found
    assert "first second" in found


def test_paper_and_language() -> None:
    letter = PdfReader(BytesIO(pdf_bytes(replace(SMALL, language="en-US"), {}, paper="us-letter")))
    assert [float(v) for v in letter.pages[0].mediabox[2:]] == [612, 792]
    assert letter.trailer["/Root"]["/Lang"] == "en-US"
    assert "March 9, 2026" in text(letter)


def test_the_same_memo_is_the_same_bytes() -> None:
    assert pdf_bytes(SMALL, {}) == pdf_bytes(SMALL, {})
