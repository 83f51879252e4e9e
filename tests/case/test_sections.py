"""From cable and surround to the cross-section, against sections put together by hand."""

from __future__ import annotations

import math

import pytest
from numpy.testing import assert_allclose

from case_text import PAIR, changed, refusals, site
from unlanded.case.loading import read_case
from unlanded.case.sections import resistances, section_of
from unlanded.physics.section import Pipe, Plane, Section

QUAY, HERON, LARKMOOR = site("tern-quay"), site("heron-house"), site("larkmoor")


def section(text: str) -> Section:
    return section_of(read_case(text).content.run)


def surrounded(written: str) -> Section:
    return section(changed(QUAY, ("[run.ends.near]",
                                  f"[run.surround]\n{written}\n[run.ends.near]")))


def test_laid_up_cores_touch_their_neighbours() -> None:
    found = section(QUAY)
    # flexible 2.5 mm²: a bunch that fills 3/4 of its circle, under 0.8 mm of PVC
    overall = math.sqrt(2.5e-6 / math.pi / 0.75)
    assert [c.name for c in found.conductors] == ["brown", "blue", "green-yellow", "black"]
    for c, d in zip(found.conductors, (*found.conductors[1:], found.conductors[0]), strict=True):
        assert c.outer == pytest.approx(overall + 0.8e-3, rel=1e-12, abs=0)
        assert c.radius == pytest.approx(0.980 * overall, rel=1e-12, abs=0)
        assert c.cover_permittivity == 4.8
        assert math.hypot(c.x - d.x, c.y - d.y) == pytest.approx(2 * c.outer, rel=1e-12, abs=0)


def test_a_control_cable_has_its_first_core_in_the_centre() -> None:
    found = section(LARKMOOR)
    centre, *ring = found.conductors
    assert (centre.x, centre.y) == (0, 0)
    assert_allclose([math.hypot(c.x, c.y) for c in ring], 2 * centre.outer, rtol=1e-12)
    assert isinstance(found.surround, Plane)
    lowest = min(c.y - c.outer for c in ring)
    assert found.surround.y == pytest.approx(lowest - 1.8e-3, rel=1e-12, abs=0)


def test_singles_lie_in_their_conduit() -> None:
    found = section(HERON)
    assert found.surround == Pipe(10.5e-3)
    assert section(HERON) == found
    assert section(HERON.replace("seed = 4", "seed = 5")) != found
    assert section(HERON.replace('"metal"', '"plastic"')).surround is None


@pytest.mark.parametrize("layout", ["in conduit", "singles"])
def test_an_unlike_single_has_its_own_size(layout: str) -> None:
    text = HERON if layout == "in conduit" else "\n".join(
        line for line in HERON.replace('"in conduit"', '"singles"').split("\n")
        if not line.startswith(("bore", "wall", "seed")))
    size = {c.name: c for c in section(text).conductors}
    # solid, under 0.8 mm of PVC for both sizes (IEC 60227-3, from memory)
    for name, area in (("green-yellow", 4e-6), ("brown", 2.5e-6)):
        radius = math.sqrt(area / math.pi)
        assert size[name].radius == pytest.approx(radius, rel=1e-12, abs=0)
        assert size[name].outer == pytest.approx(radius + 0.8e-3, rel=1e-12, abs=0)


def test_flat_twin_has_a_bare_earth_between() -> None:
    text = changed(
        QUAY, ('"laid up"', '"flat twin and earth"\nearth_conductor = "1.5 mm²"'),
        ('["brown", "blue", "green-yellow", "black"]', '["brown", "cpc", "blue"]'),
        ('"flexible"', '"solid"'), ('"H05VV"', '"H07V"'), ("green-yellow =", "cpc ="),
        ("green-yellow =", "cpc ="),
    ).partition("[[readings]]")[0]
    found = section(text)
    one, earth, other = found.conductors
    assert earth.outer == earth.radius
    assert earth.radius == pytest.approx(math.sqrt(1.5e-6 / math.pi), rel=1e-12, abs=0)
    assert one.x == -other.x == pytest.approx(-(one.outer + earth.radius), rel=1e-12, abs=0)
    # IEC 60228 class 1 [ohm/km]: 7.41 and 12.1
    by_name = resistances(read_case(text).content.run.cable)
    assert by_name == pytest.approx({"brown": 7.41e-3, "cpc": 12.1e-3, "blue": 7.41e-3},
                                    rel=1e-12, abs=0)


@pytest.mark.parametrize("spacing", [None, 20e-3])
def test_singles_lie_side_by_side_about_the_middle(spacing: float | None) -> None:
    line = "" if spacing is None else f'spacing = "{spacing} m"'
    found = section(changed(QUAY, ('"laid up"', f'"singles"\n{line}')))
    step = spacing or 2 * found.conductors[0].outer
    assert_allclose([c.x for c in found.conductors], [step * k for k in (-1.5, -0.5, 0.5, 1.5)],
                    rtol=1e-12)


def test_free_conductors_lie_where_they_are_put() -> None:
    a, b = section(PAIR).conductors
    assert (a.x, b.x, b.y) == (0.0, 5e-3, 0.0)
    assert (a.radius, a.outer, a.cover_permittivity) == (1e-3, 2e-3, 3.0)
    # copper of 58 MS/m, 2 mm across (IEC 60028, from memory)
    resistance = resistances(read_case(PAIR).content.run.cable)["a"]
    assert resistance == pytest.approx(1 / (58e6 * math.pi * 1e-6), rel=1e-12, abs=0)
    given = changed(PAIR, ("permittivity = 3.0", 'permittivity = 3.0\nresistance = "9 mohm/m"'))
    assert resistances(read_case(given).content.run.cable)["a"] == pytest.approx(9e-3, rel=1e-12,
                                                                                 abs=0)


def test_covers_take_the_limit_that_is_asked_for() -> None:
    run = read_case(QUAY).content.run
    for limit, permittivity in (("low", 3.5), ("likely", 4.8), ("high", 6.5)):
        taken = section_of(run, limit)  # type: ignore[arg-type]
        assert {c.cover_permittivity for c in taken.conductors} == {permittivity}


def test_a_plane_may_lie_half_a_metre_away() -> None:
    found = surrounded('kind = "plane"\ngap = "0.5 m"')
    assert isinstance(found.surround, Plane)
    lowest = min(c.y - c.outer for c in found.conductors)
    assert lowest - found.surround.y == pytest.approx(0.5, rel=1e-12, abs=0)


@pytest.mark.parametrize("gap", ["0 mm", "1.2 mm"])
def test_a_cable_rests_on_the_wall_of_a_pipe(gap: str) -> None:
    found = surrounded(f'kind = "pipe"\nbore = "20 mm"\ngap = "{gap}"')
    pipe = found.surround
    assert isinstance(pipe, Pipe)
    room = min(pipe.radius - math.hypot(c.x - pipe.x, c.y - pipe.y) - c.outer
               for c in found.conductors)
    assert room * 1e3 == pytest.approx(float(gap.split()[0]), rel=1e-9, abs=0) or room < 1e-15


def test_a_pipe_may_hold_the_cable_in_its_middle() -> None:
    found = surrounded('kind = "pipe"\nbore = "20 mm"\ncentred = true')
    assert found.surround == Pipe(10e-3)


def test_a_screen_lies_outside_the_outermost_cover() -> None:
    found = surrounded('kind = "screen"\ngap = "0.3 mm"')
    assert isinstance(found.surround, Pipe)
    reach = max(math.hypot(c.x, c.y) + c.outer for c in found.conductors)
    assert found.surround.radius == pytest.approx(reach + 0.3e-3, rel=1e-12, abs=0)


@pytest.mark.parametrize(("x", "mistakes"), [
    ("4 mm", []),
    ("3.9 mm", ['c.toml line 16, run.cable.conductors[2]: conductors "a" and "b": overlap: their '
                "centres must be at least 4 mm apart; given 3.9 mm."]),
])  # fmt: skip
def test_covers_may_touch_and_not_overlap(x: str, mistakes: list[str]) -> None:
    assert refusals(changed(PAIR, ('x = "5 mm"', f'x = "{x}"'))) == mistakes


def test_bare_conductors_may_not_touch() -> None:
    bare = PAIR.replace('cover_diameter = "4 mm"\npermittivity = 3.0\n', "")
    (said,) = refusals(changed(bare, ('x = "5 mm"', 'x = "2 mm"')))
    assert 'conductors "a" and "b": touch metal to metal; given 2 mm. (join them at an end' in said


def test_more_conductors_than_the_conduit_holds_are_refused() -> None:
    (said,) = refusals(changed(HERON, ('"21 mm"', '"9 mm"')))
    assert "run.cable: in conduit: 5 singles do not go into a conduit of 9 mm inner diam" in said
    (said,) = refusals(changed(HERON, ('"21 mm"', '"2 mm"')))
    assert "run.cable: in conduit: every single must be under 2 mm across; given " in said


def test_one_conductor_alone_is_refused() -> None:
    head, second, _ = PAIR.split("[[run.cable.conductors]]")
    (said,) = refusals(f'{head}[[run.cable.conductors]]{second}[run.ends.near]\na = "L"\n')
    assert "section: one conductor alone has no capacitance to anything." in said
