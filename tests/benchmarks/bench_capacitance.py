"""How fast the capacitance matrix is, side by side with what else could find it.

Run as `python tests/benchmarks/bench_capacitance.py`: a table, and whether each target is met.
Every time is the processor's, the best of several, those to be compared taken in turn, on one
thread of BLAS: on a busy machine the clock on the wall favours whatever is short enough not to be
interrupted. Imports alone are timed by the clock on the wall.

The kit checks that it keeps its tolerance in every element. The peer that is compared does the
same: finite elements on edges halved until every element stands within 0.5 % of the mesh before.
Beside it, without a target: what the first mesh takes alone, and its error in its worst element.
"""

from __future__ import annotations

import math
import os
import subprocess
import sys
import time
from collections.abc import Callable
from pathlib import Path

os.environ["OPENBLAS_NUM_THREADS"] = os.environ["OMP_NUM_THREADS"] = "1"
sys.path.insert(0, str(Path(__file__).parents[1]))

import numpy as np
from numpy.typing import NDArray
from scipy.linalg.lapack import dgesv

from finite_elements import capacitance_by_finite_elements
from unlanded.physics.capacitance import (
    FLOOR,
    TOLERANCE,
    capacitance_matrices,
    capacitance_matrix,
    solve,
)
from unlanded.physics.layouts import Core, control, flat_twin, laid_up, screen_radius, singles
from unlanded.physics.multipole import Geometry
from unlanded.physics.packing import packed, packed_positions
from unlanded.physics.section import Conductor, Pipe, Plane, Section

CORES = {"PVC": Core(0.69e-3, 1.45e-3, 5.0), "XLPE": Core(0.90e-3, 1.60e-3, 2.3)}
SINGLE = Core(1.12e-3, 1.90e-3, 4.0)
FILL = 0.4  # of the conduit
BATCH = 1000
ACCURACY = 5e-3
Real = NDArray[np.float64]


def main() -> None:
    sections = built_sections()
    print(f"{'section':28}{'size':>6}{'ms':>9}{'finite elements':>17}{'unchecked':>11}"
          f"{'error':>8}{'LAPACK':>9}")
    peers, bare, unchecked = [], [], []
    for name, section in sections.items():
        size, own, lapack = single(section)
        peer, first, error = checked_peer(section)
        peers.append(peer / own)
        unchecked.append(first / own)
        if len(section.conductors) >= 7:
            bare.append(own / lapack)
        print(f"{name:28}{size:6d}{own * 1e3:9.2f}{peer / own:16.1f}×{first / own:10.1f}×"
              f"{error:8.2%}{own / lapack:8.2f}×")
    print()
    verdict("finite elements at 0.5 %, median", float(np.median(peers)), least=150)
    verdict("finite elements at 0.5 %, worst", min(peers), least=10)
    print(f"finite elements that do not check themselves, median: {np.median(unchecked):.1f}")
    verdict("one section over LAPACK, median from 7 conductors", float(np.median(bare)), most=3)
    for name, geometry in batches().items():
        own, loop, stacked = batch(geometry)
        print(f"{name}: {own / BATCH * 1e3:.3f} ms each")
        verdict("    over a loop of dgesv", own / loop, most=2)
        verdict("    over numpy.linalg.solve, stacked", own / stacked, most=2)
    verdict("import unlanded over import numpy", import_time("unlanded") / import_time("numpy"),
            most=1.5)


def verdict(what: str, ratio: float, *, least: float = 0.0, most: float = math.inf) -> None:
    bound = f"at least {least:g}" if least else f"at most {most:g}"
    print(f"{what}: {ratio:.2f} ({bound}: {'met' if least <= ratio <= most else 'NOT MET'})")


def in_turn(*calls: Callable[[], object], rounds: int) -> list[float]:
    """Best time [s] of each call, the calls taken in turn."""
    best = [math.inf] * len(calls)
    for _ in range(rounds):
        for k, call in enumerate(calls):
            start = time.process_time()
            call()
            best[k] = min(best[k], time.process_time() - start)
    return best


def single(section: Section) -> tuple[int, float, float]:
    """Size of the system; times [s] of the kit and of a bare solution of that size."""
    n = len(section.conductors)
    size = system_size(Geometry.of([section]))
    matrix, right = some_systems(1, size, n)
    own, lapack = in_turn(
        lambda: capacitance_matrix(section), lambda: dgesv(matrix[0], right[0]), rounds=9
    )
    return size, own, lapack


def checked_peer(section: Section) -> tuple[float, float, float]:
    """Time [s] of finite elements until they stand to 0.5 %, of their first mesh, its error.

    The error of quadratic elements falls as the fourth power of the edge, so an accuracy of a
    sixteenth asks for edges of half the length.
    """
    accuracy, first, change = ACCURACY, 0.0, math.inf
    start = time.process_time()
    found = begun = capacitance_by_finite_elements(section, accuracy=accuracy)
    first = time.process_time() - start
    while change > ACCURACY:
        accuracy /= 16
        finer = capacitance_by_finite_elements(section, accuracy=accuracy)
        found, change = finer, worst(found, finer)
    whole = time.process_time() - start
    return whole, first, worst(begun, capacitance_matrix(section, 1e-5))


def worst(found: Real, exact: Real) -> float:
    """Largest error of an element, those below the kit's floor counted as that."""
    own = np.sqrt(np.diagonal(exact))
    size = np.maximum(np.abs(exact), FLOOR * np.outer(own, own))
    return float(np.max(np.abs(found - exact) / size))


def batch(geometry: Geometry) -> tuple[float, float, float]:
    """Times [s] of the kit, of dgesv one by one, and of numpy's stacked solution.

    Each geometry counts with the size at which it is accepted when it is alone.
    """
    count, n = geometry.metal.shape
    alone = [system_size(geometry.take(slice(k, k + 1))) for k in range(count)]
    sizes, counts = np.unique(alone, return_counts=True)
    systems = [some_systems(int(c), int(m), n) for m, c in zip(sizes, counts, strict=True)]

    def one_by_one() -> None:
        for matrices, rights in systems:
            for matrix, right in zip(matrices, rights, strict=True):
                dgesv(matrix, right)

    own, loop, stacked = in_turn(
        lambda: capacitance_matrices(geometry),
        one_by_one,
        lambda: [np.linalg.solve(matrices, rights) for matrices, rights in systems],
        rounds=5,
    )
    return own, loop, stacked


def system_size(geometry: Geometry) -> int:
    """Unknowns and charges of the system at which one geometry is accepted."""
    n = geometry.metal.shape[1]
    solved = solve(geometry, TOLERANCE, [str(k) for k in range(n)])
    return 2 * len(solved.order) + n


def some_systems(count: int, size: int, n: int) -> tuple[np.ndarray, np.ndarray]:
    rng = np.random.default_rng(0)
    matrices = rng.standard_normal((count, size, size)) + size * np.eye(size)
    # Symmetric, so that rows may pass for columns and dgesv need not turn them.
    return (matrices + matrices.swapaxes(1, 2)) / 2, rng.standard_normal((count, size, n))


def built_sections() -> dict[str, Section]:
    """One section of every layout, with each surround it is used with; invented sizes."""
    found = {}
    for kind, core in CORES.items():
        cords = {f"cord {n} {kind}": laid_up(named(n), core) for n in (2, 3, 4, 5)}
        cords |= {f"control {n} {kind}": control(named(n), core) for n in (7, 19)}
        for name, cores in cords.items():
            radius = screen_radius(cores)
            found[f"{name}, free"] = Section(cores)
            found[f"{name}, screen"] = Section(cores, Pipe(radius))
            found[f"{name}, plane"] = Section(above(cores, radius), Plane())
        flat = flat_twin(named(3), core, earth_radius=0.6e-3)
        found[f"flat twin {kind}, free"] = Section(flat)
        found[f"flat twin {kind}, plane"] = Section(above(flat, core.cover_radius), Plane())
    for spacing in (None, 10e-3):
        row = above(singles(named(4), [SINGLE] * 4, spacing=spacing), SINGLE.cover_radius)
        found[f"singles {'apart' if spacing else 'touching'}, plane"] = Section(row, Plane())
    for n in (3, 5, 7, 8, 9, 10, 11, 12):
        radius = conduit(n)
        cores = packed(named(n), [SINGLE] * n, pipe_radius=radius, seed=n)
        found[f"packed {n}, conduit"] = Section(cores, Pipe(radius))
    return found


def batches() -> dict[str, Geometry]:
    """A thousand sections of a kind, with permittivities drawn by lot."""
    rng = np.random.default_rng(1)
    places = packed_positions(
        np.full(5, SINGLE.cover_radius), pipe_radius=conduit(5), count=BATCH, seed=1
    )
    centres = places[..., 0] + 1j * places[..., 1]
    cord = laid_up(named(4), CORES["PVC"])
    centre = np.tile([complex(c.x, c.y) for c in cord], (BATCH, 1))
    return {
        "5 singles in a conduit": of_one_core(centres, SINGLE, "pipe", conduit(5), rng),
        "4-core cord, free": of_one_core(centre, CORES["PVC"], "none", math.inf, rng),
        "4-core cord, screen": of_one_core(
            centre, CORES["PVC"], "pipe", screen_radius(cord), rng
        ),
    }


def of_one_core(
    centre: np.ndarray, core: Core, wall: str, pipe_radius: float, rng: np.random.Generator
) -> Geometry:
    permittivity = rng.uniform(3.0, 6.0, (len(centre), 1))
    return Geometry(
        centre,
        np.full(centre.shape, core.radius),
        np.full(centre.shape, core.cover_radius),
        np.broadcast_to(permittivity, centre.shape),
        np.ones(len(centre)),
        wall,
        np.full(len(centre), pipe_radius),
    )


def named(n: int) -> list[str]:
    return [str(k + 1) for k in range(n)]


def above(cores: tuple[Conductor, ...], height: float) -> tuple[Conductor, ...]:
    """The cores raised by `height`, above the plane y = 0."""
    return Section(cores).moved(dy=height).conductors


def conduit(n: int) -> float:
    return SINGLE.cover_radius * math.sqrt(n / FILL)


def import_time(module: str) -> float:
    """Best time [s] of an import in a fresh process."""
    code = f"import time; t = time.perf_counter(); import {module}; print(time.perf_counter() - t)"
    run = [sys.executable, "-c", code]
    return min(float(subprocess.check_output(run, text=True)) for _ in range(9))


if __name__ == "__main__":
    main()
