"""Are the odds honest, and does the suggested next measurement save readings? Prints the answers.

    python tests/benchmarks/bench_causes.py [investigations, 2000 when not given] [part]

Parts: calibration, two (suspects), wrong, next, speed; all when not given. Each investigation is
drawn from its number, so that a run can be repeated.
"""

from __future__ import annotations

import sys
import time
from collections.abc import Callable, Iterable
from concurrent.futures import ProcessPoolExecutor
from dataclasses import dataclass
from functools import cache, partial
from pathlib import Path

import numpy as np

sys.path.insert(0, str(Path(__file__).parent))
from synthetic import KIT, SECOND, SUSPECT, Bench, Wrong, usual_kit

from unlanded.study.causes import explain, quantiles
from unlanded.study.finding import LEAKS, finding
from unlanded.study.hypotheses import CAUSES
from unlanded.study.next_reading import Candidate, next_readings, usual_candidates
from unlanded.study.readings import Pair

WRONGS = {
    "as the model believes": Wrong(),
    "every instrument 3 % high": Wrong(gain=1.03),
    "every instrument 3 % low": Wrong(gain=0.97),
    "capacitances 1.7 times those computed": Wrong(capacitance=1.7),
    "capacitances 0.5 times those computed": Wrong(capacitance=0.5),
    "one value misread": Wrong(misread=True),
}
ENOUGH, MOST = 0.95, 8
STABLE = 0.02


@dataclass
class Verdict:
    """One investigation: shares of the causes, the true one, and what was covered at 90 %."""

    shares: list[float]
    true: int
    coupling: bool
    size: bool | None
    error: float
    left_open: bool  # a leakage that the finding itself says the readings cannot exclude


@cache
def bench(wrong: Wrong | None = None) -> Bench:
    return Bench(wrong)


def judged(number: int, wrong: Wrong) -> Verdict:
    """Two to six readings, explained."""
    site = bench(_key(wrong)).site(number)
    readings = site.readings(usual_kit(np.random.default_rng([11, number])))
    found = explain(site.reduced, readings, stable=STABLE)
    odds = found.odds(SUSPECT)
    live, _, weight = found.capacitances(SUSPECT, site.cause)
    sizes, size_weight = found.sizes(SUSPECT, site.cause)
    sized = site.cause not in ("capacitive coupling", "solid connection", "none of these")
    return Verdict([odds[c] for c in CAUSES], CAUSES.index(site.cause),
                   _covers(live, weight, site.coupling),
                   _covers(sizes, size_weight, site.size) if sized else None, found.error,
                   site.cause in LEAKS and site.size >= finding(found, SUSPECT).leak_limit)


def judged_both(number: int) -> list[tuple[float, bool]]:
    """Two suspects, two to four readings on each: share of the likeliest cause, and if right."""
    site = two_suspects().site(number)
    digital, low, extra = KIT[0], KIT[1], KIT[number % len(KIT)]
    wanted = [Candidate(tool, Pair(f"{name}@far"))
              for name in site.reduced.suspects for tool in (digital, low, extra)[: 2 + number % 2]]
    found = explain(site.reduced, site.readings(wanted), stable=0.05)
    out = []
    for name, variant in site.variants.items():
        odds = found.odds(name)
        best = found.likeliest(name)
        out.append((odds[best], best == variant.cause))
    return out


@cache
def two_suspects() -> Bench:
    return Bench(suspects=(SUSPECT, SECOND))


def _key(wrong: Wrong) -> Wrong | None:
    return None if wrong == Wrong() else wrong




def _covers(values: np.ndarray, weights: np.ndarray, truth: float) -> bool:
    low, high = quantiles(values, weights, (0.05, 0.95))
    return bool(low <= truth <= high)


def readings_needed(number: int) -> tuple[int, int, bool, bool]:
    """Until one cause has 95 %, by the suggestion and by habit; and whether each was right."""
    out: list[tuple[int, bool]] = []
    for suggested in (True, False):
        site = bench().site(number)
        first = Candidate(KIT[0], Pair(f"{SUSPECT}@far"))
        readings = [site.reading(first)]
        while True:
            found = explain(site.reduced, readings, stable=0.05)
            odds = found.odds(SUSPECT)
            best = max(odds, key=odds.__getitem__)
            if odds[best] >= ENOUGH or len(readings) == MOST:
                break
            if suggested:
                candidates = usual_candidates(found, KIT)
                chosen = next_readings(found, candidates)[0].candidate
            else:
                end = "far" if len(readings) % 2 else "near"
                chosen = Candidate(KIT[1], Pair(f"{SUSPECT}@{end}"))
            readings.append(site.reading(chosen))
        count = len(readings) if odds[best] >= ENOUGH else MOST + 1
        out.append((count, best == site.cause))
    return out[0][0], out[1][0], out[0][1], out[1][1]


def spread(work: Callable[[int], object], count: int) -> list:
    with ProcessPoolExecutor(2) as pool:
        return list(pool.map(work, range(count), chunksize=20))


def report_calibration(verdicts: Iterable[Verdict], name: str) -> None:
    verdicts = list(verdicts)
    shares = np.array([v.shares for v in verdicts])
    true = np.array([v.true for v in verdicts])
    best = shares.argmax(axis=1)
    top, right = shares.max(axis=1), best == true
    print(f"\n{name}: {len(verdicts)} investigations")
    print(f"  likeliest cause right {right.mean():.1%}, stated on average {top.mean():.1%}")
    print(f"  expected calibration error of the likeliest cause, 10 bins: {_ece(top, right):.4f}; "
          f"of all statements: {_ece(shares.ravel(), (np.eye(len(CAUSES))[true] > 0).ravel()):.4f}")
    every, held = shares.ravel(), (np.eye(len(CAUSES))[true] > 0).ravel()
    about = (every >= 0.85) & (every < 0.95)
    print(f"  stated 85 to 95 % (mean {every[about].mean():.1%}): right {held[about].mean():.1%} "
          f"of {about.sum()}")
    sure = top >= 0.9
    print(f"  90 % or more for a wrong cause: {(sure & ~right).sum()} of {len(verdicts)} "
          f"({(sure & ~right).mean():.2%}); of the {sure.sum()} such verdicts "
          f"{(~right[sure]).mean():.2%} are wrong, where they state {1 - top[sure].mean():.2%}")
    open_too = np.array([v.left_open for v in verdicts]) & (best == 0)
    print(f"  of these not left open by the finding's own words (capacitive coupling, but a "
          f"leakage above so many ohms not excluded): {(sure & ~right & ~open_too).sum()} of "
          f"{len(verdicts)} ({(sure & ~right & ~open_too).mean():.2%})")
    sizes = [v.size for v in verdicts if v.size is not None]
    print("  90 % ranges hold the coupling capacitance in "
          f"{np.mean([v.coupling for v in verdicts]):.1%}, the size of the cause in "
          f"{np.mean(sizes):.1%}")
    none = CAUSES.index("none of these")
    print(f"  share given to none of these, on average {shares[:, none].mean():.1%}; "
          f"median error of the odds by quadrature {np.median([v.error for v in verdicts]):.2%}")
    for k, cause in enumerate(CAUSES):
        mine = true == k
        if mine.any():
            print(f"    {cause:28s} {mine.sum():5d} true, likeliest in "
                  f"{(best[mine] == k).mean():.0%}, mean share {shares[mine, k].mean():.2f}")


def report_both(pairs: list[list[tuple[float, bool]]]) -> None:
    stated, right = (np.array(x) for x in zip(*(p for pair in pairs for p in pair), strict=True))
    print(f"\nTwo suspects together: {len(pairs)} investigations")
    print(f"  likeliest cause right {right.mean():.1%}, stated on average {stated.mean():.1%}; "
          f"expected calibration error {_ece(stated, right):.4f}")


def _ece(stated: np.ndarray, right: np.ndarray) -> float:
    bins = np.minimum((stated * 10).astype(int), 9)
    return float(sum(abs(stated[bins == b].mean() - right[bins == b].mean()) * (bins == b).mean()
                     for b in range(10) if (bins == b).any()))


def report_next(counts: list[tuple[int, int, bool, bool]]) -> None:
    suggested, habit, right, habit_right = (np.array(c) for c in zip(*counts, strict=True))
    print(f"\nReadings needed until one cause has {ENOUGH:.0%}, of {len(counts)} investigations "
          f"(at most {MOST}; the first is a digital meter to earth)")
    for name, needed, ok in (("suggested", suggested, right), ("habit", habit, habit_right)):
        reached = needed <= MOST
        print(f"  {name:10s} reached in {reached.mean():.1%}; mean {needed.mean():.2f} counting "
              f"{MOST + 1} where not; right when reached {ok[reached].mean():.1%}")
    print(f"  fewer by suggestion in {(suggested < habit).mean():.1%}, more in "
          f"{(suggested > habit).mean():.1%}; mean saving {(habit - suggested).mean():.2f}")


def report_speed() -> None:
    site = Bench().site(3)
    candidates = [Candidate(KIT[k % 6], Pair(f"{SUSPECT}@{end}"))
                  for k, end in enumerate(("far", "far", "near", "far", "far", "near"))]
    readings = site.readings(candidates)
    explain(site.reduced, readings)
    start = time.process_time()
    found = explain(site.reduced, readings)
    print(f"\n6 readings on one conductor explained in {time.process_time() - start:.3f} s of "
          f"processor time, {found.points} points")
    many = (usual_candidates(found, KIT) * 2)[:40]
    start = time.process_time()
    next_readings(found, many, non_operating=15e-3)
    print(f"{len(many)} candidates ranked in {time.process_time() - start:.3f} s")


def main() -> None:
    count = int(sys.argv[1]) if len(sys.argv) > 1 else 2000
    part = sys.argv[2] if len(sys.argv) > 2 else "all"
    if part in ("speed", "all"):
        report_speed()
    for name, wrong in WRONGS.items():
        if part in ("calibration" if wrong == Wrong() else "wrong", "all"):
            report_calibration(spread(partial(judged, wrong=wrong), count), name)
    if part in ("two", "all"):
        report_both(spread(judged_both, count // 5))
    if part in ("next", "all"):
        report_next(spread(readings_needed, count))


if __name__ == "__main__":
    main()
