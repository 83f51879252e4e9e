"""Parts of the memo as a terminal shows them."""

from __future__ import annotations

from unlanded.report.memo import Bullets, Caution, Paragraph, Part, Verbatim
from unlanded.report.tables import Column, Table
from unlanded.report.terminal import part_text


def test_every_kind_of_block_within_the_width() -> None:
    table = Table("t", "Two cores", (Column("Core"), Column("U", "V", "right")), (("a", "1"),))
    part = Part("Margin", (
        Paragraph("word " * 60), Bullets(("one " * 40, "two")), Caution("Before", ("mind " * 40,)),
        Verbatim("unlanded check"), table, Part("Within", (Paragraph("deep\x1b[2J"),))))
    text = part_text(part, 60)
    assert max(len(line) for line in text.splitlines()) <= 60
    for word in ("Margin\n──────", "• two", "Before:", "unlanded check", "Two cores", "Within"):
        assert word in text
    assert "\x1b" not in text
