"""The memo as a Word file: real headings, captions, header rows and alternative text."""

from __future__ import annotations

import datetime
import io
import zipfile
from collections.abc import Mapping
from itertools import zip_longest
from pathlib import Path
from typing import Any

from docx import Document
from docx.enum.style import WD_STYLE_TYPE
from docx.enum.text import WD_ALIGN_PARAGRAPH, WD_TAB_ALIGNMENT, WD_TAB_LEADER
from docx.oxml import OxmlElement
from docx.oxml.ns import qn
from docx.shared import Mm, Pt, RGBColor

from ..errors import Refused
from .figure import Figure
from .memo import Block, Bullets, Caution, Memo, Paragraph, Part, Verbatim, facts
from .tables import Table, shares
from .word_marks import boxed, field, reproducible, row_marks, ruled, shaded
from .words import bound, cut, printable

PAPERS = {"a4": (210, 297), "us-letter": (215.9, 279.4)}  # mm
WHOLE = 14  # rows of a table that is kept on one page
SANS, MONO = "Arial", "Courier New"  # have equals of the same widths where they are missing
FOOTER = "A calculation. It never proves a conductor dead."

_ALIGN = {"left": WD_ALIGN_PARAGRAPH.LEFT, "right": WD_ALIGN_PARAGRAPH.RIGHT,
          "centre": WD_ALIGN_PARAGRAPH.CENTER}
_INK = RGBColor(0x1F, 0x2D, 0x3D)


def word_bytes(
    memo: Memo,
    pictures: Mapping[str, Path],
    *,
    template: Path | None = None,
    paper: str = "a4",
) -> bytes:
    """The memo as a .docx; `pictures` has each figure's PNG by its key.

    `template` is a firm's own .docx: its styles, page, header and footer are kept, its text is
    not; a style it lacks falls back to one it has. `paper`, "a4" or "us-letter", counts without
    a template only.
    """
    document = Document() if template is None else _template(template)
    if template is None:
        _look(document, paper)
    writer = _Writer(document, pictures)
    _properties(document, memo)
    _edges(document, memo)
    _title_block(writer, memo)
    for part in memo.parts:
        writer.block(part, 1)
    out = io.BytesIO()
    document.save(out)
    return reproducible(out.getvalue())


class _Writer:
    """Sets blocks at the end of a document, counting figures and tables."""

    def __init__(self, document: Any, pictures: Mapping[str, Path]) -> None:
        self.document = document
        self.pictures = pictures
        self.styles = {s.name: s for s in document.styles}
        self.counts = {"Figure": 0, "Table": 0}
        page = document.sections[-1]
        self.width = int(page.page_width - page.left_margin - page.right_margin)

    def paragraph(self, text: str = "", *styles: str) -> Any:
        """A paragraph in the first of `styles` that the document has."""
        found = self.document.add_paragraph(bound(printable(text)))
        if style := next((s for s in styles if s in self.styles), None):
            found.style = self.styles[style]
        return found

    def block(self, block: Block, level: int) -> None:
        """Set one block; a part's own blocks a level deeper."""
        match block:
            case Part():
                self.heading(block.heading, level)
                for inner, after in zip_longest(block.blocks, block.blocks[1:]):
                    self.block(inner, level + 1)
                    if isinstance(inner, Paragraph) and isinstance(after, Bullets | Verbatim):
                        self.document.paragraphs[-1].paragraph_format.keep_with_next = True
            case Paragraph():
                self.paragraph(block.text)
            case Bullets():
                self.bullets(block.items)
            case Caution():
                self.caution(block)
            case Verbatim():
                self.verbatim(block.text)
            case Table():
                self.table(block)
            case Figure():
                self.figure(block)

    def heading(self, text: str, level: int) -> None:
        found = self.paragraph(text, f"Heading {level}", f"heading {level}")
        found.paragraph_format.keep_with_next = True
        # Without the style the outline level still makes it a heading to Word and readers.
        if not found.style.name.lower().startswith("heading"):
            found.runs[0].bold = True
            outline = OxmlElement("w:outlineLvl")
            outline.set(qn("w:val"), str(level - 1))
            found._p.get_or_add_pPr().append(outline)

    def bullets(self, items: tuple[str, ...], *, in_box: bool = False) -> None:
        """A list; in a box all of it stays on one page."""
        for item in items:
            found = self.paragraph(item, "List Bullet")
            if found.style.name != "List Bullet":
                found.runs[0].text = f"•  {found.runs[0].text}"
            if in_box:
                boxed(found)
                found.paragraph_format.keep_with_next = item is not items[-1]

    def caution(self, block: Caution) -> None:
        title = self.paragraph(block.title)
        title.runs[0].bold = True
        title.paragraph_format.keep_with_next = True
        boxed(title)
        self.bullets(block.items, in_box=True)

    def verbatim(self, text: str) -> None:
        found = self.paragraph("", "No Spacing")
        found.add_run(printable(text))
        found.alignment = WD_ALIGN_PARAGRAPH.LEFT
        shaded(found, "F5F6F8")
        for run in found.runs:
            run.font.name = MONO
            run.font.size = Pt(7)
            run._r.rPr.rFonts.set(qn("w:cs"), MONO)

    def caption(self, kind: str, text: str) -> Any:
        self.counts[kind] += 1
        found = self.paragraph("", "Caption", "caption")
        found.add_run(f"{kind} ").bold = True
        field(found, f"SEQ {kind} \\* ARABIC", str(self.counts[kind])).bold = True
        found.add_run(". ").bold = True
        found.add_run(bound(printable(text)))
        return found

    def figure(self, figure: Figure) -> None:
        holder = self.paragraph()
        holder.paragraph_format.keep_with_next = True
        holder.paragraph_format.space_before = Pt(10)
        picture = holder.add_run().add_picture(str(self.pictures[figure.key]), width=self.width)
        words = picture._inline.docPr
        words.set("descr", printable(figure.alternative))
        words.set("title", printable(figure.title))
        words.set("name", f"Figure {self.counts['Figure'] + 1}")
        self.caption("Figure", figure.caption)

    def table(self, table: Table) -> None:
        self.caption("Table", table.caption).paragraph_format.keep_with_next = True
        made = self.document.add_table(rows=1 + len(table.rows), cols=len(table.columns))
        if "Table Grid" in self.styles:
            made.style = self.styles["Table Grid"]
        made.autofit = False
        ruled(made)
        size = Pt(9 if len(table.columns) < 6 else 8 if len(table.columns) < 7 else 7)
        whole = len(table.rows) <= WHOLE
        widths = [int(self.width * share) for share in shares(table)]
        for number, (row, cells) in enumerate(
            zip(made.rows, (table.titles, *table.rows), strict=True)
        ):
            row_marks(row, heading=number == 0)
            last = number == len(table.rows)
            kept = bool(table.note) if last else whole
            for cell, text, column, width in zip(
                row.cells, cells, table.columns, widths, strict=True
            ):
                cell.width = width
                line = _fill(cell, bound(printable(text)), _ALIGN[column.align], size)
                line.runs[0].bold = number == 0 or None
                line.paragraph_format.keep_with_next = kept or None
        for column, width in zip(made.columns, widths, strict=True):
            column.width = width
        if table.note:
            note = self.paragraph(table.note)
            note.runs[0].font.size = Pt(8.5)
            note.paragraph_format.space_before = Pt(3)


def _template(path: Path) -> Any:
    """A firm's document without its text, or a refusal that says what to do."""
    place = f'template "{path.name}"'
    if path.suffix.lower() != ".docx":
        raise Refused(place, "must be a .docx file", given=path.suffix or "no ending",
                      hint="open it in the word processor and save it as .docx")
    if not path.is_file():
        raise Refused(place, "no such file")
    try:
        document = Document(io.BytesIO(path.read_bytes()))
    except (ValueError, KeyError, zipfile.BadZipFile, OSError) as problem:
        raise Refused(place, "is not a Word document that can be read",
                      hint="open it in the word processor and save it as .docx") from problem
    for element in list(document.element.body):
        if element.tag != qn("w:sectPr"):
            document.element.body.remove(element)
    return document


def _look(document: Any, paper: str) -> None:
    """Page and styles of our own, where no firm's template says otherwise."""
    if paper not in PAPERS:
        raise Refused("paper", f"must be one of {', '.join(PAPERS)}", given=paper)
    page = document.sections[0]
    page.page_width, page.page_height = (Mm(v) for v in PAPERS[paper])
    page.left_margin = page.right_margin = page.bottom_margin = Mm(25)
    page.top_margin = Mm(27)
    sizes = {"Normal": 10, "Title": 20, "Heading 1": 14, "Heading 2": 11.5, "Caption": 9,
             "List Bullet": 10, "No Spacing": 9}
    for name, size in sizes.items():
        style = document.styles[name]
        style.font.size = Pt(size)
        _typeface(style, SANS)
        if name not in ("Normal", "List Bullet", "No Spacing"):
            style.font.color.rgb = _INK
    document.styles["Normal"].paragraph_format.space_after = Pt(6)
    document.styles["Caption"].paragraph_format.space_before = Pt(10)
    document.styles["Caption"].paragraph_format.space_after = Pt(4)
    document.styles["Caption"].font.bold = False
    document.styles["Heading 1"].paragraph_format.space_before = Pt(16)
    document.styles["Heading 1"].paragraph_format.space_after = Pt(5)
    rule = document.styles["Title"].element.pPr.find(qn("w:pBdr"))
    if rule is not None:
        rule.getparent().remove(rule)


def _typeface(style: Any, name: str) -> None:
    """A theme's typeface wins over a named one, so its attributes must go."""
    style.font.name = name
    fonts = style.element.rPr.rFonts
    for word in ("asciiTheme", "hAnsiTheme", "eastAsiaTheme", "cstheme"):
        fonts.attrib.pop(qn(f"w:{word}"), None)
    for word in ("hAnsi", "cs"):
        fonts.set(qn(f"w:{word}"), name)


def _properties(document: Any, memo: Memo) -> None:
    words = document.core_properties
    moment = datetime.datetime.combine(memo.date, datetime.time())
    words.title = printable(memo.title)[:255]
    words.subject = printable(f"Case {memo.case_file}, fingerprint {memo.fingerprint}")[:255]
    words.author = words.last_modified_by = printable(memo.prepared_by)[:255]
    words.comments = words.keywords = ""
    words.language = memo.language
    words.created = words.modified = moment
    words.revision = 1
    defaults = document.styles.element.find(f"{qn('w:docDefaults')}//{qn('w:rPr')}")
    if defaults is None:
        return
    language = defaults.find(qn("w:lang"))
    if language is None:
        language = OxmlElement("w:lang")
        defaults.append(language)
    language.set(qn("w:val"), memo.language)


def _edges(document: Any, memo: Memo) -> None:
    """Header and footer, unless the template brings its own."""
    page = document.sections[0]
    width = page.page_width - page.left_margin - page.right_margin
    for edge, text in ((page.header, memo.title), (page.footer, FOOTER)):
        if any(p.text.strip() for p in edge.paragraphs) or edge.tables:
            continue
        line = edge.paragraphs[0]
        line.style = document.styles.default(WD_STYLE_TYPE.PARAGRAPH)
        line.paragraph_format.tab_stops.clear_all()
        line.paragraph_format.tab_stops.add_tab_stop(width, WD_TAB_ALIGNMENT.RIGHT)
        line.add_run(f"{cut(printable(text), 64)}\t")
        runs = [*line.runs]
        if text == FOOTER:
            runs += [line.add_run("Page "), field(line, "PAGE", "1"), line.add_run(" of "),
                     field(line, "NUMPAGES", "1")]
        else:
            runs.append(line.add_run(f"Case fingerprint {memo.fingerprint[:12]}"))
        for run in runs:
            run.font.size = Pt(8.5)


def _title_block(writer: _Writer, memo: Memo) -> None:
    writer.paragraph(memo.title, "Title", "Heading 1")
    for name, value in facts(memo):
        line = writer.paragraph("", "No Spacing")
        line.paragraph_format.left_indent = Mm(28)
        line.paragraph_format.first_line_indent = Mm(-28)
        line.paragraph_format.tab_stops.add_tab_stop(Mm(28))
        line.add_run(f"{name}\t").bold = True
        line.add_run(printable(value))
        line.alignment = WD_ALIGN_PARAGRAPH.LEFT
    for role, person in (("Prepared by", memo.prepared_by), ("Checked by", memo.checked_by)):
        line = writer.paragraph("", "No Spacing")
        line.paragraph_format.space_before = Pt(14)
        stops = line.paragraph_format.tab_stops
        stops.add_tab_stop(Mm(28))
        stops.add_tab_stop(Mm(75))
        stops.add_tab_stop(writer.width, WD_TAB_ALIGNMENT.RIGHT, WD_TAB_LEADER.LINES)
        line.add_run(f"{role}\t").bold = True
        line.add_run(f"{printable(person)}\tSignature, date \t")


def _fill(cell: Any, text: str, align: Any, size: Any) -> Any:
    line = cell.paragraphs[0]
    line.alignment = align
    line.paragraph_format.space_after = Pt(1)
    line.paragraph_format.space_before = Pt(1)
    run = line.add_run(text)
    run.font.size = size
    return line
