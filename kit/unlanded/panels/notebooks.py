"""The notebooks as files: copied to a folder, run without a browser, compared with what they hold.

nbformat and nbclient take more than a second to import, so they are imported where they are used.
"""

from __future__ import annotations

import os
import re
import shutil
import sys
from collections.abc import Callable, Iterator, Sequence
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass
from importlib import resources
from itertools import zip_longest
from pathlib import Path
from typing import Any

from ..errors import Refused

TIMEOUT = 120  # seconds for a cell: a hung kernel must not hang the check
_NUMBER = re.compile(r"[-−+]?\d+(?:\.\d+)?(?:e[-+]?\d+)?")
_WIDGET = "application/vnd.jupyter.widget-view+json"


@dataclass(frozen=True)
class Moved:
    """A line of a notebook's output that is not what the notebook holds.

    Parameters
    ----------
    notebook : its file name
    cell : number of the cell, counted from 1 over all cells
    before, after : the line as stored and as it came out; empty where there is none
    """

    notebook: str
    cell: int
    before: str
    after: str

    def __str__(self) -> str:
        where = f"{self.notebook}, cell {self.cell}"
        if not self.before:
            return f"{where}: new line “{self.after}”"
        if not self.after:
            return f"{where}: the line “{self.before}” is gone"
        change = _change(self.before, self.after)
        return f"{where}: “{self.before}” is now “{self.after}”{change}"


def workbook_folder() -> Path:
    """Where the notebooks and demo sites of this installation are."""
    packed = Path(str(resources.files("unlanded") / "_workbook"))
    checkout = Path(__file__).resolve().parents[3] / "workbook"
    for folder in (packed, checkout):
        if folder.is_dir():
            return folder
    raise Refused("workbook", "is not in this installation", hint="install the kit again")


def copy_workbook(target: Path) -> tuple[list[Path], list[Path]]:
    """Copy notebooks and demo sites to `target`: what was copied, and what was there already.

    A file that is there is never written over.
    """
    if target.exists() and not target.is_dir():
        raise Refused(str(target), "is a file, and the workbook is a folder")
    source = workbook_folder()
    made: list[Path] = []
    kept: list[Path] = []
    for file in _files(source):
        there = target / file.relative_to(source)
        if there.exists():
            kept.append(there)
            continue
        there.parent.mkdir(parents=True, exist_ok=True)
        shutil.copyfile(file, there)
        made.append(there)
    return made, kept


def lab_command(folder: Path) -> list[str]:
    """The command that opens JupyterLab in a folder, in the environment of `lab_environment`."""
    return [sys.executable, "-m", "jupyterlab", f"--ServerApp.root_dir={folder.absolute()}"]


def lab_environment() -> dict[str, str]:
    """The environment for it: the user's own, and our setting that asks and fetches no news."""
    ours = str(Path(__file__).resolve().parent / "jupyter")
    known = os.environ.get("JUPYTER_CONFIG_PATH", "")
    return {**os.environ, "JUPYTER_CONFIG_PATH": os.pathsep.join([ours, known]) if known else ours}


def notebooks_in(folder: Path) -> tuple[Path, ...]:
    """The notebooks of a folder, in the order of their names; at least one."""
    if not folder.is_dir():
        raise Refused(str(folder), "is not a folder", hint="give the folder of the notebooks")
    found = tuple(sorted(folder.glob("*.ipynb")))
    if not found:
        raise Refused(str(folder), "holds no notebook")
    return found


def run_notebook(path: Path) -> Any:
    """The notebook executed from the top in its own folder, in memory; the file stays as it is."""
    import nbformat
    from nbclient import NotebookClient
    from nbclient.exceptions import CellExecutionError, CellTimeoutError, DeadKernelError

    try:
        notebook = nbformat.read(path, 4)
    except Exception:  # nbformat raises many kinds for what is not a notebook
        raise Refused(path.name, "is not a notebook that can be read") from None
    client = NotebookClient(
        notebook, timeout=TIMEOUT, startup_timeout=60, kernel_name="python3",
        record_timing=False, store_widget_state=False,
        # Without it the kernel warns on stderr that its local sockets are not encrypted.
        extra_arguments=["--IPKernelApp.log_level=40"],
        resources={"metadata": {"path": str(path.parent)}},
    )
    try:
        client.execute()
    except CellExecutionError as error:
        raise Refused(path.name, "a cell fails", given=f"{error.ename}: {error.evalue}") from None
    except (CellTimeoutError, DeadKernelError) as error:
        raise Refused(path.name, "a cell does not finish", given=type(error).__name__) from None
    return notebook


def compare(path: Path) -> tuple[Moved, ...]:
    """Run a notebook and say which lines of its output are not those it holds."""
    return _moved(path, run_notebook(path))


def refresh(path: Path) -> tuple[Moved, ...]:
    """Run a notebook and store its output, the same bytes for the same output; what moved."""
    import nbformat

    fresh = run_notebook(path)
    moved = _moved(path, fresh)
    fresh.metadata = {"kernelspec": {"display_name": "Python 3", "language": "python",
                                     "name": "python3"}, "language_info": {"name": "python"}}
    for number, cell in enumerate(fresh.cells):
        cell.id = f"cell-{number}"
        cell.metadata = {}
        for output in cell.get("outputs", []):
            output.get("data", {}).pop(_WIDGET, None)
    path.write_text(nbformat.writes(fresh) + "\n", encoding="utf-8", newline="\n")
    return moved


def each(
    do: Callable[[Path], tuple[Moved, ...]], found: Sequence[Path]
) -> Iterator[tuple[Moved, ...]]:
    """`compare` or `refresh` of each notebook, as many at once as there are cores."""
    with ThreadPoolExecutor(os.cpu_count() or 1) as pool:
        yield from pool.map(do, found)


def lines_of(cell: Any) -> list[str]:
    """What a cell printed and showed as text, line by line."""
    texts = [o.text if o.output_type == "stream" else o.get("data", {}).get("text/plain", "")
             for o in cell.outputs]
    return [line.rstrip() for text in texts for line in text.splitlines()]


def _moved(path: Path, fresh: Any) -> tuple[Moved, ...]:
    import nbformat

    stored = nbformat.read(path, 4)
    cells = zip(stored.cells, fresh.cells, strict=True)
    return tuple(m for n, (old, new) in enumerate(cells, 1) if old.cell_type == "code"
                 for m in _compared(path.name, n, old, new))


def _compared(name: str, number: int, old: Any, new: Any) -> Iterator[Moved]:
    for before, after in zip_longest(lines_of(old), lines_of(new), fillvalue=""):
        if before != after:
            yield Moved(name, number, before, after)


def _change(before: str, after: str) -> str:
    """By how much the first number that differs has moved, where the words are the same."""
    if _NUMBER.sub("#", before) != _NUMBER.sub("#", after):
        return ""
    for old, new in zip(_NUMBER.findall(before), _NUMBER.findall(after), strict=True):
        if old != new:
            a, b = (float(x.replace("−", "-")) for x in (old, new))
            return f" ({old} to {new}, {100 * (b - a) / abs(a):+.2g} %)" if a else ""
    return ""


def _files(source: Path) -> Sequence[Path]:
    names = ("*.ipynb", "sites/*.toml", "sites/*.csv")
    return sorted(p for name in names for p in source.glob(name))
