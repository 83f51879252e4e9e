from __future__ import annotations

import json
import math
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from unlanded.errors import Refused
from unlanded.report import folder as folder_module
from unlanded.report.folder import Contents, results_text, write_folder
from unlanded.report.memo import Memo, Paragraph, Part
from unlanded.report.tables import Column, Table

TABLE = Table("numbers", "N.", (Column("A"),), (("=1",),))


@pytest.fixture
def small(contents: Contents) -> Contents:
    memo = contents.memo
    parts = (Part("One", (Paragraph("Text."), TABLE)),)
    return Contents(Memo(memo.title, memo.site, memo.case_file, memo.fingerprint, memo.date, parts),
                    b"title = 1\r\n", {"a_V": 1.5}, more_tables=(replace(TABLE, key="more"),))


def names(path: Path) -> list[str]:
    return sorted(str(p.relative_to(path)) for p in path.rglob("*") if p.is_file())


def test_the_whole_memo(folder: Path, contents: Contents) -> None:
    memo = contents.memo
    assert names(folder) == sorted([
        "case.toml", "memo.docx", "memo.pdf", "results.json",
        *(f"figures/{f.key}.{form}" for f in memo.figures for form in ("png", "svg")),
        *(f"tables/{t.key}.csv" for t in (*memo.tables, *contents.more_tables))])
    assert (folder / "case.toml").read_bytes() == contents.case_text
    json.loads((folder / "results.json").read_text(encoding="utf-8"))


def test_same_case_and_date_make_the_same_bytes(tmp_path: Path, small: Contents) -> None:
    for name in ("one", "two"):
        write_folder(tmp_path / name, small)
    one, two = ({p.name: p.read_bytes() for p in (tmp_path / n).rglob("*") if p.is_file()}
                for n in ("one", "two"))
    assert one == two
    assert len(one) == 6


@pytest.mark.parametrize("at", ["_fill", "_open_to_readers", "_put", "write_tables"])
def test_a_failure_leaves_nothing(
    tmp_path: Path, small: Contents, monkeypatch: pytest.MonkeyPatch, at: str
) -> None:
    def fail(*_: object) -> None:
        raise OSError("disk full")

    monkeypatch.setattr(folder_module, at, fail)
    with pytest.raises(OSError, match="disk full"):
        write_folder(tmp_path / "memo", small)
    assert list(tmp_path.iterdir()) == []


def test_what_is_there_is_not_written_over_unasked(tmp_path: Path, small: Contents) -> None:
    (tmp_path / "memo").mkdir()
    with pytest.raises(Refused, match='folder "memo": is there already'):
        write_folder(tmp_path / "memo", small)
    assert list((tmp_path / "memo").iterdir()) == []


def test_an_older_memo_is_replaced_when_asked(tmp_path: Path, small: Contents) -> None:
    write_folder(tmp_path / "memo", small)
    (tmp_path / "memo" / "figures" / "old.svg").write_text("old")
    paths = write_folder(tmp_path / "memo", replace(small, results={"a_V": 2}), overwrite=True)
    assert names(tmp_path) == sorted(str(p.relative_to(tmp_path)) for p in paths)
    assert '"a_V": 2' in (tmp_path / "memo" / "results.json").read_text()


def test_an_older_memo_survives_a_failure(
    tmp_path: Path, small: Contents, monkeypatch: pytest.MonkeyPatch
) -> None:
    write_folder(tmp_path / "memo", small)
    before = (tmp_path / "memo" / "results.json").read_bytes()
    rename = Path.rename

    def fail(self: Path, target: Path) -> Path:
        if self.name.startswith(".memo-") and Path(target).name == "memo":
            raise OSError("no")
        return rename(self, target)

    monkeypatch.setattr(Path, "rename", fail)
    with pytest.raises(OSError, match="no"):
        write_folder(tmp_path / "memo", replace(small, results={}), overwrite=True)
    assert (tmp_path / "memo" / "results.json").read_bytes() == before
    assert [p.name for p in tmp_path.iterdir()] == ["memo"]


def test_a_folder_with_other_things_is_never_written_over(
    tmp_path: Path, small: Contents
) -> None:
    (tmp_path / "memo").mkdir()
    (tmp_path / "memo" / "thesis.docx").write_text("mine")
    with pytest.raises(Refused, match=r"holds other things than a memo.*; given thesis\.docx"):
        write_folder(tmp_path / "memo", small, overwrite=True)
    assert (tmp_path / "memo" / "thesis.docx").read_text() == "mine"


@pytest.mark.parametrize("overwrite", [False, True])
def test_a_file_or_link_in_its_place_is_refused(
    tmp_path: Path, small: Contents, overwrite: bool
) -> None:
    (tmp_path / "file").write_text("x")
    (tmp_path / "link").symlink_to(tmp_path / "nowhere")
    for name in ("file", "link"):
        with pytest.raises(Refused, match="a file of that name is there already"):
            write_folder(tmp_path / name, small, overwrite=overwrite)
    with pytest.raises(Refused, match="should stand in does not exist"):
        write_folder(tmp_path / "no" / "memo", small)


def test_results_are_plain_numbers() -> None:
    plain = json.loads(results_text({
        "phasor_V": 3 - 4j, "matrix": np.array([[1.0, np.nan]]), "limit_A": math.inf,
        "count": np.int64(3), "words": ("Ω", None), "truth": True,
        "phasors": np.array([1j]),
    }))
    assert plain == {"phasor_V": {"real": 3.0, "imaginary": -4.0}, "matrix": [[1.0, None]],
                     "limit_A": None, "count": 3, "words": ["Ω", None], "truth": True,
                     "phasors": [{"real": 0.0, "imaginary": 1.0}]}
