"""`[memo]` of a case: what is accepted, and what is refused where."""

from __future__ import annotations

import pytest

from case_text import refusals, site
from unlanded.case.loading import read_case

GOOD = """
[memo]
prepared_by = "A. Engineer"
leave_out = ["annex", "causes"]

[[memo.added]]
kind = "loading"
from = "black@far"
to = "earth"
meter = "3.3 Mohm"

[[memo.added]]
kind = "tried cause"
conductor = "black"
cause = "leakage to earth"
size = "200 kohm"
"""


def test_accepted_as_written() -> None:
    memo = read_case(site("tern-quay") + GOOD).content.memo
    assert (memo.prepared_by, memo.leave_out) == ("A. Engineer", ("annex", "causes"))
    assert [a.kind for a in memo.added] == ["loading", "tried cause"]
    assert (memo.added[0].meter, memo.added[1].size) == (3.3e6, "200 kohm")


def test_a_case_without_it_adds_nothing() -> None:
    memo = read_case(site("tern-quay")).content.memo
    assert (memo.added, memo.leave_out, memo.prepared_by) == ((), (), "")


@pytest.mark.parametrize(("old", "new", "says"), [
    ('"annex"', '"anex"', 'memo.leave_out[1]: must be expected, causes, margin, operation or '
     'annex; given anex. (did you mean "annex"?)'),
    ('kind = "loading"', 'kind = "load"', "memo.added[1].kind: must be formulas, loading"),
    ('meter = "3.3 Mohm"\n', "", 'memo.added[1].meter: is missing, and "loading" needs it.'),
    ('meter = "3.3 Mohm"', 'meter = "3.3 Mohm"\nleak = "x"',
     'memo.added[1].leak: does not go with "loading".'),
    ('to = "earth"', 'to = "black@far"', "memo.added[1].to: must be another point than from"),
    ('to = "earth"', 'to = "black@near"', ""),
    ('from = "black@far"\nto = "earth"', 'from = "brown@near"\nto = "L"',
     "memo.added[1].to: is the same point as from, as the ends are described"),
    ('from = "black@far"', 'from = "blck@far"', "memo.added[1].from: is not a point of this case"),
    ('"leakage to earth"', '"leakage"', "memo.added[2].cause: is not a cause"),
    ('"200 kohm"', '"200 V"', "memo.added[2].size: must be in ohm"),
    ('kind = "tried cause"\nconductor = "black"\ncause = "leakage to earth"\nsize = "200 kohm"',
     'kind = "added load"\nleak = "pumps"', "memo.added[2].leak: is not in this case"),
    ('kind = "tried cause"\nconductor = "black"\ncause = "leakage to earth"\nsize = "200 kohm"',
     'kind = "resistor beside"\nload = "relay"\nresistor = "22 kohm"',
     "memo.added[2].load: is not in this case"),
])
def test_refused_at_its_place(old: str, new: str, says: str) -> None:
    assert old in GOOD
    found = refusals(site("tern-quay") + GOOD.replace(old, new, 1))
    assert (found == []) == (says == "")
    assert says in "\n".join(found)
