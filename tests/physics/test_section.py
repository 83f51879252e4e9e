"""What a section accepts and refuses: each bound from both sides, the message matched."""

from __future__ import annotations

import math
from dataclasses import replace

import pytest

from unlanded.errors import Refused
from unlanded.physics.section import Conductor, Pipe, Plane, Section

MM = 1e-3


def covered(name: str, x: float, y: float = 0.0) -> Conductor:
    return Conductor(name, x, y, 1 * MM, 2 * MM, 3.5)


def bare(name: str, x: float, y: float = 0.0) -> Conductor:
    return Conductor(name, x, y, 1 * MM)


def test_a_conductor_without_cover_is_bare():
    assert bare("a", 0).outer == 1 * MM
    assert covered("a", 0).outer == 2 * MM
    assert Conductor("a", 0, 0, 1 * MM, 1 * MM).outer == 1 * MM  # a cover of no thickness


@pytest.mark.parametrize(
    ("kept", "refused", "says"),
    [
        ({"radius": 1e-12}, {"radius": 0.0}, r"radius must be above 0 m; given 0 m\."),
        ({"radius": 1e-12}, {"radius": -MM}, r"radius must be above 0 m; given -0\.001 m\."),
        ({"cover_radius": 1 * MM}, {"cover_radius": 0.999 * MM},
         r"cover radius must be at least the metal's radius, 0\.001 m; given 0\.000999 m\."),
        ({"cover_permittivity": 1.0}, {"cover_permittivity": 0.999},
         r"cover permittivity must be at least 1; given 0\.999\."),
        ({"x": -1e3}, {"x": math.inf}, "every dimension must be a finite number"),
        ({"y": 1e3}, {"y": math.nan}, "every dimension must be a finite number"),
        ({"radius": 1e-3}, {"radius": math.nan}, "every dimension must be a finite number"),
        ({"cover_permittivity": 80.0}, {"cover_permittivity": math.inf},
         "every dimension must be a finite number"),
    ],
)
def test_a_conductors_bounds(kept, refused, says):
    plain = covered("spare", 0)
    assert replace(plain, **kept).name == "spare"
    with pytest.raises(Refused, match='conductor "spare": ' + says):
        replace(plain, **refused)


@pytest.mark.parametrize("radius", [0.0, -MM, math.inf, math.nan])
def test_a_pipes_radius_is_a_length(radius):
    assert Pipe(1e-9).radius == 1e-9
    with pytest.raises(Refused, match="pipe: radius must be above 0 m; given"):
        Pipe(radius)


def test_names_are_in_the_order_given():
    section = Section((covered("b", 0), covered("a", 5 * MM)))
    assert section.names == ("b", "a")
    assert section.index("a") == 1
    with pytest.raises(Refused, match='conductor "c": is not in this section'):
        section.index("c")


def test_conductors_may_come_as_a_list():
    assert Section([covered("a", 0), covered("b", 5 * MM)]).names == ("a", "b")  # type: ignore[arg-type]


def test_a_section_moves_within_its_surround():
    wall = Pipe(10 * MM)
    moved = Section((covered("a", 0, MM),), wall).moved(dx=2 * MM, dy=-3 * MM)
    assert (moved.conductors[0].x, moved.conductors[0].y) == (2 * MM, -2 * MM)
    assert moved.surround == wall
    with pytest.raises(Refused, match="must lie inside the pipe"):
        moved.moved(dx=6.1 * MM)


@pytest.mark.parametrize("turn", [0.0, 0.1, 1.0, 2.0, 3.0])
def test_covers_may_touch_and_not_overlap(turn):
    def pair(distance: float) -> Section:
        return Section((covered("a", 0), covered("b", distance * math.cos(turn),
                                                 distance * math.sin(turn))))

    assert len(pair(4 * MM).conductors) == 2
    with pytest.raises(Refused, match=r'conductors "a" and "b": overlap: their centres must be '
                                      r"at least 0\.004 m apart; given 0\.0039999 m\."):
        pair(3.9999 * MM)


def test_bare_metal_may_touch_a_cover_and_not_metal():
    assert Section((bare("a", 0), covered("b", 3 * MM))).names == ("a", "b")
    assert Section((bare("a", 0), bare("b", 2.0001 * MM))).names == ("a", "b")
    with pytest.raises(Refused, match='conductors "a" and "b": touch metal to metal'):
        Section((bare("a", 0), bare("b", 2 * MM)))
    with pytest.raises(Refused, match="overlap"):
        Section((bare("a", 0), bare("b", 1.9999 * MM)))


def test_a_conductor_inside_another_overlaps_it():
    with pytest.raises(Refused, match="overlap"):
        Section((Conductor("a", 0, 0, 5 * MM), bare("b", MM)))


@pytest.mark.parametrize("turn", [0.0, 0.7, 2.0, 4.0])
def test_a_cover_may_touch_the_pipe_and_not_cross_it(turn):
    def inside(off: float) -> Section:
        x, y = off * math.cos(turn), off * math.sin(turn)
        return Section((covered("a", 30 * MM + x, y - 7 * MM),), Pipe(10 * MM, 30 * MM, -7 * MM))

    assert inside(8 * MM).names == ("a",)
    with pytest.raises(Refused, match='conductor "a": must lie inside the pipe; given 1e-06 m too'):
        inside(8.001 * MM)


def test_a_cover_may_touch_the_plane_and_not_cross_it():
    assert Section((covered("a", 0, -5 * MM),), Plane(-7 * MM)).names == ("a",)
    with pytest.raises(Refused, match='conductor "a": must lie above the plane; given 1e-06 m too'):
        Section((covered("a", 0, -5.001 * MM),), Plane(-7 * MM))


@pytest.mark.parametrize(("surround", "near", "touching"),
                         [(Pipe(10 * MM), 8.999 * MM, 9 * MM), (Plane(-10 * MM), -8.999 * MM,
                                                                -9 * MM)])
def test_bare_metal_may_not_touch_the_surround(surround, near, touching):
    assert Section((bare("a", 0, near),), surround).names == ("a",)
    with pytest.raises(Refused, match='conductor "a": its bare metal touches the earthed surround'):
        Section((bare("a", 0, touching),), surround)


def test_one_conductor_needs_a_surround():
    assert len(Section((bare("a", 0),), Plane(-2 * MM)).conductors) == 1
    with pytest.raises(Refused, match="one conductor alone has no capacitance to anything"):
        Section((bare("a", 0),))
    with pytest.raises(Refused, match="section: needs at least one conductor"):
        Section((), Pipe(MM))


def test_a_name_is_used_once():
    with pytest.raises(Refused, match='conductor "a": a name may be used once'):
        Section((bare("a", 0), bare("a", 5 * MM)))


@pytest.mark.parametrize("permittivity", [0.999, 0.0, -1.0, math.inf, math.nan])
def test_filler_is_at_least_a_vacuum(permittivity):
    assert Section((bare("a", 0),), Pipe(2 * MM), 1.0).filler_permittivity == 1.0
    with pytest.raises(Refused, match="section: filler permittivity must be at least 1; given"):
        Section((bare("a", 0),), Pipe(2 * MM), permittivity)


def test_all_mistakes_are_told_at_once():
    with pytest.raises(Refused) as told:
        Section((bare("a", 0), covered("b", MM), covered("b", 50 * MM)), Pipe(10 * MM), 0.5)
    assert [m.place for m in told.value.mistakes] == [
        'conductor "b"', "section", 'conductors "a" and "b"', 'conductor "b"']
