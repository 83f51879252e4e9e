"""From a case to the margin of its residual-current device, and to its log."""

from __future__ import annotations

from pathlib import Path

from ..errors import Refused
from ..study.history import History, history
from ..study.residual import Margin, residual_margin
from ..study.run import Run
from ..study.standing import Leak, run_leak
from .loading import Case
from .logs import Intake, read_log

THE_RUN = "this run"


def case_leaks(case: Case, run: Run, low: Run, high: Run) -> tuple[Leak, ...]:
    """The run itself, then what `[[standing]]` lists."""
    others = (entry.leak(run) for entry in case.content.standing)
    return (run_leak(THE_RUN, run, low, high), *others)


def case_margin(case: Case, run: Run, low: Run, high: Run) -> Margin:
    """The margin of the case's device; refused where it has none."""
    if case.content.device is None:
        raise Refused(case.name, "has no residual-current device", hint='for example [device] '
                      'with rated = "30 mA"')
    return residual_margin(case.content.device.device(), case_leaks(case, run, low, high),
                           run.supply)


def case_history(case: Case, margin: Margin) -> tuple[History, Intake] | None:
    """What the case's log says against its device, and how it was read; None without a log."""
    table = case.content.log
    if table is None:
        return None
    folder = case.path.parent if case.path else Path()
    log, intake = read_log(folder / table.file, zone=table.zone)
    return history(log, limit=margin.device.non_operating, step=table.step), intake
