"""A screened register against the margin of each device worked out alone."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from unlanded.case.register import read_register
from unlanded.case.screening import screen_register
from unlanded.errors import Refused
from unlanded.reference.devices import Device
from unlanded.reference.equipment import equipment
from unlanded.study.residual import residual_margin
from unlanded.study.standing import capacitive_leak, equipment_leak
from unlanded.study.supply import Supply

SITES = Path(__file__).resolve().parents[2] / "workbook" / "sites"
MAINS = Supply(230.0, 50.0)
THREE = Supply(230.0, 50.0, phases=3)
TEXT = """device,circuit,rated [mA],line,length [m],cable,equipment,pieces,leakage [mA],use [%]
A,,30,,,,,,,
B,,30,,,,,,,
C,,30,,,,,,,
A,one,,L1,100,200 pF/m,,,,
A,two,,L2,100,200 pF/m,,,,
A,three,,L3,100,200 pF/m,,,,
B,desks,,L1,50,150 pF/m,computer,12,,70
B,copier,,L2,50,150 pF/m,copier,2,,40
C,all,,balanced,500,300 pF/m,computer,9,,
"""


@pytest.fixture
def screened(tmp_path):
    path = tmp_path / "register.csv"
    path.write_text(TEXT, encoding="utf-8")
    return screen_register(read_register(path), tmp_path, MAINS)


def test_three_alike_lines_cancel(screened):
    assert screened.screened.expected[0] < 1e-15
    one = 2 * np.pi * 50 * 200e-12 * 100 * 230
    assert screened.arithmetic[0] == pytest.approx(3 * one, rel=1e-12, abs=0)


def test_against_each_device_alone(screened):
    v = {name: equipment(name) for name in ("computer", "copier")}
    leaks = [capacitive_leak("c1", 7.5e-9, THREE, line="L1"),
             capacitive_leak("c2", 7.5e-9, THREE, line="L2"),
             *(equipment_leak(n, v[n].likely, None, low=v[n].low / v[n].likely,
                              high=v[n].high / v[n].likely, line=line, count=count, use=use)
               for n, line, count, use in (("computer", "L1", 12, 0.7), ("copier", "L2", 2, 0.4)))]
    alone = residual_margin(Device(30e-3), leaks, THREE)
    found = screened.screened
    # 256 draws against 8192: the spread of a mean of 256 quasi-random points is under 1 %.
    assert found.expected[1] == pytest.approx(alone.expected, rel=1e-2, abs=0)
    assert found.worst[1] == pytest.approx(alone.credible[1], rel=4e-2, abs=0)
    assert found.chance[1] == pytest.approx(alone.chance, rel=0.25, abs=0)
    assert screened.arithmetic[1] == pytest.approx(alone.arithmetic, rel=1e-12, abs=0)


def test_balanced_circuits_leak_nothing_at_the_supplys_frequency(screened):
    assert screened.screened.expected[2] == 0


def test_ranking_and_progress(tmp_path):
    path = tmp_path / "register.csv"
    path.write_text(TEXT, encoding="utf-8")
    told = []
    found = screen_register(read_register(path), tmp_path, MAINS, progress=told.append)
    assert sum(told) == 3
    assert found.screened.ranking.tolist()[0] == 1


def test_the_demo_register_is_regrouped_to_keep_every_margin():
    found = screen_register(read_register(SITES / "heron-house-register.csv"), SITES, MAINS)
    assert found.regrouping is not None
    assert found.regrouping.worst_before < 0 < found.regrouping.worst
    assert found.regrouping.proved
    assert found.regrouping.device_of["RCD 2: kitchen"] == "RCD 2"  # pinned


def test_an_unknown_board_is_refused_and_devices_alone_are_screened(tmp_path):
    path = tmp_path / "register.csv"
    path.write_text(TEXT, encoding="utf-8")
    with pytest.raises(Refused, match="board: is not in this register; given X"):
        screen_register(read_register(path), tmp_path, MAINS, regroup_board="X")
    path.write_text("\n".join(TEXT.splitlines()[:4]) + "\n", encoding="utf-8")
    alone = screen_register(read_register(path), tmp_path, MAINS)
    assert alone.screened.worst.tolist() == [0, 0, 0]
    assert alone.regrouping is None
