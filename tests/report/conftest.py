"""The demo cases, worked out once, and one whole memo."""

from __future__ import annotations

import datetime
from collections.abc import Callable
from pathlib import Path

import pytest

from unlanded.case.loading import load_case, read_case
from unlanded.report.case_memo import case_contents
from unlanded.report.folder import Contents, write_folder
from unlanded.report.investigation import Investigation, investigate

SITES = Path(__file__).resolve().parents[2] / "workbook" / "sites"
DAY = datetime.date(2026, 3, 9)


@pytest.fixture(scope="session")
def quay() -> Investigation:
    """Four cores, the black one open; metric."""
    return investigate(load_case(SITES / "tern-quay.toml"))


@pytest.fixture(scope="session")
def mill() -> Investigation:
    """Three cores in US units, two of them open."""
    return investigate(load_case(SITES / "alder-mill.toml"))


@pytest.fixture(scope="session")
def moor() -> Investigation:
    """Seven cores with a relay and an input card that nothing feeds."""
    return investigate(load_case(SITES / "larkmoor.toml"))


@pytest.fixture(scope="session")
def house() -> Investigation:
    """Five singles at random in a metal conduit, three phases."""
    return investigate(load_case(SITES / "heron-house.toml"))


@pytest.fixture(scope="session")
def sites(quay: Investigation, mill: Investigation, moor: Investigation,
          house: Investigation) -> tuple[Investigation, ...]:
    """All of them."""
    return quay, mill, moor, house


@pytest.fixture(scope="session")
def contents(quay: Investigation) -> Contents:
    """Of the memo of Tern Quay."""
    return case_contents(quay, date=DAY, prepared_by="A. Engineer")


@pytest.fixture(scope="session")
def folder(contents: Contents, tmp_path_factory: pytest.TempPathFactory) -> Path:
    """The whole memo of Tern Quay on disk."""
    target = tmp_path_factory.mktemp("memo") / "tern-quay"
    write_folder(target, contents)
    return target


@pytest.fixture(scope="session")
def screened(written: Callable[..., Investigation]) -> Callable[[str], Investigation]:
    """Tern Quay's cord in a screen that is earthed at the ends of that word, 6 A through it."""

    def make(earthed: str) -> Investigation:
        return written(("[run.ends.near]", f'[run.surround]\nkind = "screen"\ngap = "0.3 mm"\n'
                        f'earthed = "{earthed}"\n[run.ends.near]'),
                       ("[device]", '[[loaded]]\ngo = "brown"\ncurrent = "6 A"\n[device]'))
    return make


@pytest.fixture(scope="session")
def written() -> Callable[..., Investigation]:
    """A case written as Tern Quay's with some of its text replaced."""

    def make(*changes: tuple[str, str]) -> Investigation:
        text = (SITES / "tern-quay.toml").read_text(encoding="utf-8")
        for old, new in changes:
            assert old in text
            text = text.replace(old, new)
        return investigate(read_case(text))

    return make
