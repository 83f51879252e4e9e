"""A copy of the demo sites, so that what a panel saves is not saved into the checkout."""

from __future__ import annotations

import shutil
from pathlib import Path

import pytest

from case_text import SITES


@pytest.fixture
def sites(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """The folder of the copied sites; the test runs beside it, as a notebook does."""
    monkeypatch.chdir(tmp_path)
    return Path(shutil.copytree(SITES, tmp_path / "sites"))
