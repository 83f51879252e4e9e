"""The usual arrangements: where the cores lie, what touches what, and what is refused."""

from __future__ import annotations

import math
from itertools import combinations

import pytest
from numpy.testing import assert_allclose

from unlanded.errors import Refused
from unlanded.physics.layouts import Core, control, flat_twin, laid_up, screen_radius, singles
from unlanded.physics.section import Conductor, Pipe, Section

MM = 1e-3
CORE = Core(0.7 * MM, 1.4 * MM, 5.0)


def names(count: int) -> list[str]:
    return [f"c{k}" for k in range(count)]


def distance(a: Conductor, b: Conductor) -> float:
    return math.hypot(a.x - b.x, a.y - b.y)


def contacts(conductors: tuple[Conductor, ...]) -> int:
    """How many pairs touch; the section refuses those that overlap."""
    Section(conductors)
    return sum(distance(a, b) < (a.outer + b.outer) * (1 + 1e-9)
               for a, b in combinations(conductors, 2))


def test_a_core_is_placed_with_its_cover():
    assert CORE.at("a", 1.0, 2.0) == Conductor("a", 1.0, 2.0, 0.7 * MM, 1.4 * MM, 5.0)


def test_singles_at_a_spacing():
    placed = singles(names(3), [CORE] * 3, spacing=10 * MM)
    assert [c.name for c in placed] == names(3)
    assert_allclose([c.x for c in placed[1:]], [10 * MM, 20 * MM], rtol=1e-15)
    assert (placed[0].x, {c.y for c in placed}) == (0.0, {0.0})


def test_unlike_singles_touch():
    thick = Core(1.0 * MM, 2.0 * MM, 3.0)
    placed = singles(names(3), [CORE, thick, CORE])
    assert_allclose([c.x for c in placed[1:]], [3.4 * MM, 6.8 * MM], rtol=1e-15)
    assert contacts(placed) == 2


# Neighbours on a circle touch: its radius is b, 2 b / √3, √2 b, and b / sin 36° for 2 to 5 cores;
# 1.7013 is half the diameter of a circle around the corners of a pentagon of side 2.
@pytest.mark.parametrize(("count", "ratio", "touching"),
                         [(2, 1.0, 1), (3, 2 / math.sqrt(3), 3), (4, math.sqrt(2), 4),
                          (5, 1.7013016167, 5)])
def test_laid_up(count, ratio, touching):
    placed = laid_up(names(count), CORE)
    assert [c.name for c in placed] == names(count)
    assert_allclose([math.hypot(c.x, c.y) for c in placed], ratio * 1.4 * MM, rtol=1e-10)
    assert contacts(placed) == touching


@pytest.mark.parametrize("count", [0, 1, 6])
def test_laid_up_takes_2_to_5(count):
    with pytest.raises(Refused, match=f"laid up: takes 2 to 5 cores; given {count}"):
        laid_up(names(count), CORE)


# 1 + 6: six spokes and six on the rim. The next 12 lie on a circle of 4 b, 30° apart, where they
# leave gaps (8 b sin 15° = 2.07 b), and every other one touches a core of the inner layer.
@pytest.mark.parametrize(("count", "touching"), [(7, 12), (19, 18)])
def test_control(count, touching):
    placed = control(names(count), CORE)
    assert [c.name for c in placed] == names(count)
    layer = [round(math.hypot(c.x, c.y) / CORE.cover_radius, 9) for c in placed]
    assert layer == [0.0] + [2.0] * 6 + [4.0] * (count - 7)
    assert contacts(placed) == touching


@pytest.mark.parametrize("count", [1, 6, 8, 18, 20])
def test_control_takes_7_or_19(count):
    with pytest.raises(Refused, match=r"control: takes 7 \(1 \+ 6\) or 19 .* cores; given"):
        control(names(count), CORE)


def test_flat_twin():
    left, earth, right = flat_twin(["L", "E", "N"], CORE, earth_radius=0.5 * MM)
    assert [left.name, earth.name, right.name] == ["L", "E", "N"]
    assert (earth.radius, earth.outer) == (0.5 * MM, 0.5 * MM)
    assert_allclose([right.x, -left.x], 1.9 * MM, rtol=1e-15)
    assert contacts((left, earth, right)) == 2


@pytest.mark.parametrize("count", [2, 4])
def test_flat_twin_takes_3_names(count):
    with pytest.raises(Refused, match=f"flat twin: takes 3 names; given {count}"):
        flat_twin(names(count), CORE, earth_radius=0.5 * MM)


def test_flat_twin_with_an_earth_of_no_radius_is_refused():
    with pytest.raises(Refused, match='conductor "E": radius must be above 0 m'):
        flat_twin(["L", "E", "N"], CORE, earth_radius=0.0)


@pytest.mark.parametrize("count", [2, 4])
def test_singles_takes_as_many_names_as_cores(count):
    with pytest.raises(Refused, match=f"singles: takes 3 names; given {count}"):
        singles(names(count), [CORE] * 3)


def test_screen_radius():
    # A cord of three: 2 b / √3 + b, and the clearance.
    cord = laid_up(names(3), CORE)
    touching = screen_radius(cord)
    assert touching == pytest.approx(1.4 * MM * (1 + 2 / math.sqrt(3)), rel=1e-12, abs=0)
    assert Section(cord, Pipe(touching)).names == ("c0", "c1", "c2")
    with pytest.raises(Refused, match="must lie inside the pipe"):
        Section(cord, Pipe(touching * (1 - 1e-6)))
    assert screen_radius(cord, clearance=0.3 * MM) == pytest.approx(touching + 0.3 * MM, rel=1e-12,
                                                                    abs=0)


def test_screen_clearance_is_not_negative():
    cord = laid_up(names(3), CORE)
    assert screen_radius(cord, clearance=0.0) > 0
    with pytest.raises(Refused, match=r"screen: clearance must be at least 0 m; given -1e-06 m"):
        screen_radius(cord, clearance=-1e-6)
