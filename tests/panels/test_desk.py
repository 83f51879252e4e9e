"""The case on the desk: changes through the file's own checks, saving, two desks on one file."""

from __future__ import annotations

from pathlib import Path

import pytest

from unlanded.case.loading import load_case
from unlanded.errors import Refused
from unlanded.panels.desk import Desk, cases_beside

ENTRY = {"kind": "loading", "from": "black@far", "to": "earth", "meter": "10 Mohm"}


@pytest.fixture
def desk(sites: Path) -> Desk:
    return Desk(sites / "tern-quay.toml")


def test_change_is_on_the_desk_and_not_in_the_file(desk: Desk) -> None:
    seen = []
    desk.observe(lambda change: seen.append(change["new"].content.run.length), "case")
    desk.change({"run.length": "150 ft"})
    desk.change({"run.length": "46 m"})
    assert seen == [45.72, 46.0]
    assert desk.unsaved
    assert load_case(desk.path).content.run.length == 85.0


def test_retyped_text_is_what_saving_writes(desk: Desk) -> None:
    for value in ("150 ft", "46 m", "47.5 m"):
        desk.change({"run.length": value})
    text = desk.case.text
    desk.save()
    assert desk.path.read_text(encoding="utf-8") == text
    assert text.count("47.5 m") == 1


def test_value_that_stands_twice_is_retyped_in_its_own_place(desk: Desk) -> None:
    desk.change({"title": "40 m"})
    for length in ("40 m", "41 m", "40 m", "42 m"):
        desk.change({"run.length": length})
        assert desk.case.content.title == "40 m"
        assert desk.case.content.run.length == float(length.removesuffix(" m"))
    desk.change({"title": "42 m"})
    desk.change({"title": "43 m"})
    assert (desk.case.content.title, desk.case.content.run.length) == ("43 m", 42.0)


def test_whole_numbers_are_retyped_as_saving_writes_them(sites: Path) -> None:
    desk = Desk(sites / "heron-house.toml")
    for count in (7, 6, 60, 1, 12):
        desk.change({"standing[1].count": count})
        assert desk.case.content.standing[0].count == count
    text = desk.case.text
    desk.save()
    assert desk.path.read_text(encoding="utf-8") == text


def test_refused_change_leaves_the_case_and_names_no_line(desk: Desk) -> None:
    with pytest.raises(Refused, match=r"^run\.length: must be 10 mm to 100 km; given 1 mm"):
        desk.change({"run.length": "1 mm"})
    desk.change({"run.length": "50 m"})
    with pytest.raises(Refused, match=r"^run\.length: needs a unit; given 50"):
        desk.change({"run.length": "50"})
    assert desk.case.content.run.length == 50.0


def test_changed_back_is_not_unsaved(desk: Desk) -> None:
    desk.change({"run.length": "50 m"})
    desk.change({"run.length": "85 m"})
    assert not desk.unsaved


def test_second_desk_to_save_is_told_what_changed(desk: Desk) -> None:
    other = Desk(desk.path)
    other.change({"run.length": "70 m"})
    other.save()
    desk.change({"supply.voltage": "235 V"})
    with pytest.raises(Refused, match=r"was changed by something else.*given run\.length"):
        desk.save()
    assert desk.case.content.supply.voltage == 235.0
    assert load_case(desk.path).content.run.length == 70.0
    desk.open()
    assert (desk.case.content.run.length, desk.unsaved) == (70.0, False)


def test_saved_under_another_name(desk: Desk) -> None:
    desk.change({"run.length": "61 m"})
    desk.save(desk.path.with_name("other.toml"))
    assert desk.path.name == "other.toml"
    assert load_case(desk.path.with_name("tern-quay.toml")).content.run.length == 85.0
    desk.change({"run.length": "62 m"})
    desk.save()
    assert load_case(desk.path).content.run.length == 62.0
    with pytest.raises(Refused, match="is there already"):
        desk.save(desk.path.with_name("larkmoor.toml"))


def test_entries_of_the_memo(desk: Desk) -> None:
    other = {**ENTRY, "meter": "1 Mohm"}
    assert desk.add_to_memo(ENTRY)
    assert not desk.add_to_memo(ENTRY)
    assert desk.add_to_memo(other)
    desk.save()
    assert [a.meter for a in load_case(desk.path).content.memo.added] == [10e6, 1e6]
    desk.take_from_memo(0)
    assert desk.added == [other]
    desk.take_from_memo(0)
    desk.save()
    assert load_case(desk.path).content.memo.added == ()


def test_memo_refuses_what_the_case_does_not_have(desk: Desk) -> None:
    with pytest.raises(Refused, match=r"memo\.added\[1\]\.leak: is not in this case"):
        desk.add_to_memo({"kind": "added load", "leak": "desk computers"})
    assert desk.added == []


@pytest.mark.usefixtures("sites")
def test_cases_beside() -> None:
    assert [p.name for p in cases_beside()] == [
        "alder-mill.toml", "chalk-hill.toml", "heron-house.toml", "larkmoor.toml", "tern-quay.toml"]


@pytest.mark.usefixtures("sites")
def test_every_site_survives_a_change_and_a_save() -> None:
    for path in cases_beside():
        desk = Desk(path)
        before = path.read_text(encoding="utf-8")
        desk.change({"run.length": "33 m"})
        desk.save()
        after = path.read_text(encoding="utf-8")
        changed = [(a, b) for a, b in zip(before.split("\n"), after.split("\n"), strict=True)
                   if a != b]
        assert [b.split("#")[0].strip() for _, b in changed] == ['length = "33 m"']
