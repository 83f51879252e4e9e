from __future__ import annotations

import pytest

from case_text import SITES, changed
from unlanded.case.loading import load_case, read_case
from unlanded.reference.instruments import INSTRUMENTS
from unlanded.report.harmonics import harmonics_part, harmonics_results
from unlanded.report.investigation import Investigation, investigate
from unlanded.report.memo import Paragraph
from unlanded.report.tables import Table


def test_no_harmonics_no_part(moor: Investigation) -> None:
    assert not moor.run.supply.harmonics
    assert harmonics_part(moor) is None
    assert harmonics_results(moor) is None


def test_orders_stand_with_their_shares() -> None:
    text = changed(load_case(SITES / "larkmoor.toml").text,
                   ('frequency = "50 Hz"\n', 'frequency = "50 Hz"\nharmonics = {5 = "6 %"}\n'))
    found = investigate(read_case(text))
    part = harmonics_part(found)
    assert part is not None
    said, table = part.blocks
    assert isinstance(said, Paragraph)
    assert isinstance(table, Table)
    assert [row[:2] for row in table.rows] == [("50 Hz", "100 %"), ("250 Hz", "6 %"),
                                               ("together", "")]
    results = harmonics_results(found)
    assert results is not None
    body = found.run.at_order(5).connect(INSTRUMENTS["body"].ranges[0].burden, "2@near")
    assert results[1]["body_current_A"] == pytest.approx(abs(body.current), rel=1e-9, abs=0)
    # More than the supply's own share comes through: coupling grows with the order.
    assert results[1]["body_current_A"] > 3 * 0.06 * results[0]["body_current_A"]
