"""What all tests have: one thread in LAPACK, set before numpy is imported, and an empty folder."""

import os
from pathlib import Path

import pytest

os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")


@pytest.fixture
def folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """An empty folder that the test is in."""
    monkeypatch.chdir(tmp_path)
    return tmp_path
