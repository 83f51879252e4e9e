"""Regrouping against every grouping of small boards, and its refusals."""

from __future__ import annotations

from itertools import product

import numpy as np
import pytest

from unlanded.errors import Refused
from unlanded.study.regrouping import Circuit, Place, regroup

LINES = ("L1", "L2", "L3")


def worst_of(circuits, places, chosen):
    load = {}
    for c, p in zip(circuits, chosen, strict=True):
        load[p, c.line] = load.get((p, c.line), 0.0) + c.current
    return min(1 - i / places[p].limit for (p, _), i in load.items())


def best_by_trying_all(circuits, places):
    """Best worst margin, and the fewest moves at it, over every grouping allowed."""
    allowed = [[k for k, p in enumerate(places) if c.line in p.lines
                and (not c.pinned or p.name == c.device)] for c in circuits]
    tried = []
    for chosen in product(*allowed):
        moves = sum(places[p].name != c.device for c, p in zip(circuits, chosen, strict=True))
        tried.append((worst_of(circuits, places, chosen), moves))
    best = max(w for w, _ in tried)
    return best, min(m for w, m in tried if w >= best - 1e-9)


@pytest.mark.parametrize("seed", range(6))
def test_small_boards_against_every_grouping(seed):
    draw = np.random.default_rng(seed)
    places = [Place("A", 9e-3, ("L1", "L2")), Place("B", 9e-3, LINES), Place("C", 3e-3, LINES)]
    circuits = [Circuit(str(k), LINES[int(draw.integers(2))], float(draw.uniform(0.5e-3, 4e-3)),
                        "AB"[int(draw.integers(2))], bool(draw.random() < 0.2)) for k in range(7)]
    found = regroup(circuits, places, alike=0.0)
    best, moves = best_by_trying_all(circuits, places)
    assert found.worst == pytest.approx(best, rel=1e-6, abs=0)
    assert len(found.moves) == moves
    assert found.proved
    names = [p.name for p in places]
    assert found.worst == pytest.approx(
        worst_of(circuits, places, [names.index(found.device_of[c.name]) for c in circuits]),
        rel=1e-12, abs=0)


def test_alike_margins_save_moves():
    # 5.00 and 4.96 mA behind two devices of 10 mA each: even is 4.98, gained by many moves.
    circuits = [Circuit("a", "L", 5.0e-3, "A"), Circuit("b", "L", 4.96e-3, "B"),
                Circuit("c", "L", 0.02e-3, "A")]
    places = [Place("A", 10e-3, ("L",)), Place("B", 10e-3, ("L",))]
    assert len(regroup(circuits, places, alike=0.0).moves) == 1
    assert regroup(circuits, places, alike=0.01).moves == ()


def test_lines_do_not_load_one_another():
    circuits = [Circuit(line, line, 3e-3, "A") for line in LINES]
    found = regroup(circuits, [Place("A", 9e-3, LINES), Place("B", 9e-3, LINES)])
    assert found.worst == pytest.approx(2 / 3, rel=1e-9, abs=0)
    assert found.moves == ()


def test_pinned_circuits_and_ways_are_respected():
    circuits = [Circuit(str(k), "L", 2e-3, "A", pinned=k == 0) for k in range(4)]
    found = regroup(circuits, [Place("A", 9e-3, ("L",)), Place("B", 9e-3, ("L",), ways=1)])
    assert found.device_of["0"] == "A"
    assert sorted(found.device_of.values()).count("B") == 1


def test_a_new_circuit_has_no_margin_before():
    found = regroup([Circuit("new", "L", 2e-3)], [Place("A", 9e-3, ("L",))])
    assert np.isnan(found.worst_before)
    assert found.device_of == {"new": "A"}


@pytest.mark.parametrize(
    ("circuits", "places", "message"),
    [([Circuit("a", "L2", 1e-3)], [Place("A", 9e-3, ("L1",))], "has no device on its line"),
     ([Circuit("a", "L1", 1e-3, "X", pinned=True)], [Place("A", 9e-3, ("L1",))], "is pinned"),
     ([Circuit("a", "L1", 1e-3)] * 2, [Place("A", 9e-3, ("L1",))], "a name may be used once"),
     ([Circuit("a", "L1", 1e-3)], [Place("A", 0.0, ("L1",))], "its limit must be above 0 A"),
     ([Circuit(c, "L1", 1e-3) for c in "ab"], [Place("A", 9e-3, ("L1",), ways=1)],
      "no grouping was found")],
)  # fmt: skip
def test_refusals(circuits, places, message):
    with pytest.raises(Refused, match=message):
        regroup(circuits, places)
