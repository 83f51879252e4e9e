"""Screening a register, regrouping a board, reading a log: times, memory, and how they grow.

Run: python tests/benchmarks/bench_screen.py
The registers and logs are made here by a seeded generator; nothing in them is real.
"""

from __future__ import annotations

import resource
import sys
import tempfile
import time
from pathlib import Path

import numpy as np

from unlanded.case.logs import read_log
from unlanded.case.register import read_register
from unlanded.case.screening import screen_register
from unlanded.reference.equipment import TYPICAL
from unlanded.study.history import history
from unlanded.study.regrouping import Circuit, Place, regroup
from unlanded.study.supply import Supply

HEADING = ("board,device,circuit,rated [mA],kind,waveform,line,length [m],cable,equipment,pieces,"
           "leakage [mA],use [%],pinned")


def write_register(path: Path, circuits: int, seed: int = 7) -> int:
    """A register of so many circuits on a fiftieth as many devices; returns the devices."""
    draw = np.random.default_rng(seed)
    devices = circuits // 50
    kinds, cables = list(TYPICAL), [f"{c} pF/m" for c in range(90, 290, 10)]
    with path.open("w", encoding="utf-8") as file:
        print(HEADING, file=file)
        for d in range(devices):
            print(f"B{d // 8},D{d},,{draw.choice([30, 100, 300])},general,A,,,,,,,,", file=file)
        owner = draw.integers(devices, size=circuits)
        length = draw.uniform(5, 120, circuits)
        picks = draw.integers([3, len(cables), len(kinds), 7, 4], size=(circuits, 5))
        for c in range(circuits):
            line, cable, kind, pieces, use = picks[c]
            print(f"B{owner[c] // 8},D{owner[c]},C{c},,,,L{line + 1},{length[c]:.1f},"
                  f"{cables[cable]},{kinds[kind]},{pieces},,{25 * (use + 1)},", file=file)
    return devices


def bench_screen() -> bool:
    _screen(1_000)  # what is imported where it is used is imported here, once
    print(f"{'circuits':>9} {'devices':>8} {'read s':>7} {'screen s':>9} {'total s':>8} {'MB':>6}")
    for circuits in (1_000, 10_000, 100_000):
        devices, read, total = _screen(circuits)
        peak = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024
        print(f"{circuits:9} {devices:8} {read:7.2f} {total - read:9.2f} {total:8.2f} {peak:6.0f}")
    return total < 10 and peak < 1500


def _screen(circuits: int) -> tuple[int, float, float]:
    """Devices, seconds to read the register, and seconds in all."""
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / "register.csv"
        devices = write_register(path, circuits)
        began = time.perf_counter()
        register = read_register(path)
        read = time.perf_counter() - began
        screen_register(register, Path(folder), Supply(230.0, 50.0))
        return devices, read, time.perf_counter() - began


def bench_log(rows: int = 1_000_000) -> bool:
    """A log of a million rows, some of them bad, read and searched for steps."""
    draw = np.random.default_rng(3)
    current = 6 + 0.05 * draw.standard_normal(rows) + 3 * (np.arange(rows) // 5000 % 2)
    stamps = np.datetime_as_string(np.datetime64("2026-03-02T00:00:00") + np.arange(rows))
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / "log.csv"
        lines = [f"{t},{i:.2f}" for t, i in zip(stamps, current, strict=True)]
        lines[1234] = "yesterday,OL"
        path.write_text("time,residual [mA]\n" + "\n".join(lines) + "\n", encoding="utf-8")
        began = time.perf_counter()
        log, intake = read_log(path, zone="UTC")
        read = time.perf_counter() - began
        found = history(log, limit=8e-3)
        took = time.perf_counter() - began
    print(f"log of {rows} rows: read {read:.2f} s, searched {took - read:.2f} s; "
          f"{len(found.steps)} steps, {intake.bad_rows} bad row")
    return took < 10 and len(found.steps) == rows // 5000 - 1


def bench_regroup() -> bool:
    """A board of 40 circuits on three lines and 8 devices, six of one line and two of all."""
    lines = ("L1", "L2", "L3")
    places = [Place(f"D{k}", 9e-3, (lines[k % 3],)) for k in range(6)]
    places += [Place(f"D{k}", 9e-3, lines) for k in (6, 7)]
    worst = 0.0
    for seed in range(5):
        draw = np.random.default_rng(seed)
        circuits = []
        for k in range(40):
            fits = [p.name for p in places if lines[k % 3] in p.lines]
            circuits.append(Circuit(f"C{k}", lines[k % 3], float(draw.uniform(0.2e-3, 3e-3)),
                                    fits[int(draw.integers(len(fits)))], draw.random() < 0.1))
        began = time.perf_counter()
        found = regroup(circuits, places)
        took = time.perf_counter() - began
        worst = max(worst, took if found.proved else np.inf)
        print(f"board {seed}: {took:5.2f} s, worst margin {found.worst_before:6.1%} to "
              f"{found.worst:6.1%}, {len(found.moves)} moves, proved: {found.proved}")
    return worst < 10


if __name__ == "__main__":
    sys.exit(0 if all([bench_screen(), bench_regroup(), bench_log()]) else 1)
