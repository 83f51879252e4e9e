"""A browser and a JupyterLab for the tests of the notebooks as a user has them.

Where there is no browser they are skipped; with UNLANDED_BROWSER=required that is a failure.
"""

from __future__ import annotations

import os
import re
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


@pytest.fixture(scope="session")
def server(tmp_path_factory: pytest.TempPathFactory) -> Iterator[Server]:
    """JupyterLab on a folder that each test puts its own copy of the workbook into."""
    made = Server(tmp_path_factory.mktemp("lab"), tmp_path_factory.mktemp("room"))
    yield made
    made.stop()


@pytest.fixture(scope="session")
def browser(server: Server, chromium: str) -> Iterator[Lab]:
    """Its page, as wide and high as a small laptop's."""
    made = Lab(server, chromium)
    yield made
    made.close()


@pytest.fixture
def folder(server: Server, request: pytest.FixtureRequest) -> Path:
    """A fresh copy of the workbook."""
    name = re.sub(r"[^a-z0-9]+", "-", request.node.name.lower())
    return Path(shutil.copytree(WORKBOOK, server.root / name))


@pytest.fixture
def lab(browser: Lab, folder: Path) -> Iterator[Lab]:
    """The page, for the notebooks of that copy; its kernels are stopped afterwards."""
    browser.begin(folder.name)
    yield browser
    browser.stop_kernels()


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
