from __future__ import annotations

import math
from itertools import combinations

import pytest

from unlanded.report.labels import Flag, flags


@pytest.mark.parametrize("points", [
    [(0.08, 0.0), (0.15, 0.02), (0.38, 0.4), (0.5, 0.85), (0.56, 0.89), (0.66, 0.9)],
    [(0.1, 0.5)] * 4,
    [(0.95, 0.95), (0.95, 0.05)],
])
def test_flags_are_within_the_picture_and_clear_of_each_other(
    points: list[tuple[float, float]]
) -> None:
    texts = [f"an instrument: {i}.5 V" for i in range(len(points))]
    found = flags(points, texts, lambda x: 1 / (1 + math.exp(-14 * (x - 0.4))))
    assert [(f.x, f.y) for f in found] == points
    for flag in found:
        left, right, bottom, top = flag.box
        assert left >= 0
        assert right <= 1
        assert bottom >= 0
        assert top <= 1
    apart = set(points)
    if len(apart) == len(points):
        assert [(a.x, b.x) for a, b in combinations(found, 2) if a.clashes(b)] == []


def test_a_pole_through_words_is_a_clash() -> None:
    words = Flag(0.1, 0.2, 0.5, 0.3, leftward=False)
    assert words.clashes(Flag(0.2, 0.1, 0.9, 0.1, leftward=False))
    assert not words.clashes(Flag(0.6, 0.1, 0.9, 0.1, leftward=False))
