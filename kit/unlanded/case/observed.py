"""From the readings of a case, or of a CSV filled in on site, to what the study explains."""

from __future__ import annotations

import re
from dataclasses import replace
from pathlib import Path
from typing import Any

from ..errors import Mistake, Refused, nearest
from ..reference.instruments import INSTRUMENTS
from ..study.causes import Explanation, Progress, explain, silent
from ..study.observation import Observation, observe
from ..study.readings import Pair
from ..study.reduced import Reduced, free_conductors, may_be_suspect
from ..study.run import Run
from .loading import Case, parse
from .schema import CaseFile
from .sheets import read_sheet
from .validation import validate

COLUMNS = ("instrument", "from", "to", "shows", "after", "resistor", "note")
_NEEDED = COLUMNS[:4]


def case_observations(case: Case) -> tuple[Observation, ...]:
    """The readings of the case; refused by their number where an instrument cannot show them."""
    own = {i.key: i.instrument() for i in case.content.own_instruments}
    known = {**INSTRUMENTS, **own}
    made: list[Observation] = []
    found: list[Mistake] = []
    for count, r in enumerate(case.content.readings, 1):
        try:
            made.append(observe(known[r.instrument], Pair(r.a, r.b), r.shows,
                                actions=frozenset(r.after), resistor=r.resistor))
        except Refused as refusal:
            found += refusal.at(f"readings[{count}]").mistakes
    if found:
        raise Refused.all_of(found)
    return tuple(made)


def case_suspects(content: CaseFile, run: Run) -> tuple[str, ...]:
    """Those that `[causes]` names; else conductors that nothing feeds with a reading on them.

    With no reading at all, every conductor that nothing feeds.
    """
    if content.causes.suspects:
        return content.causes.suspects
    read = {p.rpartition("@")[0] for r in content.readings for p in (r.a, r.b)}
    names = [n for n in run.names if n in read and may_be_suspect(run, n)]
    return tuple(names) if read else free_conductors(run)


def case_causes(
    case: Case, run: Run, low: Run, high: Run, *, progress: Progress = silent
) -> Explanation | None:
    """What the case's readings mean; None where no conductor is without a feed."""
    content = case.content
    suspects = case_suspects(content, run)
    if not suspects:
        return None
    reduced = Reduced(run, low, high, suspects, content.causes.section == "as described")
    return explain(reduced, case_observations(case), shares=dict(content.causes.shares.items()),
                   progress=progress)


def with_readings(case: Case, path: Path) -> Case:
    """The case with the readings of a CSV after its own; rows without a reading are left out.

    Columns are those of a [[readings]] table: instrument, from, to, shows, and if wanted after
    (actions, with semicolons between), resistor, note. Refused by row and column.
    """
    table = read_sheet(path)
    _refuse_columns(path.name, list(table.columns))
    rows = [(k, row) for k, row in enumerate(table.to_dict("records"), 2)
            if str(row["shows"]).strip()]
    plain = parse(case.text, case.name)
    before = len(plain.get("readings", []))
    plain["readings"] = [*plain.get("readings", []), *(_plain_row(row) for _, row in rows)]
    content, found = validate(plain)
    if content is None:
        raise Refused.all_of(_told(path.name, place, m, before, [k for k, _ in rows])
                             for place, m in found)
    return replace(case, content=content)


def _refuse_columns(name: str, columns: list[str]) -> None:
    found = [Mistake(f"{name} row 1", "has no column of this name", c, "") for c in _NEEDED
             if c not in columns]
    found += [Mistake(f"{name} row 1", "is not a column that belongs here", c,
                      nearest(c, COLUMNS)) for c in columns if c not in COLUMNS]
    if found:
        raise Refused.all_of(found)


def _plain_row(row: dict[Any, Any]) -> dict[str, Any]:
    """A row as the table of a case file; cells left empty are keys left out."""
    cells = {str(key): str(value).strip() for key, value in row.items()}
    made: dict[str, Any] = {key: value for key, value in cells.items() if value}
    if "after" in made:
        made["after"] = [word for word in re.split(r"\s*[;,]\s*", made["after"]) if word]
    return made


def _told(name: str, place: tuple[str | int, ...], mistake: Mistake, before: int,
          rows: list[int]) -> Mistake:
    if len(place) < 2 or place[0] != "readings" or int(place[1]) < before:
        return replace(mistake, place=f"{name}, with the case's own readings")
    column = f', column "{place[2]}"' if len(place) > 2 else ""
    return replace(mistake, place=f"{name} row {rows[int(place[1]) - before]}{column}")
