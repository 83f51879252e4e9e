"""What surrounds the cable: planes, pipes and screens, and their limits."""

from __future__ import annotations

import pytest

from case_text import changed, refusals, site

QUAY = site("tern-quay")


def surrounded(written: str) -> list[str]:
    return refusals(changed(QUAY, ("[run.ends.near]",
                                   f"[run.surround]\n{written}\n[run.ends.near]")))


@pytest.mark.parametrize("written", [
    'kind = "plane"', 'kind = "plane"\ngap = "0.5 m"', 'kind = "plane"\ngap = "10 m"',
    'kind = "pipe"\nbore = "15 mm"', 'kind = "pipe"\nbore = "15 mm"\ngap = "1 mm"',
    'kind = "pipe"\nbore = "12 mm"\ncentred = true', 'kind = "screen"',
    'kind = "screen"\ngap = "0.3 mm"',
])  # fmt: skip
def test_surrounds_that_are_taken(written: str) -> None:
    assert surrounded(written) == []


@pytest.mark.parametrize(("written", "says"), [
    ('gap = "1 m"', 'run.surround.kind: is missing. (for example kind = "plane")'),
    ('kind = "plain"', "run.surround.kind: must be plane, pipe or screen; given plain. (did you"),
    ('kind = "plane"\ngap = "10.1 m"', "run.surround.gap: must be 0 m to 10 m; given 10.1 m."),
    ('kind = "screen"\ngap = "-1 mm"', "run.surround.gap: must be 0 m to 10 m; given -1 mm."),
    ('kind = "plane"\nbore = "1 m"', "run.surround.bore: is not a key that belongs here."),
    ('kind = "pipe"', 'run.surround.bore: is missing. (for example bore = "20 mm")'),
    ('kind = "pipe"\nbore = "12 mm"\ncentred = 1',
     "run.surround.centred: must be true or false, without quotes; given 1."),
])  # fmt: skip
def test_a_mistake_in_the_surround_is_told_at_it(written: str, says: str) -> None:
    (said,) = surrounded(written)
    assert says in said


def test_a_pipe_that_is_too_narrow_names_what_does_not_go_in() -> None:
    said = surrounded('kind = "pipe"\nbore = "5 mm"')
    assert len(said) == 4
    assert 'run.surround: conductor "brown": must lie inside the pipe; given ' in said[0]
    assert " mm too far." in said[0]


def test_a_surround_that_is_no_table_is_told() -> None:
    (said,) = refusals(changed(QUAY, ('length = "85 m"', 'length = "85 m"\nsurround = "plane"')))
    assert "run.surround: must be a table; given plane. (written [run.surround] or surround" in said
