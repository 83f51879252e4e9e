"""The memo of a case: which parts it has, in which order, and what results.json holds.

To add a part, write `<subject>_part(investigation) -> Part | None` in a module of its own and put
it into `PARTS`; None leaves it out where the case does not ask for it. What the summary says of
it is a function in `FINDINGS`; what results.json holds of it is one in `RESULTS`.
"""

from __future__ import annotations

import datetime
from collections.abc import Callable, Mapping, Sequence
from pathlib import Path
from typing import Any

from ..case.memo import Chapter
from .added import added_part
from .assumptions import assumptions_part
from .causes import causes_finding, causes_part, causes_results
from .circuit import capacitance_table, circuit_finding, circuit_part, run_results
from .expected import annex_part, expected_finding, expected_part, sheet_results
from .folder import Contents
from .harmonics import harmonics_part, harmonics_results
from .investigation import Investigation, investigate
from .margin import margin_finding, margin_part, margin_results
from .memo import Block, Caution, Memo, Paragraph, Part, Verbatim
from .operation import operation_finding, operation_part, operation_results
from .sheet_table import sheet_table
from .sizing import sizing_part, sizing_results
from .sources import sources_part
from .spread import spread_finding, spread_part, spread_results
from .touch import touch_finding, touch_part, touch_results

__all__ = ["FINDINGS", "PARTS", "RESULTS", "Investigation", "case_contents", "investigate"]

CAUTION = (
    "This is a calculation from a description of the circuit. It never proves a conductor dead, "
    "and no reading in it does.",
    "Prove dead at the point of work, with an instrument made for it that is proved on a known "
    "source before and after. A non-contact detector is not enough.",
    "A low reading on a low-impedance instrument can also come from a weak but real source. A "
    "capacitive source can still give a shock; the current it can drive is in this memo.",
    "Local codes and licensed practice govern. Tests on energised equipment are for qualified "
    "persons only.",
    "A reading outside the ranges given here means that the circuit is not as described. Find "
    "out why before going on.",
)


def summary_part(investigation: Investigation) -> Part:
    """What was found, with the numbers: the blocks of `FINDINGS`, what the case asks for first."""
    asked: list[Callable[[Investigation], Sequence[Block]]] = [circuit_finding, operation_finding]
    if investigation.case.content.standing:  # the case is about the device, then, not a reading
        asked.append(margin_finding)
    order = [*asked, *(f for f in FINDINGS if f not in asked)]
    return Part("Summary", tuple(b for finding in order for b in finding(investigation)))


def caution_part(_: Investigation) -> Part:
    """The caution that stands in every memo."""
    return Part("Caution", (Caution("Before anybody relies on this", CAUTION),))


def case_part(investigation: Investigation) -> Part:
    """The case as it was read, and how every number is rebuilt from it."""
    case = investigation.case
    return Part("The case", (
        Paragraph("The case file as it was read. Its fingerprint is the SHA-256 of its text, with "
                  f"plain line ends: {case.fingerprint}"),
        Verbatim(case.text),
        Paragraph("This command rebuilds every number, table and picture here from that file:"),
        Verbatim(f"unlanded memo {case.name}"),
    ))


FINDINGS: tuple[Callable[[Investigation], Sequence[Block]], ...] = (
    circuit_finding,
    expected_finding,
    causes_finding,
    margin_finding,
    operation_finding,
    touch_finding,
    spread_finding,
)
"""What the summary says of each subject; nothing where the case does not ask."""

PARTS: tuple[Callable[[Investigation], Part | None], ...] = (
    summary_part,
    circuit_part,
    caution_part,
    expected_part,
    causes_part,
    margin_part,
    operation_part,
    touch_part,
    harmonics_part,
    sizing_part,
    spread_part,
    added_part,
    assumptions_part,
    sources_part,
    annex_part,
    case_part,
)
"""The parts of the memo, in its order."""

LEFT_OUT: Mapping[Chapter, Callable[[Investigation], Part | None]] = {
    "expected": expected_part,
    "causes": causes_part,
    "margin": margin_part,
    "operation": operation_part,
    "annex": annex_part,
}
"""The parts that a case may leave out. The summary still says what was found of each."""

RESULTS: Mapping[str, Callable[[Investigation], Any]] = {
    "case": lambda i: {"title": i.case.content.title, "fingerprint": i.case.fingerprint},
    "run": run_results,
    "sheet": sheet_results,
    "causes": causes_results,
    "margin": margin_results,
    "operation": operation_results,
    "touch": touch_results,
    "harmonics": harmonics_results,
    "sizing": sizing_results,
    "spread": spread_results,
}
"""What results.json holds, by its key; None where the case does not ask."""


def case_contents(
    investigation: Investigation,
    *,
    date: datetime.date,
    template: Path | None = None,
    paper: str | None = None,
    prepared_by: str = "",
    checked_by: str = "",
) -> Contents:
    """What the memo's folder is made from.

    Parameters
    ----------
    date : that the memo bears; the same case and date give the same files
    template : a firm's own .docx
    paper : "a4" or "us-letter"; that of the case's units when None
    prepared_by, checked_by : names for the title block; those of the case when empty
    """
    case, chosen = investigation.case, investigation.case.content.memo
    left_out = [LEFT_OUT[chapter] for chapter in chosen.leave_out if chapter in LEFT_OUT]
    memo = Memo(
        title=case.content.title,
        site=case.content.site,
        case_file=case.name,
        fingerprint=case.fingerprint,
        date=date,
        parts=tuple(p for make in PARTS
                    if make not in left_out and (p := make(investigation)) is not None),
        prepared_by=prepared_by or chosen.prepared_by,
        checked_by=checked_by or chosen.checked_by,
        language="en-US" if investigation.customary else "en-GB",
    )
    results = {key: made for key, make in RESULTS.items()
               if (made := make(investigation)) is not None}
    usual = "us-letter" if investigation.customary else "a4"
    extra = (sheet_table(investigation.sheet), capacitance_table(investigation))
    return Contents(memo, case.text.encode(), results, template, paper or usual,
                    tuple(t for t in extra if t.key not in {x.key for x in memo.tables}))
