"""Many devices at once: chunks, ranks, and the sums of each device."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from unlanded.reference.devices import Device
from unlanded.study import screening
from unlanded.study.screening import ranks, screen
from unlanded.study.standing import bank, equipment_leak, resistive_leak
from unlanded.study.supply import Supply

MAINS = Supply(230.0, 50.0)


def circuits(owners, **more):
    """One uncertain circuit of 2 mA for each owner."""
    leak = equipment_leak("kit", 2e-3, 0.0, line="L", low=0.5, high=1.5, **more)
    rows = bank([leak] * len(owners), MAINS)
    owner = np.array(owners)
    columns = screening.COLUMNS * ranks(owner)[:, None] + np.arange(screening.COLUMNS)
    return replace(rows, owner=owner, columns=columns)


def test_what_is_certain_alone():
    devices = [Device(30e-3), Device(6e-3, "personnel")]
    none = circuits([])
    found = screen(devices, none, np.array([21.6e-3 + 0j, 3e-3j]))
    assert tuple(found.expected) == pytest.approx((21.6e-3, 3e-3), rel=1e-12, abs=0)
    assert found.chance[0] == pytest.approx(0.44, rel=1e-9, abs=0)  # the triangle at its peak
    assert found.chance[1] == 0
    assert found.non_operating.tolist() == [15e-3, 4e-3]
    assert np.isnan(found.recommended[1])
    assert found.ranking.tolist() == [0, 1]


def test_devices_without_circuits_stand_between_others():
    found = screen([Device(30e-3)] * 4, circuits([0, 0, 2]), np.zeros(4, dtype=complex))
    assert found.expected[[1, 3]].tolist() == [0, 0]
    assert found.expected[0] == pytest.approx(4e-3, rel=1e-2, abs=0)
    assert found.expected[2] == pytest.approx(2e-3, rel=1e-2, abs=0)


def test_chunks_do_not_change_the_result(monkeypatch):
    owners = np.repeat(np.arange(40), np.arange(40) % 7)
    devices = [Device(30e-3)] * 40
    whole = screen(devices, circuits(owners), np.zeros(40, dtype=complex))
    monkeypatch.setattr(screening, "ROWS", 5)
    told = []
    parts = screen(devices, circuits(owners), np.zeros(40, dtype=complex), progress=told.append)
    np.testing.assert_allclose(parts.expected, whole.expected, rtol=1e-12)
    np.testing.assert_allclose(parts.worst, whole.worst, rtol=1e-12)
    assert sum(told) == 40
    assert len(told) > 10


def test_a_device_with_more_circuits_than_quasi_random_columns(monkeypatch):
    monkeypatch.setattr(screening, "SOBOL", 8)
    found = screen([Device(30e-3)], circuits([0] * 12), np.zeros(1, dtype=complex))
    assert found.expected[0] == pytest.approx(24e-3, rel=3e-2, abs=0)


def test_a_certain_part_adds_as_a_phasor():
    rows = bank([resistive_leak("r", 230 / 3e-3, MAINS, line="L")], MAINS)
    rows = replace(rows, columns=np.arange(4)[None])
    found = screen([Device(30e-3)], rows, np.array([4e-3j]))
    assert found.expected[0] == pytest.approx(5e-3, rel=1e-12, abs=0)
