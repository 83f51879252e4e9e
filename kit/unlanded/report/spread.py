"""How sure the numbers of the memo are, and which input to pin down first."""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping
from functools import lru_cache
from typing import Any

from ..study.banded import reading_sensitivity
from ..study.readings import SheetRow
from ..study.spread import Sensitivity, limits
from ..units import show
from .expected import main_line
from .investigation import Investigation
from .memo import Block, Paragraph, Part
from .spread_figures import distribution_figure, sensitivity_figure
from .tables import Column, Table
from .words import capital, percent, tool_words

WORTH_NAMING = 0.05  # share of the variance
NEARLY_ALL = 0.98  # share of the variance from which its estimate tells no more
AT_RANDOM = "how the singles lie"  # the input that nobody can pin down
TOGETHER = 0.1  # difference of total and first order from which inputs act together


def spread_finding(investigation: Investigation) -> list[Block]:
    """Which input to pin down first."""
    row = main_row(investigation)
    if row is None:
        return []
    ranked = _sensitivity(investigation, row).ranked()
    if not ranked or ranked[0][2] < WORTH_NAMING:
        return []
    name, _, total = ranked[0]
    what = f"what the {tool_words(row.instrument.name)} shows"
    share = "nearly all" if total > NEARLY_ALL else percent(total)
    if name == AT_RANDOM:
        return [Paragraph(f"{capital(name)} decides {what}: {share} of its variance comes from "
                          "it.")]
    return [Paragraph(f"The input to pin down first is the {tool_words(name)}: {share} of the "
                      f"variance of {what} comes from it.")]


def spread_part(investigation: Investigation) -> Part | None:
    """What was taken as not known, what it does to the main reading, and what matters most."""
    spread = investigation.spread
    row = main_row(investigation)
    blocks: list[Block] = [Paragraph(_how(investigation)), _inputs(investigation)]
    if row is not None:
        found = _sensitivity(investigation, row)
        k = investigation.sheet.rows.index(row)
        what = f"the reading of the {tool_words(row.instrument.name)}"
        ends = float(spread.spread.low[k]), float(spread.spread.high[k])
        if ends[0] < ends[1]:
            blocks += [
                distribution_figure(spread.spread.sample[:, k], ends, abs(row.voltage), what=what,
                                    unit="V", coverage=spread.spread.coverage),
                sensitivity_figure(found, what), Paragraph(_advice(found, what))]
    return Part("How sure the numbers are", tuple(blocks))


def spread_results(investigation: Investigation) -> Mapping[str, Any]:
    """The spread for results.json."""
    spread = investigation.spread.spread
    row = main_row(investigation)
    shares = [] if row is None else _sensitivity(investigation, row).ranked()
    return {
        "coverage": spread.coverage, "draws": spread.draws, "stable": spread.stable,
        "inputs": [{"name": i.name, "limits": limits(i.distribution)}
                   for i in investigation.uncertain.inputs],
        "residual_A": [float(spread.low[-1]), float(spread.high[-1])],
        "sensitivity": [{"input": n, "first_order": f, "total": t} for n, f, t in shares],
    }


def main_row(investigation: Investigation) -> SheetRow | None:
    """The reading that the spread is told of: of the main line, on its meter of most impedance."""
    line = main_line(investigation)
    if line is None:
        return None
    meters = [r for r in line.rows if r.pair == line.first.pair
              and r.instrument.kind in ("digital", "analogue")]
    return max(meters, key=lambda r: abs(r.voltage), default=None)


@lru_cache(maxsize=8)
def _sensitivity(investigation: Investigation, row: SheetRow) -> Sensitivity:
    return reading_sensitivity(row, investigation.uncertain, points=POINTS)


POINTS = 128


def _how(investigation: Investigation) -> str:
    spread = investigation.spread.spread
    width = spread.high - spread.low
    errors = sorted(e / w for e, w in zip(spread.error, width, strict=True) if w > 0) or [0.0]
    low, high = float(spread.low[-1]), float(spread.high[-1])
    return (f"What is not known exactly was drawn {spread.draws} times, together with each "
            "instrument's own impedance within its tolerance and its error within its accuracy, "
            "and the run solved for each draw. A range in this memo holds "
            f"{percent(spread.coverage)} of the draws; its ends are known to "
            f"{percent(errors[int(0.9 * (len(errors) - 1))])} of its width or better for nine "
            f"ranges of ten, to {percent(errors[-1])} at the worst. Covers of the same insulation "
            "have the same permittivity in every draw. The run's own residual current lies in "
            f"{show(low, 'A')} to {show(high, 'A')}.")


def _inputs(investigation: Investigation) -> Table:
    rows = tuple(_rows(investigation))
    return Table("inputs", "What is not known exactly, with the limits it was drawn between.",
                 (Column("Input"), Column("From", "", "right"), Column("To", "", "right")),
                 rows or (("nothing but the instruments' tolerance and accuracy", "–", "–"),),
                 "All other inputs are taken as stated.")


def _rows(investigation: Investigation) -> Iterator[tuple[str, str, str]]:
    volts = investigation.run.supply.voltage
    for i in investigation.uncertain.inputs:
        low, high = limits(i.distribution)
        unit, size = _unit(i.name, volts)
        if i.name == AT_RANDOM:
            yield i.name, "at random", ""
        elif unit == "%":
            yield i.name, _percent(low), _percent(high)
        else:
            yield i.name, show(low * size, unit), show(high * size, unit)


def _percent(share: float) -> str:
    return f"{100 * (share - 1):+.3g} %".replace("-", "−")


def _unit(name: str, volts: float) -> tuple[str, float]:
    """Unit in which an input is shown, and what a value of 1 is in it."""
    if name.startswith("permittivity"):
        return "", 1.0
    if name.startswith("capacitance"):
        return "F/m", 1.0
    if name == "supply voltage":
        return "V", volts
    return ("%", 1.0) if name.startswith("impedance") else ("m", 1.0)


def _advice(found: Sensitivity, what: str) -> str:
    first, *rest = (r for r in found.ranked() if r[2] >= WORTH_NAMING)
    if first[0] == AT_RANDOM:
        words = [f"{capital(first[0])} decides {what} most, and nobody can tell it: count on the "
                 "whole range."]
    else:
        left = math.sqrt(max(0.0, 1 - first[1]))
        words = [f"Pin down the {tool_words(first[0])} first: known exactly, it would leave "
                 f"{percent(left)} of the standard deviation of {what}."]
    if rest:
        named = rest[0][0]
        words.append(f"Next comes {'' if named == AT_RANDOM else 'the '}{tool_words(named)}.")
    if first[2] - first[1] > TOGETHER:
        words.append("It acts together with others, so knowing it alone helps less than its total "
                     "share says.")
    return " ".join(words)
