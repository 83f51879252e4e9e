"""The notebooks as files: stored outputs, copies, reruns; a change of 1 % turns them red."""

from __future__ import annotations

import json
import re
import shutil
import subprocess
import sys
from pathlib import Path

import nbformat
import pytest

from unlanded.errors import Refused
from unlanded.panels.notebooks import (
    Moved,
    compare,
    copy_workbook,
    lab_command,
    lab_environment,
    lines_of,
    notebooks_in,
    refresh,
    workbook_folder,
)

WORKBOOK = workbook_folder()
NOTEBOOKS = sorted(WORKBOOK.glob("*.ipynb"))
NUMBER_WITH_UNIT = re.compile(
    r"\d(?:\.\d+)? (?:[fpnµmkMG]?(?:V|A|Ω|F|W|s|m)(?:/m)?|%|ft|bit)(?![A-Za-z])")
ONE_PER_CENT = """
import unlanded.study.run as run
exact = run.capacitance_matrix
run.capacitance_matrix = lambda *given, **more: 1.01 * exact(*given, **more)
"""


def code_cells(path: Path) -> list[nbformat.NotebookNode]:
    return [c for c in nbformat.read(path, 4).cells if c.cell_type == "code"]


def printed(path: Path) -> list[str]:
    """What the cells of a notebook printed, without what a panel shows as text."""
    return [line for cell in code_cells(path) for o in cell.outputs if o.output_type == "stream"
            for line in o.text.splitlines()]


def test_there_is_one_for_each_question() -> None:
    assert [p.stem for p in NOTEBOOKS] == [
        "1-the-run", "2-what-it-will-read", "3-what-it-was", "4-trip-margin",
        "5-what-it-may-hold-in", "6-the-memo"]


@pytest.mark.parametrize("path", NOTEBOOKS, ids=lambda p: p.stem)
def test_outputs_are_stored_in_order_and_hold_no_path(path: Path) -> None:
    cells = code_cells(path)
    assert [c.execution_count for c in cells] == list(range(1, len(cells) + 1))
    assert any(lines_of(c) for c in cells)
    assert [o for c in cells for o in c.outputs if o.output_type == "error"] == []
    assert not any(c.metadata.get("tags") for c in cells)
    text = path.read_text(encoding="utf-8")
    assert re.findall(r"/(?:home|work|tmp|root|usr|Users)/|[A-Z]:\\\\", text) == []
    assert "application/vnd.jupyter.widget" not in text
    assert json.loads(text)["metadata"].keys() == {"kernelspec", "language_info"}


@pytest.mark.parametrize("path", NOTEBOOKS, ids=lambda p: p.stem)
def test_opens_with_the_question_the_limits_and_the_caution(path: Path) -> None:
    first = nbformat.read(path, 4).cells[0]
    assert first.cell_type == "markdown"
    assert re.match(r"# \d\. ", first.source)
    for words in ("Not for:", "**Caution.**", "never proves a conductor dead"):
        assert words in first.source


def test_enough_numbers_are_compared_and_held_against_printed_ones() -> None:
    numbers = [n for p in NOTEBOOKS for line in printed(p) for n in NUMBER_WITH_UNIT.findall(line)]
    against = [line for p in NOTEBOOKS for line in printed(p) if " here, " in line]
    assert len(numbers) >= 40
    assert len(against) >= 6


def test_copy_writes_over_nothing(tmp_path: Path) -> None:
    made, kept = copy_workbook(tmp_path / "mine")
    assert kept == []
    assert {p.suffix for p in made} == {".ipynb", ".toml", ".csv"}
    mine = tmp_path / "mine" / "sites" / "tern-quay.toml"
    mine.write_text("changed", encoding="utf-8")
    made[0].unlink()
    again, kept = copy_workbook(tmp_path / "mine")
    assert again == [made[0]]
    assert mine in kept
    assert mine.read_text(encoding="utf-8") == "changed"


def test_copy_refuses_a_file(tmp_path: Path) -> None:
    (tmp_path / "mine").write_text("", encoding="utf-8")
    with pytest.raises(Refused, match="is a file, and the workbook is a folder"):
        copy_workbook(tmp_path / "mine")


def test_folders_without_notebooks_are_refused(tmp_path: Path) -> None:
    with pytest.raises(Refused, match="holds no notebook"):
        notebooks_in(tmp_path)
    with pytest.raises(Refused, match="is not a folder"):
        notebooks_in(tmp_path / "none")


def test_what_is_no_notebook_is_refused(tmp_path: Path) -> None:
    bad = tmp_path / "bad.ipynb"
    bad.write_text("{}", encoding="utf-8")
    with pytest.raises(Refused, match=r"bad\.ipynb: is not a notebook"):
        compare(bad)


@pytest.mark.parametrize(("before", "after", "says"), [
    ("at 85 m: 109 V", "at 85 m: 110 V", "(109 to 110, +0.92 %)"),
    ("leaves −3.28 mA", "leaves −3.25 mA", "(−3.28 to −3.25, +0.91 %)"),
    ("will trip", "may trip", "“will trip” is now “may trip”"),
    ("", "one more", "new line “one more”"), ("one less", "", "the line “one less” is gone"),
])  # fmt: skip
def test_what_moved_is_said(before: str, after: str, says: str) -> None:
    said = str(Moved("2.ipynb", 3, before, after))
    assert said.startswith("2.ipynb, cell 3: ")
    assert said.endswith(says)


@pytest.fixture
def one(tmp_path: Path) -> Path:
    """The first notebook in a folder of its own."""
    folder = tmp_path / "workbook"
    shutil.copytree(WORKBOOK / "sites", folder / "sites")
    return Path(shutil.copy(NOTEBOOKS[0], folder))


@pytest.fixture
def wrong(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """Kernels in which every capacitance is 1 % too large."""
    startup = tmp_path / "ipython" / "profile_default" / "startup"
    startup.mkdir(parents=True)
    (startup / "wrong.py").write_text(ONE_PER_CENT, encoding="utf-8")
    monkeypatch.setenv("IPYTHONDIR", str(tmp_path / "ipython"))


def test_refresh_writes_the_same_bytes_again(one: Path) -> None:
    before = one.read_bytes()
    assert refresh(one) == ()
    assert one.read_bytes() == before


@pytest.mark.usefixtures("wrong")
def test_one_per_cent_in_a_formula_moves_numbers_and_turns_nbval_red(one: Path) -> None:
    moved = compare(one)
    assert any("(101.15 to 102.16, +1 %)" in str(m) for m in moved)
    done = subprocess.run(
        [sys.executable, "-m", "pytest", "-q", "--nbval", "--nbval-current-env",
         "--nbval-cell-timeout=120", "-p", "no:cacheprovider", "-c", "/dev/null", str(one)],
        capture_output=True, text=True, check=False, cwd=one.parent)
    assert done.returncode == 1
    assert "102.16" in done.stdout


def test_lab_opens_in_the_folder_and_asks_for_no_news(tmp_path: Path) -> None:
    assert lab_command(tmp_path)[-1] == f"--ServerApp.root_dir={tmp_path}"
    ours = Path(lab_environment()["JUPYTER_CONFIG_PATH"].split(":")[0])
    config = json.loads((ours / "labconfig" / "page_config.json").read_text(encoding="utf-8"))
    assert config == {"disabledExtensions": {"@jupyterlab/apputils-extension:announcements": True}}


def test_a_refusal_in_a_notebook_is_a_sentence_and_no_traceback(tmp_path: Path) -> None:
    from nbclient import NotebookClient

    made = nbformat.v4.new_notebook(cells=[nbformat.v4.new_code_cell(
        "from unlanded.case.loading import load_case\nload_case('none.toml')")])
    NotebookClient(made, timeout=60, allow_errors=True, kernel_name="python3",
                   resources={"metadata": {"path": str(tmp_path)}}).execute()
    (output,) = made.cells[0].outputs
    assert output.traceback == ["none.toml: there is no such file."]
