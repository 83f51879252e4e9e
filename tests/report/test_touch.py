from __future__ import annotations

from collections.abc import Callable

import pytest

from case_text import SITES
from unlanded.case.loading import load_case
from unlanded.report.investigation import Investigation, investigate
from unlanded.report.memo import Caution, Paragraph
from unlanded.report.tables import Table
from unlanded.report.touch import touch_finding, touch_part, touch_results, touch_sources


def test_every_unearthed_conductor_once_and_a_caution(moor: Investigation) -> None:
    part = touch_part(moor)
    assert part is not None
    touch, induced = (b for b in part.blocks if isinstance(b, Table))
    assert sorted(row[0].split(",")[0] for row in touch.rows) == ["1", "2", "3", "4", "5", "6"]
    assert touch.rows[0][0].startswith("1,")
    assert [row[0] for row in induced.rows] == ["2", "3", "4", "5", "6", "7"]
    assert "6 A in 1 and back by earth" in induced.caption
    assert isinstance(part.blocks[-1], Caution)


def test_what_can_be_felt_is_in_the_summary(moor: Investigation, quay: Investigation) -> None:
    (finding,) = touch_finding(moor)
    assert isinstance(finding, Paragraph)
    assert "can be felt" in finding.text
    assert "must be bonded to earth" in finding.text
    assert touch_finding(quay) == []  # 85 m drive less than half a milliampere


def test_what_only_some_draws_pass_is_told() -> None:
    # 480 µA as computed; the screen's capacitance to earth is little known.
    hill = investigate(load_case(SITES / "chalk-hill.toml"))
    (finding,) = touch_finding(hill)
    assert isinstance(finding, Paragraph)
    assert "480 µA (up to 5" in finding.text
    assert "may pass 500 µA; as computed below what people feel" in finding.text


def test_no_conductor_is_called_free_of_danger(sites: tuple[Investigation, ...]) -> None:
    for site in sites:
        part = touch_part(site)
        assert part is not None
        said = [row[-1] for b in part.blocks if isinstance(b, Table) for row in b.rows]
        said += [b.text for b in part.blocks if isinstance(b, Paragraph)]
        spoken = " ".join(said).lower().replace(".", " ").replace(",", " ").split()
        assert not {"dead", "safe", "harmless"} & set(spoken)


def test_results_and_sources(moor: Investigation) -> None:
    rows = touch_results(moor)
    assert [r["body_current_A"] for r in rows] == sorted(
        (r["body_current_A"] for r in rows), reverse=True)
    assert {"current that is felt", "extra-low voltage"} <= {w for w, _ in touch_sources(moor)}


@pytest.mark.parametrize(("earthed", "words"), [
    ("none", "The screen is earthed at no end: no current flows along it, and it takes nothing"),
    ("near", "The screen is earthed at the near end alone: no current flows along it"),
    # Screen of (1 + √2) 1.83 + 0.3 mm, 15 Ω/km: 2π50 × 0.2 ln(931.3 / 0.004718) = 0.7660 mΩ/m, so
    # 6 |0.0493 + 0.7660 j| / |15.0493 + 0.7660 j| = 0.306 A, and 15 / 15.0688 is left.
    ("both", "The screen is earthed at both ends, carries 306 mA of it back, and leaves 99.5 %")])
def test_induction_with_a_screen(
    screened: Callable[[str], Investigation], earthed: str, words: str
) -> None:
    part = touch_part(screened(earthed))
    assert part is not None
    touch, induced = (b for b in part.blocks if isinstance(b, Table))
    assert words in induced.note
    assert ("screen" in [row[0] for row in induced.rows]) == (earthed != "both")
    assert any(row[0].startswith("screen") for row in touch.rows) == (earthed == "none")
