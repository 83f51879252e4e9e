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
from itertools import pairwise
from pathlib import Path

import numpy as np

sys.path.insert(0, str(Path(__file__).parent))
from synthetic import KIT, SECOND, SUSPECT, Bench, Site, Wrong, usual_kit

from unlanded.study.causes import Explanation, explain, quantiles
from unlanded.study.claim import Claim, claim
from unlanded.study.hypotheses import CAUSES
from unlanded.study.next_reading import Candidate, next_readings, usual_candidates
from unlanded.study.readings import Pair

WRONGS = {
    "as the model believes": Wrong(),
    "every instrument 3 % high": Wrong(gain=1.03),
    "every instrument 3 % low": Wrong(gain=0.97),
    "capacitances 1.7 times those computed": Wrong(capacitance=1.7),
    "capacitances 0.5 times those computed": Wrong(capacitance=0.5),
    "covers' permittivity 1.5 times the top of its range": Wrong(permittivity=1.5),
    "one value misread": Wrong(misread=True),
}
ENOUGH, MOST = 0.95, 8
STABLE = 0.02


@dataclass
class Verdict:
    """On one suspect: shares of the causes, the true one, and what was covered at 90 %.

    `claim` is what the finding says, and `holds` whether that is so.
    """

    shares: list[float]
    true: int
    coupling: bool
    size: bool | None
    error: float
    claim: Claim
    holds: bool


@cache
def bench(wrong: Wrong | None = None) -> Bench:
    return Bench(wrong)


def judged(number: int, wrong: Wrong) -> list[Verdict]:
    """Two to six readings, explained."""
    site = bench(_key(wrong)).site(number)
    readings = site.readings(usual_kit(np.random.default_rng([11, number])))
    return [_verdict(explain(site.reduced, readings, stable=STABLE), site, SUSPECT)]


def judged_both(number: int) -> list[Verdict]:
    """Two suspects, two or three readings on each."""
    site = two_suspects().site(number)
    digital, low, extra = KIT[0], KIT[1], KIT[number % len(KIT)]
    wanted = [Candidate(tool, Pair(f"{name}@far"))
              for name in site.reduced.suspects for tool in (digital, low, extra)[: 2 + number % 2]]
    found = explain(site.reduced, site.readings(wanted), stable=0.05)
    return [_verdict(found, site, name) for name in site.variants]


def _verdict(found: Explanation, site: Site, suspect: str) -> Verdict:
    odds, true = found.odds(suspect), site.variants[suspect].cause
    live, _, weight = found.capacitances(suspect, true)
    sizes, size_weight = found.sizes(suspect, true)
    sized = true not in ("capacitive coupling", "solid connection", "none of these")
    said = claim(found, suspect)
    return Verdict([odds[c] for c in CAUSES], CAUSES.index(true),
                   _covers(live, weight, site.coupling[suspect]),
                   _covers(sizes, size_weight, site.size[suspect]) if sized else None,
                   found.error, said, said.holds(true, site.size[suspect]))


@cache
def two_suspects() -> Bench:
    return Bench(suspects=(SUSPECT, SECOND))


def _key(wrong: Wrong) -> Wrong | None:
    return None if wrong == Wrong() else wrong


def _covers(values: np.ndarray, weights: np.ndarray, truth: float) -> bool:
    if not len(values):
        return False
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
        out.append((count, best == site.variants[SUSPECT].cause))
    return out[0][0], out[1][0], out[0][1], out[1][1]


def spread(work: Callable[[int], object], count: int) -> list:
    with ProcessPoolExecutor(2) as pool:
        return list(pool.map(work, range(count), chunksize=20))


def report_calibration(made: Iterable[list[Verdict]], name: str) -> None:
    verdicts = [v for several in made for v in several]
    shares = np.array([v.shares for v in verdicts])
    true = np.array([v.true for v in verdicts])
    best = shares.argmax(axis=1)
    top, right = shares.max(axis=1), best == true
    print(f"\n{name}: {len(verdicts)} conductors")
    print(f"  likeliest cause right {right.mean():.1%}, stated on average {top.mean():.1%}")
    every, held = shares.ravel(), (np.eye(len(CAUSES))[true] > 0).ravel()
    print(f"  expected calibration error of the likeliest cause, 10 bins: {_ece(top, right)}; "
          f"of all statements: {_ece(every, held)}")
    about = (every >= 0.85) & (every < 0.95)
    print(f"  stated 85 to 95 % (mean {every[about].mean():.1%}): right {held[about].mean():.1%} "
          f"of {about.sum()}")
    sure = top >= 0.9
    print(f"  bare odds of 90 % or more {sure.mean():.1%} of the time, for a wrong cause "
          f"{(sure & ~right).mean():.2%}; they state {(1 - top)[sure].sum() / len(top):.2%}")
    _report_claims(verdicts)
    sizes = [v.size for v in verdicts if v.size is not None]
    covered = np.array([v.coupling for v in verdicts])
    print(f"  90 % ranges hold the coupling capacitance in {covered.mean():.1%} "
          f"({covered[true == 0].mean():.1%} where it is the cause), the size of the cause in "
          f"{np.mean(sizes):.1%}")
    none = CAUSES.index("none of these")
    error = np.array([v.error for v in verdicts])
    print(f"  share given to none of these, on average {shares[:, none].mean():.1%}; error of the "
          f"odds by quadrature, median {np.median(error):.2%}, over 5 % in "
          f"{(error > 0.05).mean():.1%}")
    for k, cause in enumerate(CAUSES):
        mine = true == k
        if mine.any():
            print(f"    {cause:28s} {mine.sum():5d} true, likeliest in "
                  f"{(best[mine] == k).mean():.0%}, mean share {shares[mine, k].mean():.2f}")


def _report_claims(verdicts: list[Verdict]) -> None:
    """Findings as worded: how often sure, how often wrong, and what they state."""
    count = np.array([len(v.claim.causes) for v in verdicts])
    resting = np.array([bool(v.claim.rests_on) for v in verdicts])
    stated, holds = (np.array(x) for x in zip(*((v.claim.share, v.holds) for v in verdicts),
                                              strict=True))
    none = np.array([v.claim.causes[0] == "none of these" for v in verdicts])
    print("  findings as worded (stated: what their own shares leave):")
    for what, mine in (
        ("name one cause, on more than one reading", (count == 1) & ~resting),
        ("name one cause, one reading carries it", (count == 1) & resting),
        ("leave two open, on more than one reading", (count == 2) & ~resting),
        ("leave two open, one reading carries it", (count == 2) & resting),
        ("leave more open", count > 2),
    ):
        print(f"    {what:42s} {mine.mean():6.1%}; wrong {(mine & ~holds).sum():3d} "
              f"({(mine & ~holds).mean():.2%}, of these none of these "
              f"{(mine & ~holds & none).sum()}), stated {(1 - stated)[mine].sum() / len(mine):.2%}")
    edges = (0.95, 0.97, 0.985, 0.995, 1.001)
    print("    right by the share that is stated: " + ", ".join(
        f"{stated[m].mean():.1%} stated {holds[m].mean():.1%} right of {m.sum()}"
        for low, high in pairwise(edges) if (m := (stated >= low) & (stated < high)).any()))


def _ece(stated: np.ndarray, right: np.ndarray) -> str:
    """Expected calibration error, and what it would be by chance if all shares were honest."""
    bins = np.minimum((stated * 10).astype(int), 9)
    error = chance = 0.0
    for b in np.unique(bins):
        mine = bins == b
        error += abs(stated[mine].mean() - right[mine].mean()) * mine.mean()
        scatter = (stated[mine] * (1 - stated[mine])).sum() ** 0.5 / mine.sum()
        chance += scatter * (2 / np.pi) ** 0.5 * mine.mean()
    return f"{error:.4f} (by chance {chance:.4f})"


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
        report_calibration(spread(judged_both, count), "two suspects together")
    if part in ("next", "all"):
        report_next(spread(readings_needed, count))


if __name__ == "__main__":
    main()
