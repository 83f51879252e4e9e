"""Singles at rest in a conduit: no overlap, everything held up, the same for the same seed."""

from __future__ import annotations

import itertools
import math

import numpy as np
import pytest
from numpy.testing import assert_allclose

from unlanded.errors import Refused
from unlanded.physics.layouts import Core
from unlanded.physics.packing import packed, packed_positions
from unlanded.physics.section import Pipe, Section

MM = 1e-3
REPOSE = math.pi / 6  # the first single may lie this far from the lowest point

LOTS = {
    "three alike": ([1.4] * 3, 8.0),
    "one alone": ([1.4], 8.0),
    "nearly as large as the conduit": ([7.9], 8.0),
    "seven alike": ([1.4] * 7, 8.0),
    "mixed": ([1.4, 2.0, 1.4, 3.0, 1.0, 1.4], 10.0),
    "twenty": ([1.0] * 20, 8.0),
}
CASES = pytest.mark.parametrize(("outer", "pipe"), LOTS.values(), ids=LOTS.keys())


def arrangements(outer: list[float], pipe: float, count: int = 40, seed: int = 7) -> np.ndarray:
    places = packed_positions(np.array(outer), pipe_radius=pipe, count=count, seed=seed)
    assert places.shape == (count, len(outer), 2)
    return places[..., 0] + 1j * places[..., 1]


def pushes(k: int, z: np.ndarray, outer: np.ndarray, pipe: float) -> list[complex]:
    """Unit pushes on circle k from the wall and from circles that it touches."""
    found = [
        (z[k] - z[j]) / abs(z[k] - z[j])
        for j in range(len(z))
        if j != k and abs(z[k] - z[j]) < (outer[k] + outer[j]) * (1 + 1e-8)
    ]
    if abs(z[k]) > (pipe - outer[k]) * (1 - 1e-8):
        found.append(-z[k] / abs(z[k]))
    return found


def held(directions: list[complex]) -> bool:
    """Some two pushes add up to one straight upward: the upward line lies between them."""
    return any(
        a.real <= 1e-7 and b.real >= -1e-7 and (a * b.conjugate()).imag >= 0
        for a, b in itertools.permutations(directions, 2)
    )


@CASES
def test_nothing_overlaps_and_everything_is_inside(outer, pipe):
    radii = np.array(outer)
    reach = radii[:, None] + radii
    np.fill_diagonal(reach, 0.0)
    for z in arrangements(outer, pipe):
        assert (abs(z[:, None] - z) >= reach * (1 - 1e-8)).all()
        assert (abs(z) + radii <= pipe * (1 + 1e-8)).all()


@CASES
def test_everything_rests(outer, pipe):
    # A single is held from both sides by the wall and others. Only the one that went in first may
    # lie by friction on the wall alone, up to 30° from the lowest point.
    radii = np.array(outer)
    for z in arrangements(outer, pipe):
        loose = [k for k in range(len(z)) if not held(pushes(k, z, radii, pipe))]
        assert len(loose) <= 1
        for k in loose:
            assert abs(z[k]) == pytest.approx(pipe - radii[k], rel=1e-9, abs=0)
            assert abs(np.angle(z[k] * 1j)) <= REPOSE * (1 + 1e-9)


@CASES
def test_everything_touches_something(outer, pipe):
    radii = np.array(outer)
    for z in arrangements(outer, pipe, count=10):
        assert all(pushes(k, z, radii, pipe) for k in range(len(z)))


def test_the_same_seed_gives_the_same_arrangements():
    outer = [1.4, 2.0, 1.4, 3.0]
    first, again = arrangements(outer, 9.0, seed=11), arrangements(outer, 9.0, seed=11)
    assert (first == again).all()
    assert (arrangements(outer, 9.0, seed=12) != first).any()
    assert len(np.unique(first[:, 0])) > 30  # and within one seed they differ


def test_an_arrangement_does_not_depend_on_which_others_there_are():
    outer, which = np.array([1.4, 2.0, 1.4, 3.0]), np.array([9, 2, 9])
    alone = packed_positions(outer, pipe_radius=5.5, count=40, seed=11, which=which)
    whole = packed_positions(outer, pipe_radius=5.5, count=40, seed=11)
    assert (alone == whole[which]).all()


def test_each_arrangement_may_have_its_own_sizes():
    # The same numbers fall the same way: of twice the size, twice as far from the middle.
    outer, pipe = np.array([[1.0] * 5, [2.0] * 5, [1.1] * 5]), np.array([6.0, 12.0, 5.9])
    z = packed_positions(outer, pipe_radius=pipe, count=9, seed=2, which=np.array([4, 4, 4]))
    assert_allclose(z[1], 2 * z[0], rtol=1e-9)
    assert (z[2] != z[0]).any()
    for centres, radii, inside in zip(z[..., 0] + 1j * z[..., 1], outer, pipe, strict=True):
        reach = radii[:, None] + radii
        np.fill_diagonal(reach, 0.0)
        assert (abs(centres[:, None] - centres) >= reach * (1 - 1e-8)).all()
        assert (abs(centres) + radii <= inside * (1 + 1e-8)).all()
        assert all(pushes(k, centres, radii, inside) for k in range(5))
    with pytest.raises(Refused, match=r"under 10 m across; given 12 m"):
        packed_positions(np.array([[1.0], [6.0]]), pipe_radius=np.array([5.0, 5.0]), count=1,
                         seed=1, which=np.array([0, 0]))


def test_packed_is_the_first_arrangement_in_the_order_of_the_names():
    cores = [Core(0.7 * MM, 1.4 * MM, 5.0), Core(1.0 * MM, 2.0 * MM, 4.0),
             Core(0.7 * MM, 1.4 * MM, 5.0)]
    placed = packed(["a", "b", "c"], cores, pipe_radius=8 * MM, seed=3)
    assert [(c.name, c.radius, c.outer, c.cover_permittivity) for c in placed] == [
        (n, k.radius, k.cover_radius, k.cover_permittivity)
        for n, k in zip("abc", cores, strict=True)]
    z = packed_positions(np.array([1.4, 2.0, 1.4]) * MM, pipe_radius=8 * MM, count=1, seed=3)[0]
    assert_allclose([(c.x, c.y) for c in placed], z, rtol=1e-12)
    assert placed == packed(["a", "b", "c"], cores, pipe_radius=8 * MM, seed=3)
    assert Section(placed, Pipe(8 * MM)).names == ("a", "b", "c")


def test_every_order_of_dropping_comes_up():
    # Two unlike singles: the smaller lies at the bottom about as often as the larger.
    lowest = arrangements([1.0, 1.5], 8.0, count=400).imag.argmin(axis=1)
    assert 0.25 < lowest.mean() < 0.75


# Two equal circles go into one of 2 radii, three into one of 1 + 2/√3 = 2.1547.
def test_two_circles_fit_where_they_fit_exactly():
    z = arrangements([1.0, 1.0], 2.0 * (1 + 1e-9), count=5)
    assert_allclose(abs(z[:, 0] - z[:, 1]), 2.0, rtol=1e-6)
    with pytest.raises(Refused, match=r"2 singles do not go into a conduit of 3\.998 m"):
        arrangements([1.0, 1.0], 1.999)


def test_three_circles_fit_where_they_fit_closely():
    assert arrangements([1.0] * 3, 2.1548, count=5).shape == (5, 3)
    with pytest.raises(Refused, match=r"in conduit: 3 singles do not go into a conduit of 4\.308 m "
                                      r"inner diameter; given they fill 65% of it"):
        arrangements([1.0] * 3, 2.154)


def test_too_many_are_refused():
    cores = [Core(0.7 * MM, 1.4 * MM, 5.0)] * 40
    with pytest.raises(Refused, match=r"40 singles do not go into a .* \(take a larger conduit"):
        packed([f"c{k}" for k in range(40)], cores, pipe_radius=8 * MM, seed=1)


def test_one_that_is_too_large_is_refused():
    assert arrangements([1.0, 0.2], 1.3, count=1).shape == (1, 2)
    with pytest.raises(Refused, match=r"every single must be under 2\.6 m across; given 2\.602 m"):
        arrangements([1.301, 0.2], 1.3)


def test_none_is_refused():
    with pytest.raises(Refused, match="in conduit: needs at least one single"):
        packed([], [], pipe_radius=8 * MM, seed=1)


@pytest.mark.parametrize("count", [2, 4])
def test_a_name_for_every_core(count):
    with pytest.raises(Refused, match=f"in conduit: takes 3 names; given {count}"):
        packed([f"c{k}" for k in range(count)], [Core(0.7, 1.4, 5.0)] * 3, pipe_radius=8.0, seed=1)


@pytest.mark.parametrize("pipe", [3e-3, 3e-3 * (1 + 1e-15), 4e-3, 5.9e-3])
def test_what_leaves_no_room_at_all_is_refused_without_a_stray_number(pipe: float) -> None:
    # As wide as the conduit: centres of circle and wall are one place.
    with pytest.raises(Refused, match="3 singles do not go into a conduit"):
        packed(("a", "b", "c"), [Core(1e-3, 3e-3, 3.0)] * 3, pipe_radius=pipe, seed=1)
