from __future__ import annotations

from case_text import SITES, changed
from unlanded.case.loading import load_case, read_case
from unlanded.report.investigation import Investigation, investigate
from unlanded.report.memo import Bullets, Paragraph
from unlanded.report.sizing import sizing_part, sizing_results, sizing_sources
from unlanded.report.tables import Table


def rows(investigation: Investigation) -> dict[str, str]:
    part = sizing_part(investigation)
    assert part is not None
    table = next(b for b in part.blocks if isinstance(b, Table))
    return {row[0]: row[2] for row in table.rows}


def test_an_empty_window_says_so_and_names_the_alternatives(moor: Investigation) -> None:
    found = rows(moor)
    assert found["Which meter does all of it?"] == "none"
    part = sizing_part(moor)
    assert part is not None
    (bullets,) = (b for b in part.blocks if isinstance(b, Bullets))
    assert "lock the neighbours" in bullets.items[0]
    results = sizing_results(moor)
    assert results is not None
    assert results["window_empty"]
    assert "no proof that a conductor is dead" in part.blocks[-1].text  # type: ignore[union-attr]


def test_a_case_that_does_not_ask_has_no_part(mill: Investigation) -> None:
    assert sizing_part(mill) is None
    assert sizing_results(mill) is None
    assert list(sizing_sources(mill)) == []


def test_lengths_windows_bleeders_and_circuits() -> None:
    text = load_case(SITES / "tern-quay.toml").text
    assert "[sizing]" not in text
    found = investigate(read_case(changed(text, ("[device]", (
        '[sizing]\ncollapse_to = "20 V"\nreading_limit = "60 V"\n\n[device]')))))
    answers = rows(found)
    length = next(a for q, a in answers.items() if "How long" in q)
    assert length.startswith("up to ")
    assert length.endswith(" m")
    # 230 V over what is left of 15 mA.
    trip = next(a for q, a in answers.items() if "leaves the device on" in q)
    spare = 15e-3 - abs(found.run.residual)
    assert trip == f"from {230 / spare / 1e3:.1f} kΩ"
    assert "(E12)" in next(a for q, a in answers.items() if "Which resistor" in q)
    assert int(next(a for q, a in answers.items() if "How many" in q)) == int(
        9e-3 / abs(found.run.residual))
    assert all(isinstance(b, Paragraph | Table) for b in sizing_part(found).blocks)  # type: ignore[union-attr]
    assert {w for w, _ in sizing_sources(found)} == {"preferred values", "ratings of resistors"}
