"""Reading a CSV as text, as spreadsheets in any country write it.

UTF-8 with or without a byte order mark; commas, semicolons or tabs between cells. Rows are counted
as a spreadsheet counts them: the heading is row 1.
"""

from __future__ import annotations

import csv
import warnings
from pathlib import Path
from typing import TYPE_CHECKING

from ..errors import Refused, nearest

if TYPE_CHECKING:
    import pandas as pd

LARGEST = 512 * 1024 * 1024
LONGEST_CELL = 1000
_BETWEEN = ";\t,"


def read_sheet(path: Path) -> pd.DataFrame:
    """All cells as text, columns by heading without blanks about it; refused by row and column."""
    import pandas as pd

    between = _separator(path)
    try:
        with warnings.catch_warnings():
            warnings.simplefilter("error", pd.errors.ParserWarning)
            table = pd.read_csv(path, sep=between, dtype=str, keep_default_na=False,
                                encoding="utf-8-sig", skipinitialspace=True, index_col=False)
    except UnicodeDecodeError as error:
        raise Refused(path.name, "is not UTF-8 text", hint="save it as CSV UTF-8",
                      given=f"byte 0x{error.object[error.start]:02X}") from None
    except pd.errors.EmptyDataError:
        raise Refused(path.name, "is empty") from None
    except (pd.errors.ParserError, pd.errors.ParserWarning):
        raise _not_even(path, between) from None
    table = table.fillna("")  # a row that ends early: spreadsheets leave off empty cells
    table.columns = [str(c).strip() for c in table.columns]
    _refuse_long_cells(table, path.name)
    return table


def _not_even(path: Path, between: str) -> Refused:
    """The refusal of a CSV that a reader cannot make rows of: its first row with cells too many."""
    csv.field_size_limit(LARGEST)
    with path.open(encoding="utf-8-sig", newline="") as file:
        rows = csv.reader(file, delimiter=between)
        width = len(next(rows))
        for number, row in enumerate(rows, 2):
            if len(row) > width:
                return Refused(f"{path.name} row {number}", f"has more cells than the {width} of "
                               "the heading", given=f"{len(row)} cells")
    return Refused(path.name, "is not a CSV that can be read",
                   hint="a quotation mark is not closed")


def _separator(path: Path) -> str:
    """What stands between the cells of the heading."""
    if path.is_dir():
        raise Refused(str(path), "is a folder, and this is one CSV file")
    if not path.exists():
        files = sorted(p.name for p in path.parent.glob("*.csv")) if path.parent.is_dir() else []
        raise Refused(str(path), "there is no such file", hint=nearest(path.name, files))
    if path.stat().st_size > LARGEST:
        raise Refused(path.name, "is larger than 512 MiB")
    with path.open("rb") as file:
        heading = file.readline(100_000).decode("utf-8-sig", errors="replace")
    if "\x00" in heading:
        raise Refused(path.name, "is not a CSV of text", hint="export it as CSV UTF-8")
    return max(_BETWEEN, key=heading.count)


def _refuse_long_cells(table: pd.DataFrame, name: str) -> None:
    for column in table.columns:
        if len(column) > LONGEST_CELL:
            raise Refused(f"{name} row 1", f"a heading may be {LONGEST_CELL} characters long",
                          given=f"{len(column)} characters")
        lengths = table[column].str.len().to_numpy()
        if len(lengths) and lengths.max() > LONGEST_CELL:
            row = int(lengths.argmax())
            raise Refused(f'{name} row {row + 2}, column "{column}"',
                          f"a cell may be {LONGEST_CELL} characters long",
                          given=f"{lengths[row]} characters")
