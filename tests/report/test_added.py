"""What a case adds to its memo, leaves out of it, and who signs; and the parts they are made of."""

from __future__ import annotations

import datetime

import numpy as np
import pytest
from numpy.testing import assert_allclose

from case_text import PAIR, site
from unlanded.case.loading import read_case
from unlanded.physics.burden import Burden
from unlanded.report.added import added_part
from unlanded.report.case_memo import case_contents
from unlanded.report.figure import Figure
from unlanded.report.formulas import formula_neighbours, formula_table
from unlanded.report.investigation import Investigation, investigate
from unlanded.report.memo import Part
from unlanded.report.pair import IMPEDANCES, lengths_for
from unlanded.report.tables import Table

ON_BLACK = 'from = "black@far"\nto = "earth"\nmeter = "3.3 Mohm"\n'


def investigated(name: str, *entries: str, memo: str = "") -> Investigation:
    added = "".join(f"\n[[memo.added]]\n{entry}" for entry in entries)
    return investigate(read_case(f"{site(name)}\n[memo]\n{memo}\n{added}"))


def blocks(found: Investigation) -> tuple[object, ...]:
    part = added_part(found)
    assert isinstance(part, Part)
    return part.blocks


def test_nothing_added_is_no_part() -> None:
    assert added_part(investigate(read_case(site("tern-quay")))) is None


def test_figures_and_table_of_a_pair_hold_the_run_s_numbers() -> None:
    found = investigated("tern-quay", *(f'kind = "{k}"\n{ON_BLACK}' for k in
                                        ("loading", "length", "readings")))
    loading, length, readings = blocks(found)
    run = found.run
    assert isinstance(loading, Figure)
    some = [0, 60, 120]
    wanted = [abs(run.connect(Burden(r), "black@far").voltage) for r in IMPEDANCES[some]]
    assert_allclose(loading.lines[0].y[some], wanted, rtol=1e-9)
    assert loading.points[-1].texts[0].startswith("your meter, 3.3 MΩ: ")
    assert isinstance(length, Figure)
    assert length.lines[0].label == "your meter, 3.3 MΩ"
    at = np.interp(85.0, length.lines[0].x, length.lines[0].y)
    assert at == pytest.approx(abs(run.connect(Burden(3.3e6), "black@far").voltage),
                               rel=1e-3, abs=0)
    assert isinstance(readings, Table)
    assert [row[0] for row in readings.rows][-1] == "your meter, 3.3 MΩ"


def test_each_kind_once_has_a_key_of_its_own() -> None:
    found = investigated("tern-quay", 'kind = "formulas"\n',
                         'kind = "tried cause"\nconductor = "black"\ncause = "leakage to earth"\n'
                         'size = "200 kohm"\n', f'kind = "loading"\n{ON_BLACK}')
    memo = case_contents(found, date=datetime.date(2026, 1, 2)).memo
    keys = [x.key for x in (*memo.figures, *memo.tables)]
    assert {"added-1-formulas", "added-2-tried", "added-3-loading"} <= set(keys)
    assert len(keys) == len(set(keys))


def test_load_and_resistor() -> None:
    (load,) = blocks(investigated("heron-house",
                                  'kind = "added load"\nleak = "desk computers with screens"\n'))
    assert isinstance(load, Figure)
    assert load.x.low == 6.0
    (beside,) = blocks(investigated("larkmoor", 'kind = "resistor beside"\n'
                                    'load = "interlock relay"\nresistor = "33 kohm"\n'))
    assert isinstance(beside, Figure)
    assert beside.numbers[0].startswith("33 kΩ: ")


def test_parts_left_out_and_who_signs() -> None:
    left = 'leave_out = ["expected", "causes", "margin"]\nprepared_by = "A. Engineer"\n'
    contents = case_contents(investigated("tern-quay", memo=left), date=datetime.date(2026, 1, 2),
                             checked_by="B. Engineer")
    headings = [p.heading for p in contents.memo.parts]
    assert not {"Expected readings", "Residual-current margin"} & set(headings)
    assert {"Summary", "Caution", "Assumptions", "Sources"} <= set(headings)
    assert (contents.memo.prepared_by, contents.memo.checked_by) == ("A. Engineer", "B. Engineer")


def test_lengths_reach_beyond_the_run_in_round_units() -> None:
    for name, customary, unit in (("tern-quay", False, 1.0), ("alder-mill", True, 0.3048)):
        run = investigate(read_case(site(name))).run
        along = lengths_for(run, 33, customary=customary)
        assert np.all(np.diff(along) > 0)
        assert along[0] < 0.1 * run.length < 1.7 * run.length < along[-1]
        assert (along[-1] / unit) % 5 == pytest.approx(0.0, abs=0) or (
            along[-1] / unit) % 5 > 4.999


def test_formula_of_two_wires_and_of_a_wire_over_a_plane() -> None:
    # Two bare wires of 1 mm radius, 100 mm apart, 500 mm over a plane: nearly alone in the world.
    bare = PAIR.replace('cover_diameter = "4 mm"\npermittivity = 3.0\n', "")
    far = bare.replace('x = "5 mm"', 'x = "100 mm"').replace('b = "open"\n', "")
    found = investigate(read_case(far.replace(
        "[run.ends.near]", '[run.surround]\nkind = "plane"\ngap = "499 mm"\n[run.ends.near]')))
    (what, formula, ours), (over, height, _) = formula_neighbours(found.run)
    eps = 8.8541878188e-12
    assert what == "a and b, bare and alone"
    assert formula == pytest.approx(np.pi * eps / np.arccosh(50), rel=1e-9, abs=0)
    assert ours < formula
    assert over == "a over the surface, bare and alone"
    assert height == pytest.approx(2 * np.pi * eps / np.arccosh(500), rel=1e-9, abs=0)
    assert formula_table(found.run, customary=True).columns[1].unit == "pF/ft"
