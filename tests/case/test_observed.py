"""From readings of a case, or of a CSV, to what they mean."""

from __future__ import annotations

import math
from pathlib import Path

import pytest

from case_text import SITES
from unlanded.case.build import build_run
from unlanded.case.loading import Case, load_case, read_case
from unlanded.case.observed import (
    COLUMNS,
    case_causes,
    case_observations,
    case_suspects,
    with_readings,
)
from unlanded.errors import Refused

QUAY = (SITES / "tern-quay.toml").read_text(encoding="utf-8")
WITHOUT = QUAY[: QUAY.index("[[readings]]")]
HEADING = ",".join(COLUMNS)


def csv(folder: Path, *rows: str, heading: str = HEADING) -> Path:
    path = folder / "readings.csv"
    path.write_text("\n".join([heading, *rows]) + "\n", encoding="utf-8-sig")
    return path


def named(name: str) -> Case:
    return load_case(SITES / f"{name}.toml")


@pytest.mark.parametrize(("name", "suspects"), [
    ("tern-quay", ("black",)), ("alder-mill", ("white", "green")), ("larkmoor", ("2", "3")),
])
def test_suspects_are_what_nothing_feeds_and_was_read(name: str, suspects: tuple[str, ...]) -> None:
    case = named(name)
    assert case_suspects(case.content, build_run(case)) == suspects


def test_without_readings_every_conductor_that_nothing_feeds() -> None:
    case = read_case(WITHOUT)
    assert case_suspects(case.content, build_run(case)) == ("black",)


@pytest.mark.parametrize("name", ["tern-quay", "alder-mill"])
def test_the_demo_sites_are_coupling(name: str) -> None:
    case = named(name)
    found = case_causes(case, *(build_run(case, at) for at in ("likely", "low", "high")))
    assert found is not None
    for suspect in found.reduced.suspects:
        odds = found.odds(suspect)
        assert odds["capacitive coupling"] > 0.85
        assert odds["solid connection"] < 1e-3


def test_a_csv_adds_its_readings(tmp_path: Path) -> None:
    path = csv(tmp_path, "digital-10M,black@far,earth,107.9 V,,,",
               "digital-10M,black@far,earth,26.3 V,neighbours off; loads off,100 kohm,windy",
               "coil-tester,black@far,earth,,,,not taken")
    seen = case_observations(with_readings(read_case(WITHOUT), path))
    assert [r.text for r in seen] == ["107.9 V", "26.3 V"]
    assert seen[1].actions == {"neighbours off", "loads off"}
    assert seen[1].resistor == 100e3
    assert math.isinf(seen[0].resistor)


def test_a_spreadsheet_with_semicolons_is_read_too(tmp_path: Path) -> None:
    path = csv(tmp_path, "digital-10M;black@far;earth;107.9 V",
               heading="instrument;from;to;shows")
    assert len(case_observations(with_readings(read_case(WITHOUT), path))) == 1


@pytest.mark.parametrize(("row", "words"), [
    ("digital-10M,purple@far,earth,107.9 V,,,", 'readings.csv row 2, column "from".*purple'),
    ("digital-10M,black@far,earth,107.9,,,", 'row 2, column "shows".*unit'),
    ("digitl-10M,black@far,earth,107.9 V,,,", "did you mean"),
    ("coil-tester,black@far,earth,12 V,,,", "row 2"),
    ("digital-10M,black@far,earth,1 V,neighbour off,,", "neighbours off"),
])
def test_a_wrong_cell_is_refused_by_row_and_column(tmp_path: Path, row: str, words: str) -> None:
    with pytest.raises(Refused, match=words):
        with_readings(read_case(QUAY), csv(tmp_path, row))


def test_columns_that_are_missing_or_strange_are_refused(tmp_path: Path) -> None:
    with pytest.raises(Refused, match="has no column of this name; given shows"):
        with_readings(read_case(QUAY), csv(tmp_path, heading="instrument,from,to"))
    with pytest.raises(Refused, match='did you mean "note"'):
        with_readings(read_case(QUAY), csv(tmp_path, heading=f"{HEADING},notes"))
