"""Time and memory of uncertainty: draws through section, network and sheet to bands.

Run with `python tests/benchmarks/bench_spread.py [draws]`. The section is that of Heron House, five
singles at random in a metal conduit; arrangement, permittivity and length vary. The peer, in the
same run and on the same two threads, solves the same systems with bare LAPACK calls, their
matrices already there: the multipole systems (with the five charges for right-hand sides) and the
networks. Targets: at most 3 times the peer, 10,000 draws under 10 s on two cores; a full sheet
with bands on a demo case under 1 s; under 1 GB at 1,000,000 draws.
"""

from __future__ import annotations

import os

os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")

import resource
import subprocess
import sys
import time
from collections.abc import Callable
from concurrent.futures import ThreadPoolExecutor
from pathlib import Path

import numpy as np

from unlanded.case.build import case_instruments
from unlanded.case.loading import load_case, read_case
from unlanded.case.uncertainty import uncertain_run
from unlanded.physics.capacitance import multipole_numbers
from unlanded.study.banded import spread_sheet
from unlanded.study.readings import reading_sheet
from unlanded.study.spread import quasi_random, within
from unlanded.study.uncertain import TOLERANCE, UncertainRun

SITES = Path(__file__).resolve().parents[2] / "workbook" / "sites"
BATCH = 1024


def took(work: Callable[[], object]) -> float:
    """Time of one run [s]."""
    return timed(work)[0]


def timed(work: Callable[[], object]) -> tuple[float, float]:
    """Time of one run by the clock and of all threads on the processor [s].

    On a machine that does other work too the second is the steadier.
    """
    start = time.perf_counter(), time.process_time()
    work()
    return time.perf_counter() - start[0], time.process_time() - start[1]


SIZES = '\n[spread]\nthickness = "10 %"\nbore = "5 %"\n'


def conduit(more: str = "") -> UncertainRun:
    """Arrangement, permittivity and length of the conduit vary, and what `more` says."""
    plain = uncertain_run(read_case((SITES / "heron-house.toml").read_text("utf-8") + more))
    return UncertainRun(plain.run, plain.section, within(plain.run.length, 0.1))


def bare(uncertain: UncertainRun, draws: int) -> tuple[float, float]:
    """The same systems solved by LAPACK alone, on two threads [s]."""
    assert uncertain.section is not None
    values = quasi_random(uncertain.section.inputs, 1024)
    sizes = 2 * multipole_numbers(uncertain.section.geometry(values), TOLERANCE).sum(axis=1)
    sizes += len(uncertain.run.section.names)
    network = len(uncertain.draws(2)._solved[0].inverse[0])
    rng = np.random.default_rng(1)
    known = {}
    for size in np.unique(sizes):
        a = rng.normal(size=(size, size))
        known[int(size)] = a @ a.T + size * np.eye(size)
    charges = rng.normal(size=(int(sizes.max()), len(uncertain.run.section.names)))
    nodes = rng.normal(size=(network, network)) + 1j * np.eye(network) * network

    def part(count: int) -> None:
        done = 0
        for size, share in zip(*np.unique(sizes, return_counts=True), strict=True):
            times = round(count * share / len(sizes))
            for start in range(0, times, 16):
                stack = np.broadcast_to(known[int(size)], (min(16, times - start), size, size))
                np.linalg.solve(stack, np.broadcast_to(charges[:size], (len(stack), size, 5)))
                done += len(stack)
        np.linalg.inv(np.broadcast_to(nodes, (count, network, network)))

    with ThreadPoolExecutor(2) as pool:
        return timed(lambda: list(pool.map(part, [draws // 2] * 2)))


def streamed(draws: int) -> None:
    """Run in a process of its own: a cheap sheet drawn so often, and what memory it took."""
    case = load_case(SITES / "alder-mill.toml")
    uncertain = uncertain_run(case)
    sheet = reading_sheet(uncertain.run, case_instruments(case))
    seconds = took(lambda: spread_sheet(sheet, uncertain, stable=1e-9, batch=4096, most=draws))
    peak = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024
    print(f"{draws:,} draws of {len(sheet.rows)} readings, streamed: {seconds:.1f} s, "
          f"peak memory {peak:.0f} MB")


def main(draws: int = 10_240) -> None:
    """Print times and ratios."""
    from scipy.stats import qmc, sobol_indices

    del qmc, sobol_indices  # their import is not what is measured
    uncertain = conduit()
    case = load_case(SITES / "heron-house.toml")
    sheet = reading_sheet(uncertain.run, case_instruments(case))
    uncertain.draws(2)  # the packings are made once for a case
    found = []
    ours = timed(lambda: found.append(spread_sheet(
        sheet, uncertain, stable=1e-9, batch=BATCH, most=draws)))
    made = found[0].spread.draws
    peer = bare(uncertain, made)
    print(f"{made:,} draws, five singles in a conduit, {len(sheet.rows)} readings: "
          f"{ours[0]:.2f} s (processor {ours[1]:.2f} s); bare LAPACK {peer[0]:.2f} s "
          f"({peer[1]:.2f} s); ratio {ours[0] / peer[0]:.2f} ({ours[1] / peer[1]:.2f})")
    sized = conduit(SIZES)
    longer = timed(lambda: spread_sheet(sheet, sized, stable=1e-9, batch=BATCH, most=draws))
    print(f"with covers and bore varying too: {longer[0]:.2f} s (processor {longer[1]:.2f} s)")
    for name in ("tern-quay", "alder-mill", "larkmoor", "heron-house"):
        case = load_case(SITES / f"{name}.toml")
        run = uncertain_run(case)
        sheet = reading_sheet(run.run, case_instruments(case))
        seconds = took(lambda s=sheet, r=run, f=found: f.append(spread_sheet(s, r)))
        print(f"{name}: {len(sheet.rows)} readings with bands from {found[-1].spread.draws} draws "
              f"in {seconds:.2f} s")
    subprocess.run([sys.executable, __file__, "streamed"], check=True)


if __name__ == "__main__":
    if "streamed" in sys.argv:
        streamed(1_000_000)
    else:
        main(*map(int, sys.argv[1:]))
