"""What the memo says of a current log."""

from __future__ import annotations

from unlanded.report.figure import Figure
from unlanded.report.investigation import Investigation
from unlanded.report.margin import margin_part
from unlanded.report.margin_log import milliamperes
from unlanded.report.memo import Bullets, Paragraph, Part
from unlanded.report.tables import Table


def test_the_demo_log(house: Investigation) -> None:
    part = margin_part(house)
    assert part is not None
    log = next(b for b in part.blocks if isinstance(b, Part) and b.heading == "The current log")
    said = " ".join(b.text for b in log.blocks if isinstance(b, Paragraph))
    assert "Left out, since they could not be read: 1." in said
    assert "with nothing for 2 h (gaps: 1)" in said
    assert "Europe/London" in said
    bad = next(b for b in log.blocks if isinstance(b, Bullets))
    assert "row 404" in bad.items[0]
    assert any(isinstance(b, Table) for b in log.blocks)
    assert any(isinstance(b, Figure) for b in log.blocks)


def test_currents_in_cells() -> None:
    assert [milliamperes(i) for i in (9e-3, -3.2846e-3, 0.0)] == ["9", "−3.28", "0"]
