"""Time of a full reading sheet, and of the demo memo as a whole process.

Run with `python tests/benchmarks/bench_sheet.py`. The sheet is that of the Larkmoor run, seven
cores on a tray, with eight instruments, and its bands; peers in the same run are bare solves of it
and a process that only imports numpy. Targets: the sheet under 20 ms, the memo under 6 s.
"""

from __future__ import annotations

import subprocess
import sys
import tempfile
import time
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

from unlanded.case.build import build_run
from unlanded.case.loading import load_case
from unlanded.reference.instruments import INSTRUMENTS
from unlanded.study.readings import reading_sheet

SITES = Path(__file__).resolve().parents[2] / "workbook" / "sites"
TOOLS = ("digital-10M", "bench-1M", "low-impedance", "moving-coil", "coil-tester", "two-pole",
         "proximity", "body")


def best(work: Callable[[], object], times: int) -> float:
    """Shortest of several runs [s]."""
    found = []
    for _ in range(times):
        start = time.perf_counter()
        work()
        found.append(time.perf_counter() - start)
    return min(found)


def main() -> None:
    """Print the times and their ratios to the peers."""
    case = load_case(SITES / "larkmoor.toml")
    runs = [build_run(case, limit) for limit in ("likely", "low", "high")]
    matrices = [run.matrix for run in runs]
    tools = [INSTRUMENTS[key] for key in TOOLS]

    def fresh() -> list[object]:
        return [replace(run, capacitance=c) for run, c in zip(runs, matrices, strict=True)]

    def sheet() -> object:
        run, low, high = fresh()
        return reading_sheet(run, tools, low=low, high=high)  # type: ignore[arg-type]

    made = sheet()
    whole = best(sheet, 20)
    solve = best(lambda: [run.residual for run in fresh()], 20)  # type: ignore[attr-defined]
    print(f"sheet of {len(made.rows)} readings: {1e3 * whole:.1f} ms, of which the three solves "
          f"{1e3 * solve:.1f} ms ({whole / solve:.1f} times them); target 20 ms")

    with tempfile.TemporaryDirectory() as folder:
        command = [sys.executable, "-m", "unlanded.cli", "memo", str(SITES / "tern-quay.toml"),
                   "--into", f"{folder}/memo", "--overwrite"]
        memo = best(lambda: subprocess.run(command, check=True, capture_output=True), 3)
    bare = best(lambda: subprocess.run([sys.executable, "-c", "import numpy"], check=True), 3)
    print(f"memo of Tern Quay, whole process: {memo:.2f} s, {memo / bare:.0f} times a process that "
          f"imports numpy ({bare:.2f} s); target 6 s")


if __name__ == "__main__":
    main()
