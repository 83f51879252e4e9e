"""Reading a current log: a CSV of a time and a current, as loggers and spreadsheets write it.

The heading of the time begins with "time" or "date"; that of the current ends with its unit in
brackets, such as "residual [mA]". Every row that cannot be read is counted and named.
"""

from __future__ import annotations

import re
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING, Any
from zoneinfo import ZoneInfo

import numpy as np

from ..errors import Mistake, Refused
from ..study.history import Log
from .sheets import read_sheet

if TYPE_CHECKING:
    import pandas as pd

_UNIT = re.compile(r"[\[(]\s*(A|mA|µA|μA|uA)\s*[\])]\s*$")
_SCALE = {"A": 1.0, "mA": 1e-3, "µA": 1e-6, "μA": 1e-6, "uA": 1e-6}
OVER_RANGE = ("ol", "o.l", "o.l.", "over", "overflow", "overload", "over range", "inf", ">")
EARLIEST, LATEST = np.datetime64("1970-01-01"), np.datetime64("2200-01-01")
NAMED = 5  # bad rows named one by one; the rest are counted


@dataclass(frozen=True)
class Intake:
    """What was read, and what was not.

    Parameters
    ----------
    rows : of the file, without its heading
    bad : the first rows that could not be read, each in a sentence
    bad_rows : how many there were
    repeated : rows whose time another row had; the first of them stands
    disordered : rows that came later in the file than their time has it
    """

    rows: int
    bad: tuple[Mistake, ...]
    bad_rows: int
    repeated: int
    disordered: int


def read_log(path: Path, *, zone: str | None = None) -> tuple[Log, Intake]:
    """The log in a CSV file, in order of time, and what was wrong with it.

    Times are ISO 8601 or year-month-day first. Those that say their offset need no zone; others
    are on the clock of `zone`, such as "Europe/London", and are refused where none is named.
    """
    table = read_sheet(path)
    time_name, current_name, scale = _columns(path.name, list(table.columns))
    seconds, said = _seconds(table[time_name], _zone(zone), path.name)
    current = _amperes(table[current_name]) * scale
    good = np.isfinite(seconds) & ~np.isnan(current)
    bad = _bad(path.name, table, (time_name, current_name), seconds, current)
    order, repeated, disordered = _in_order(seconds[good])
    seconds, current = seconds[good][order], current[good][order]
    log = Log(seconds, current, _hours(seconds, said), str(said))
    return log, Intake(len(table), bad, int((~good).sum()), repeated, disordered)


def _columns(name: str, headings: list[str]) -> tuple[str, str, float]:
    times = [h for h in headings if h.strip().lower().startswith(("time", "date"))]
    currents = [(h, m[1]) for h in headings if (m := _UNIT.search(h))]
    if not times:
        raise Refused(f"{name} row 1", "has no column of times", given=", ".join(headings),
                      hint='its heading begins with "time"')
    if not currents:
        raise Refused(f"{name} row 1", "has no column of currents", given=", ".join(headings),
                      hint='its heading ends with the unit, such as "residual [mA]"')
    return times[0], currents[0][0], _SCALE[currents[0][1]]


def _zone(name: str | None) -> ZoneInfo | None:
    if name is None:
        return None
    try:
        return ZoneInfo(name)
    except (KeyError, ValueError, OSError):
        raise Refused("log.zone", "is not a time zone", given=name,
                      hint='such as "Europe/London" or "UTC"') from None


def _seconds(
    text: pd.Series[str], zone: ZoneInfo | None, name: str
) -> tuple[np.ndarray[Any, np.dtype[np.float64]], Any]:
    """Seconds since 1970 UTC, NaN where no time can be read, and the zone of the site's clock."""
    import pandas as pd

    offset = text.str.contains(r"(?:Z|[+-]\d\d:?\d\d)\s*$", regex=True, na=False)
    if zone is None and not offset.all():
        raise Refused(f"{name} row {int(np.argmin(offset)) + 2}", "its time says no offset",
                      given=text[~offset].iloc[0], hint='name the clock in the case: zone = "…"')
    if offset.any():
        stamps = pd.to_datetime(text, errors="coerce", utc=True, format="ISO8601")
        if not offset.all():
            stamps[~offset] = _local(text[~offset], zone)
    else:
        stamps = _local(text, zone)
    plain = stamps.dt.tz_localize(None).to_numpy(dtype="datetime64[us]")
    believed = (plain >= EARLIEST) & (plain < LATEST)  # also not where no time was read
    seconds = np.where(believed, plain.astype(np.int64) / 1e6, np.nan)
    return seconds, zone or ZoneInfo("UTC")


def _local(text: pd.Series[str], zone: ZoneInfo | None) -> Any:
    """Times of a clock: an hour that comes twice is the first, one skipped is unreadable."""
    import pandas as pd

    plain = pd.to_datetime(text, errors="coerce", format="ISO8601")
    return plain.dt.tz_localize(zone, ambiguous=np.ones(len(text), dtype=bool),
                                nonexistent="NaT").dt.tz_convert("UTC")


def _amperes(text: pd.Series[str]) -> np.ndarray[Any, np.dtype[np.float64]]:
    """Numbers with a point or a decimal comma; infinite for an overflow mark; NaN otherwise."""
    import pandas as pd

    plain = text.str.strip()
    numbers = pd.to_numeric(plain.str.replace(",", ".", regex=False), errors="coerce").to_numpy(
        dtype=float, copy=True)
    unread = np.isnan(numbers)
    marks = plain[unread].str.lower()
    numbers[unread] = np.where(marks.isin(OVER_RANGE) | marks.str.startswith(">"), np.inf, np.nan)
    return np.asarray(numbers)


def _bad(
    name: str, table: Any, columns: tuple[str, str], seconds: Any, current: Any
) -> tuple[Mistake, ...]:
    found: list[tuple[int, Mistake]] = []
    for column, unread, rule in ((columns[0], ~np.isfinite(seconds), "is not a time"),
                                 (columns[1], np.isnan(current), "is not a number")):
        found += [(row, Mistake(f'{name} row {row + 2}, column "{column}"', rule,
                                str(table[column].iloc[row]) or '""'))
                  for row in np.flatnonzero(unread)[:NAMED]]
    return tuple(mistake for _, mistake in sorted(found, key=lambda f: f[0])[:NAMED])


def _in_order(seconds: Any) -> tuple[Any, int, int]:
    """Positions in order of time, each time once; how many repeated, how many came late."""
    order = np.argsort(seconds, kind="stable")
    ordered = seconds[order]
    first = np.append(True, np.diff(ordered) > 0) if len(order) else np.zeros(0, dtype=bool)
    late = int((seconds < np.maximum.accumulate(seconds)).sum()) if len(seconds) else 0
    return order[first], int((~first).sum()), late


def _hours(seconds: Any, zone: Any) -> Any:
    import pandas as pd

    stamps = pd.to_datetime(np.asarray(seconds), unit="s", utc=True).tz_convert(zone)
    return np.asarray(stamps.hour + stamps.minute / 60 + stamps.second / 3600, dtype=float)
