from __future__ import annotations

import datetime

import pytest

from unlanded.errors import Refused
from unlanded.report.figure import Axis, Figure
from unlanded.report.memo import Bullets, Memo, Paragraph, Part, facts, long_date
from unlanded.report.tables import Column, Table

DAY = datetime.date(2026, 3, 9)


def table(key: str) -> Table:
    return Table(key, "T.", (Column("A"),), (("1",),))


def figure(key: str) -> Figure:
    return Figure(key, "T", Axis("", "", 0, 1), Axis("", "", 0, 1), "C", "A")


def memo(*parts: Part, **more: str) -> Memo:
    words = {"title": "T", "site": "S", "case_file": "c.toml", "fingerprint": "abc"} | more
    return Memo(date=DAY, parts=parts, **words)


def test_figures_and_tables_are_found_at_any_depth_in_order() -> None:
    made = memo(Part("1", (table("a"), Part("1.1", (figure("x"), table("b"))))),
                Part("2", (Paragraph("."), figure("y"), Bullets(("i",)))))
    assert [t.key for t in made.tables] == ["a", "b"]
    assert [f.key for f in made.figures] == ["x", "y"]


def test_a_key_is_used_once() -> None:
    with pytest.raises(Refused) as refusal:
        memo(Part("1", (table("a"), figure("x"))), Part("2", (table("a"), figure("x"))))
    assert [str(m) for m in refusal.value.mistakes] == [
        'figure "x": its key may be used once in a memo.',
        'table "a": its key may be used once in a memo.']


@pytest.mark.parametrize("missing", ["title", "case_file", "fingerprint"])
def test_a_memo_needs_its_words(missing: str) -> None:
    with pytest.raises(Refused, match=f"memo: needs its {missing}"):
        memo(**{missing: " "})


def test_the_title_block_leaves_out_what_says_nothing() -> None:
    assert [name for name, _ in facts(memo(site=""))] == ["Case file", "Fingerprint", "Date"]


@pytest.mark.parametrize(("language", "words"), [
    ("en-GB", "9 March 2026"), ("en-US", "March 9, 2026"),
])
def test_dates(language: str, words: str) -> None:
    assert long_date(DAY, language) == words
    assert dict(facts(memo(language=language)))["Date"] == words
