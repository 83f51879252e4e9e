"""Saving a changed case: remarks, order and line ends stay; nothing is lost or half written."""

from __future__ import annotations

import os
import random
import re
import tomllib
from pathlib import Path
from typing import Any

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from case_text import NAMES, PAIR, SITES, changed
from unlanded.case import saving
from unlanded.case.loading import load_case, read_case
from unlanded.case.saving import changed_text, save_case
from unlanded.errors import Refused

QUAY = (SITES / "tern-quay.toml").read_text(encoding="utf-8")


@pytest.fixture
def path(tmp_path: Path) -> Path:
    file = tmp_path / "case.toml"
    file.write_bytes(QUAY.encode())
    return file


def edited(text: str, *changes: tuple[str, str]) -> str:
    """As an engineer would do it by hand; each old part is there once."""
    for old, _ in changes:
        assert text.count(old) == 1, old
    return changed(text, *changes)


@pytest.mark.parametrize("name", NAMES)
def test_no_change_changes_nothing(name: str) -> None:
    text = (SITES / f"{name}.toml").read_text(encoding="utf-8")
    assert changed_text(read_case(text), {}) == text


@pytest.mark.parametrize(("changes", "edits"), [
    ({"run.length": "90 m"}, [('length = "85 m"\n', 'length = "90 m"\n')]),
    ({"supply.phases": 3}, [("phases = 1              # 1", "phases = 3              # 1")]),
    ({"readings[1].shows": "0.40 V"}, [('"107.9 V"', '"0.40 V"')]),
    ({"run.ends.near.brown": "N", "title": "x"},
     [('brown = "L"', 'brown = "N"'),
      ('title = "Evaporator fan circuit: a spare core reads high"', 'title = "x"')]),
    ({"device.waveform": None},
     [('waveform = "A"          # "AC", "A", "F" or "B"; may be left out\n', "")]),
    ({"sheet.instruments[2]": "body"}, [('["digital-10M", "bench-1M"', '["digital-10M", "body"')]),
])  # fmt: skip
def test_a_change_is_what_a_hand_would_do(
    changes: dict[str, Any], edits: list[tuple[str, str]]
) -> None:
    assert changed_text(read_case(QUAY), changes) == edited(QUAY, *edits)


def test_a_new_key_stands_with_its_table() -> None:
    found = changed_text(read_case(QUAY), {"run.cable.permittivity": 4.8})
    assert read_case(found).content.run.cable.model_fields_set >= {"permittivity", "type"}
    assert [s for s in found.split("\n") if s != "permittivity = 4.8"] == QUAY.split("\n")


def test_a_new_table_leaves_the_rest_as_it_is() -> None:
    found = changed_text(read_case(QUAY), {"run.surround.kind": "plane",
                                           "run.surround.gap": "5 mm"})
    assert read_case(found).content.run.surround is not None
    assert [s for s in found.split("\n") if s and s not in QUAY.split("\n")] == [
        "[run.surround]", 'kind = "plane"', 'gap = "5 mm"']
    left = iter(found.split("\n"))
    assert all(line in left for line in QUAY.split("\n") if line)  # in the same order


def test_a_reading_is_added_at_the_end_and_taken_out_again() -> None:
    new = {"instrument": "two-pole", "from": "black@near", "to": "N", "shows": "lit"}
    added = changed_text(read_case(QUAY), {"readings[3]": new})
    assert added.startswith(QUAY.rstrip("\n"))
    assert tomllib.loads(added)["readings"][2] == new
    assert changed_text(read_case(added), {"readings[3]": None}).strip() == QUAY.strip()


def test_notes_of_several_lines_stay_readable() -> None:
    notes = 'First line.\nSecond "line".\n'
    found = changed_text(read_case(QUAY), {"notes": notes})
    assert tomllib.loads(found)["notes"] == notes
    assert '\nSecond "line".\n' in found


@pytest.mark.parametrize(("changes", "says"), [
    ({"run.length": "90"}, "case.toml, as changed, line 35, run.length: needs a unit; given 90."),
    ({"run.length": None}, "run.length: is missing."),
    ({"run.lenght": "1 m"}, 'did you mean "length"?'),
    ({"title.x": "1"}, "title.x: cannot be set, because title is a value."),
    ({"readings[1]": "x"}, "readings[1]: cannot be changed to this value; given x."),
    ({"readings[9].shows": "1 V"}, "readings[9].shows: cannot be changed to this value; given"),
    ({"title": object}, "title: cannot be changed to this value; given"),
    ({"title": 3 + 2j}, "title: cannot be changed to this value; given (3+2j)."),
    ({"title": float("nan")}, "cannot be changed without disturbing the rest of the file"),
    ({"": 1}, "path: must be keys joined by points."),
    ({"readings[0]": 1}, "path: counts the entries of a list from 1; given readings[0]."),
])  # fmt: skip
def test_a_change_that_makes_no_case_is_refused(
    changes: dict[str, Any], says: str, path: Path
) -> None:
    with pytest.raises(Refused) as caught:
        save_case(load_case(path), changes, overwrite=True)
    assert says in str(caught.value)
    assert path.read_bytes() == QUAY.encode()
    assert os.listdir(path.parent) == ["case.toml"]


def test_saved_is_what_is_read_again(path: Path) -> None:
    saved = save_case(load_case(path), {"run.length": "90 m"}, overwrite=True)
    assert saved == load_case(path)
    assert saved.content.run.length == 90.0
    assert os.listdir(path.parent) == ["case.toml"]


def test_nothing_is_overwritten_unasked(path: Path) -> None:
    case = load_case(path)
    other = path.with_name("other.toml")
    other.write_text("mine", encoding="utf-8")
    for target in (None, other):
        with pytest.raises(Refused, match="is there already, and is not overwritten unless asked"):
            save_case(case, {"run.length": "90 m"}, target)
    assert path.read_bytes() == QUAY.encode()
    assert other.read_text(encoding="utf-8") == "mine"


def test_another_name_needs_no_asking(path: Path) -> None:
    saved = save_case(load_case(path), {"run.length": "90 m"}, path.with_name("new.toml"))
    assert saved.path == path.with_name("new.toml").resolve()
    assert saved.name == "new.toml"
    assert path.read_bytes() == QUAY.encode()


@pytest.mark.parametrize(("old", "new", "says"), [
    ('length = "85 m"\n', 'length = "77 m"\n', "given run.length."),
    ("# And at the far end.", "# And at the end.", "given its remarks or layout."),
    ("[run]", "[run", "given it is no longer TOML."),
])  # fmt: skip
def test_of_two_writers_the_second_is_told(old: str, new: str, says: str, path: Path) -> None:
    first, second = load_case(path), load_case(path)
    assert first == second
    theirs = edited(QUAY, (old, new)) if QUAY.count(old) == 1 else QUAY.replace(old, new)
    path.write_text(theirs, encoding="utf-8")
    with pytest.raises(Refused, match="was changed by something else since it was read") as caught:
        save_case(second, {"title": "mine"}, overwrite=True)
    assert says in str(caught.value)
    assert path.read_text(encoding="utf-8") == theirs


def test_two_writers_of_the_kit(path: Path) -> None:
    first, second = load_case(path), load_case(path)
    first = save_case(first, {"title": "first"}, overwrite=True)
    with pytest.raises(Refused, match=r"since it was read; given title\."):
        save_case(second, {"title": "second"}, overwrite=True)
    assert save_case(first, {"title": "again"}, overwrite=True).content.title == "again"


@pytest.mark.parametrize("end", ["\n", "\r\n"])
def test_line_ends_stay(end: str, path: Path) -> None:
    path.write_bytes(QUAY.replace("\n", end).encode())
    save_case(load_case(path), {"run.length": "90 m", "notes": "a\nb"}, overwrite=True)
    data = path.read_bytes().decode()
    assert set(re.findall(r"\r?\n|\r", data)) == {end}


def test_a_file_keeps_its_mode_and_a_link_its_target(path: Path) -> None:
    path.chmod(0o640)
    link = path.with_name("link.toml")
    link.symlink_to(path)
    save_case(load_case(link), {"run.length": "90 m"}, overwrite=True)
    assert link.is_symlink()
    assert path.stat().st_mode & 0o777 == 0o640
    assert load_case(path).content.run.length == 90.0


@pytest.mark.parametrize("call", ["fsync", "replace"])
def test_a_full_disk_leaves_the_old_file(
    call: str, path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    def full(*_: object) -> None:
        raise OSError(28, "No space left on device")

    case = load_case(path)
    monkeypatch.setattr(*(os, "fsync", full) if call == "fsync" else (Path, "replace", full))
    with pytest.raises(Refused, match="cannot be written; given No space left on device"):
        save_case(case, {"run.length": "90 m"}, overwrite=True)
    assert path.read_bytes() == QUAY.encode()
    assert os.listdir(path.parent) == ["case.toml"]


@pytest.mark.parametrize(("target", "says"), [
    (".", "is a folder, and a case is saved as one file."),
    ("no/case.toml", "there is no such folder to save into."),
    ("case.toml/x", "there is no such folder to save into."),
    ("a\0b", "cannot be written; given embedded null"),
    ("x" * 300, "cannot be written; given File name too long."),
])  # fmt: skip
def test_a_place_that_cannot_be_written_is_refused(target: str, says: str, path: Path) -> None:
    with pytest.raises(Refused) as caught:
        save_case(load_case(path), {}, path.parent / target)
    assert says in str(caught.value)


def test_a_case_that_never_was_a_file_needs_a_path(tmp_path: Path) -> None:
    case = read_case(PAIR)
    with pytest.raises(Refused, match="was not read from a file"):
        save_case(case, {})
    assert save_case(case, {}, tmp_path / "pair.toml").text == PAIR


def test_a_layout_that_cannot_be_kept_is_left_alone(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(saving.tomlkit, "dumps", lambda _: "other")
    with pytest.raises(Refused, match="has a layout that cannot be changed from here"):
        changed_text(read_case(PAIR), {})


_PATHS = (
    "run.length", "title", "notes", "run.surround", "run.surround.gap", "run.ends.near.black",
    "run.ends.far.brown", "run.ends.far.brown.to", "readings", "readings[1].shows", "readings[2]",
    "readings[9]", "run.cable.cores", "run.cable.cores[1]", "sheet", "device.kind", "run",
    "supply.harmonics", "supply.harmonics.3", "own_instruments", "x.y.z", "", "a..b", "title[1]",
    'run.ends.near."2"', "[1]", "run.cable",
)
_VALUES: tuple[Any, ...] = (
    None, "85 m", "x\ny", 5, True, 0.1, [], {}, ["a"], {"a": "b"}, "earth", {"joined": "blue"},
    [{"instrument": "digital-10M", "from": "earth", "to": "L", "shows": "1 V"}], float("nan"),
    object(), "\0", '"', "ü", b"x", (1, 2), 10**30,
)


@settings(max_examples=150, deadline=None, derandomize=True, database=None)
@given(st.sampled_from(NAMES), st.integers(0, 2**32))
def test_no_change_is_a_traceback_or_loses_a_remark(name: str, seed: int) -> None:
    lot = random.Random(seed)
    text = (SITES / f"{name}.toml").read_text(encoding="utf-8")
    changes = {lot.choice(_PATHS): lot.choice(_VALUES) for _ in range(lot.randint(1, 2))}
    try:
        found = changed_text(read_case(text), changes)
    except Refused:
        return
    remarks = [s for s in text.split("\n") if s.startswith("#")]
    if all(isinstance(v, str | bool | int | float) for v in changes.values()):
        whole = {"run", "run.cable", "sheet", "readings", "run.ends.far.brown", "run.surround",
                 "own_instruments", "supply.harmonics"}
        if not whole & set(changes):
            assert [s for s in found.split("\n") if s.startswith("#")] == remarks
