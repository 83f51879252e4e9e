"""What surrounds the cable: planes, pipes and screens, and their limits."""

from __future__ import annotations

import pytest

from case_text import PAIR, changed, refusals, site
from unlanded.case.loading import read_case
from unlanded.case.runs import run_of
from unlanded.study.ends import Bonded

QUAY = site("tern-quay")


def surrounded(written: str) -> list[str]:
    return refusals(changed(QUAY, ("[run.ends.near]",
                                   f"[run.surround]\n{written}\n[run.ends.near]")))


@pytest.mark.parametrize("written", [
    'kind = "plane"', 'kind = "plane"\ngap = "0.5 m"', 'kind = "plane"\ngap = "10 m"',
    'kind = "pipe"\nbore = "15 mm"', 'kind = "pipe"\nbore = "15 mm"\ngap = "1 mm"',
    'kind = "pipe"\nbore = "12 mm"\ncentred = true', 'kind = "screen"',
    'kind = "screen"\ngap = "0.3 mm"', 'kind = "screen"\nearthed = "none"\nto_earth = "0 pF/m"',
    'kind = "screen"\nearthed = "far"\nresistance = "12 ohm/km"',
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
    ('kind = "screen"\nearthed = "one"', "run.surround.earthed: must be both, near, far or none"),
    ('kind = "pipe"\nbore = "15 mm"\nearthed = "near"',
     "run.surround.earthed: belongs to a screen: a pipe is taken as earthed all along. (write kin"),
    ('kind = "plane"\nto_earth = "9 pF/m"', "run.surround.to_earth: belongs to a screen: a plane"),
    ('kind = "screen"\nto_earth = "1 uF/m"', "run.surround.to_earth: must be 0 F/m to 100 nF/m"),
    ('kind = "screen"\nto_earth = "120 pF"', "run.surround.to_earth"),
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


SCREENED = changed(QUAY, ("[run.ends.near]",
                          '[run.surround]\nkind = "screen"\nearthed = "none"\n[run.ends.near]'))


def test_what_a_screen_meets_is_told_by_how_it_is_earthed() -> None:
    for earthed in ("both", "near", "far", "none"):
        run = run_of(read_case(changed(SCREENED, ('"none"', f'"{earthed}"'))).content)
        assert run.names[-1] == "screen"
        for end in ("near", "far"):
            assert run.same(f"screen@{end}", "earth") == (earthed in ("both", end))
    usual = run_of(read_case(changed(SCREENED, ('earthed = "none"\n', ""))).content)
    assert usual.far["screen"] == Bonded("earth")


def test_readings_can_be_taken_on_the_screen() -> None:
    reading = '[[readings]]\ninstrument = "digital-10M"\nfrom = "screen@far"\nto = "earth"'
    text = changed(SCREENED, ("[[readings]]", f'{reading}\nshows = "20.0 V"\n[[readings]]'))
    assert refusals(text) == []
    (said,) = refusals(changed(text, ('earthed = "none"', 'earthed = "far"')))
    assert "readings[1].to: is the same point as from" in said
    (said,) = refusals(changed(text, ('kind = "screen"\nearthed = "none"', 'kind = "plane"')))
    assert "readings[1].from: is not a point of this case; given screen@far." in said


def test_a_reading_on_a_screen_says_what_a_screen_is() -> None:
    reading = ('[[readings]]\ninstrument = "digital-10M"\nfrom = "screen@far"\nto = "earth"\n'
               'shows = "37.2 V"\n')
    (said,) = refusals(QUAY + reading)
    assert 'given screen@far. (a run has a screen with kind = "screen" of [run.surround])' in said
    text = changed(SCREENED + reading, ('"screen"', '"scren"'))
    (said,) = refusals(text)  # and nothing on the reading: it may have been meant for a screen
    assert 'run.surround.kind: must be plane, pipe or screen; given scren. (did you' in said
    (said,) = refusals(changed(SCREENED + reading, ('"screen@far"', '"screen"')))
    assert 'is not a point of this case; given screen. (did you mean "screen@' in said


def test_a_screen_has_its_name_and_its_ends_to_itself() -> None:
    (said,) = refusals(SCREENED.replace("black", "screen"))
    assert "run.surround: is a screen, and goes by that name itself; given screen." in said
    (said,) = refusals(changed(SCREENED, ('blue = "N"', 'blue = "N"\nscreen = "earth"')))
    assert "screen: is not a core of this case; given screen. (what the screen meets is" in said


def test_a_floating_screen_holds_a_run_only_by_its_capacitance() -> None:
    text = changed(PAIR, ('a = "L"\nb = "open"', 'a = "open"\n[run.surround]\nkind = "screen"\n'
                          'gap = "1 mm"\nearthed = "none"\nto_earth = "1 pF/m"'))
    assert refusals(text) == []
    (said,) = refusals(changed(text, ('"1 pF/m"', '"0 pF/m"')))
    assert "floats: no conductor is connected" in said
