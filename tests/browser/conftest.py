"""A browser and a JupyterLab for the tests of the notebooks as a user has them.

Where there is no browser they are skipped; with UNLANDED_BROWSER=required that is a failure.
"""

from __future__ import annotations

import os
import shutil
from collections.abc import Callable, Iterator
from pathlib import Path

import pytest

from jupyter_lab import Lab, Server

WORKBOOK = Path(__file__).resolve().parents[2] / "workbook"
NAMES = ("chromium", "chromium-browser", "google-chrome", "chrome")
LATENCY = pytest.StashKey[dict[str, list[float]]]()


@pytest.fixture(scope="session")
def chromium() -> str:
    """Path of the browser."""
    found = next((path for name in NAMES if (path := shutil.which(name))), None)
    if found is None:
        if os.environ.get("UNLANDED_BROWSER") == "required":
            pytest.fail("UNLANDED_BROWSER=required, and there is no chromium")
        pytest.skip("there is no chromium to open the notebooks in")
    return found


@pytest.fixture
def folder(tmp_path: Path) -> Path:
    """A fresh copy of the workbook."""
    return Path(shutil.copytree(WORKBOOK, tmp_path / "workbook"))


@pytest.fixture
def lab(folder: Path, chromium: str, tmp_path: Path) -> Iterator[Lab]:
    """JupyterLab on that copy, in the browser."""
    room = tmp_path / "room"
    room.mkdir()
    server = Server(folder, room)
    try:
        page = Lab(server, chromium)
        try:
            yield page
        finally:
            page.close()
    finally:
        server.stop()


@pytest.fixture
def told(request: pytest.FixtureRequest) -> Callable[[str, list[float]], None]:
    """Notes milliseconds from an event to the redrawn picture, for the end of the report."""
    noted = request.config.stash.setdefault(LATENCY, {})
    return noted.__setitem__


def pytest_terminal_summary(
    terminalreporter: pytest.TerminalReporter, config: pytest.Config
) -> None:
    for what, times in config.stash.get(LATENCY, {}).items():
        ordered = sorted(times)
        middle, late = (ordered[int(share * (len(ordered) - 1))] for share in (0.5, 0.95))
        terminalreporter.write_line(
            f"{what}: median {middle:.0f} ms, 95 % within {late:.0f} ms, {len(ordered)} steps")
