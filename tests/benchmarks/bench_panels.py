"""Kernel time from a step of a handle to the new data in its figure, and all notebooks headless.

Run with `python tests/benchmarks/bench_panels.py`. Each panel is on its demo case; the peer in the
same run is the same step of a bare handle with nothing behind it. What a panel does when a handle
has come to rest (bands over all that is not known, odds) is beside the loop, and not in these
times. Targets: 30 ms at the 95th percentile of each, and the notebooks under 60 s on two cores.

The time is that of the processor, so that a busy machine tells less of a lie; waiting is not in it.
"""

from __future__ import annotations

import asyncio
import os
import shutil
import tempfile
import time
import warnings
from pathlib import Path

import numpy as np

STEPS = 60
NOTEBOOKS = 60.0  # seconds


async def steps(box: object) -> list[float]:
    """Processor time of each step of a handle [s]."""
    slider = box.slider  # type: ignore[attr-defined]
    first, times = slider.max // 3, []
    for number in range(STEPS):
        begun = time.process_time()
        slider.value = first + number % (slider.max // 2)
        times.append(time.process_time() - begun)
        await asyncio.sleep(0)
    assert not box.message.value  # type: ignore[attr-defined]
    return times


async def panels() -> None:
    """Print the time of a step of each handle of each panel."""
    from unlanded.panels.causes import CausesPanel
    from unlanded.panels.margin import MarginPanel
    from unlanded.panels.operation import OperationPanel
    from unlanded.panels.quantity_box import QuantityBox
    from unlanded.panels.readings import ReadingPanel
    from unlanded.panels.run import RunPanel
    from unlanded.panels.run_model import LENGTH

    bare = QuantityBox(LENGTH, 85.0, lambda _: None)
    tell("bare handle", await steps(bare))
    quay, mill, house, pump = (f"sites/{name}.toml" for name in (
        "tern-quay", "alder-mill", "heron-house", "larkmoor"))
    for kind, site, handles in (
            (RunPanel, quay, ("run_length",)), (RunPanel, mill, ("run_length", "spacing")),
            (ReadingPanel, quay, ("run_length", "impedance")), (CausesPanel, quay, ("size",)),
            (MarginPanel, house, ("run_length", "pieces")),
            (OperationPanel, pump, ("run_length", "resistor"))):
        panel = kind(site)
        if isinstance(panel, CausesPanel):
            panel.pages.selected_index = 3
        for handle in handles:
            tell(f"{kind.__name__}, {handle}, {Path(site).stem}",
                 await steps(getattr(panel, handle)))


def tell(what: str, times: list[float]) -> None:
    """Print the median and the 95th percentile."""
    middle, late = np.percentile(times, (50, 95)) * 1e3
    print(f"{what}: median {middle:.1f} ms, 95 % within {late:.1f} ms (target 30 ms)")


def notebooks() -> None:
    """Print the time that all notebooks take headless."""
    from unlanded.panels.notebooks import compare, each, notebooks_in

    begun = time.perf_counter()
    moved = [m for made in each(compare, notebooks_in(Path.cwd())) for m in made]
    print(f"all notebooks on {os.cpu_count()} cores: {time.perf_counter() - begun:.0f} s, "
          f"{len(moved)} lines moved (target {NOTEBOOKS:.0f} s)")


def main() -> None:
    """Both, in a copy of the workbook."""
    from unlanded.panels.notebooks import workbook_folder

    warnings.simplefilter("ignore", DeprecationWarning)
    with tempfile.TemporaryDirectory() as folder:
        os.chdir(shutil.copytree(workbook_folder(), Path(folder) / "workbook"))
        asyncio.run(panels())
        notebooks()
        os.chdir(folder)


if __name__ == "__main__":
    main()
