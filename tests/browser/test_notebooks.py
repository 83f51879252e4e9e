"""The notebooks in a real JupyterLab: what a user sees is what the kit says."""

from __future__ import annotations

import shutil
import zipfile
from collections.abc import Callable
from pathlib import Path

import nbformat
import pytest

from jupyter_lab import Lab
from unlanded.case.loading import load_case
from unlanded.panels.desk import Desk
from unlanded.panels.notebooks import lines_of, run_notebook
from unlanded.panels.readings_model import ReadingModel
from unlanded.units import si

WORKBOOK = Path(__file__).resolve().parents[2] / "workbook"
NOTEBOOKS = sorted(p.name for p in WORKBOOK.glob("*.ipynb"))
READINGS = "2-what-it-will-read.ipynb"
QUAY = "sites/tern-quay.toml"


def kit_says(folder: Path, length: str, meter: str = "10 Mohm") -> list[list[str]]:
    """The table of the readings panel for a length and a meter, worked out here."""
    desk = Desk(folder / QUAY)
    desk.change({"run.length": length})
    model = ReadingModel(desk)
    model.set_resistance(meter)
    model.bands()
    return [list(row) for row in model.table().rows]


def table(lab: Lab) -> list[list[str]]:
    """The rows of the panel's table."""
    return [row.locator("td").all_inner_texts()
            for row in lab.panel().locator(".unlanded-table tbody tr").all()]


def curve(lab: Lab) -> str:
    """The path of the first drawn curve."""
    return lab.panel().locator(".bqplot.figure").first.locator("path.line").first.get_attribute(
        "d") or ""


def shows(lab: Lab, folder: Path, length: str) -> None:
    """Wait until the panel's table is what the kit says for that length."""
    wanted = kit_says(folder, length)
    for _ in range(100):
        if table(lab) == wanted:
            return
        lab.page.wait_for_timeout(100)
    assert table(lab) == wanted


def opened(lab: Lab, notebook: str) -> None:
    lab.open(notebook)
    lab.run_all()
    lab.panel().scroll_into_view_if_needed()


@pytest.mark.parametrize("name", NOTEBOOKS)
def test_runs_without_error_and_prints_what_the_headless_run_prints(
    lab: Lab, folder: Path, name: str
) -> None:
    opened(lab, name)
    assert lab.page.locator(".jp-RenderedText[data-mime-type*='error']").count() == 0
    stored = nbformat.read(folder / name, 4)
    printed = [[line for o in cell.outputs if o.output_type == "stream"
                for line in o.text.splitlines() if line.strip()]
               for cell in stored.cells if cell.cell_type == "code"]
    assert any(printed)
    assert lab.printed() == [[line.rstrip() for line in lines] for lines in printed]
    assert lab.errors == []


def test_handle_by_keyboard_and_mouse_changes_curve_and_table(lab: Lab, folder: Path) -> None:
    opened(lab, READINGS)
    before = curve(lab)
    handle = lab.handle("Run length")
    handle.focus()
    for _ in range(5):
        lab.page.keyboard.press("ArrowRight")
    lab.page.wait_for_timeout(500)
    by_keys = lab.box("Run length").input_value()
    assert si(by_keys, "m") > 85
    shows(lab, folder, by_keys)
    assert curve(lab) != before

    lab.drag(handle, -60)
    by_mouse = lab.box("Run length").input_value()
    assert si(by_mouse, "m") < 60
    shows(lab, folder, by_mouse)


def test_typed_length_in_feet(lab: Lab, folder: Path) -> None:
    opened(lab, READINGS)
    before = curve(lab)
    lab.box("Run length").fill("150 ft")
    lab.box("Run length").press("Enter")
    shows(lab, folder, "150 ft")
    assert lab.box("Run length").input_value() == "45.72 m"
    assert curve(lab) != before


def test_bad_entry_shows_its_sentence_and_keeps_the_value(lab: Lab, folder: Path) -> None:
    opened(lab, READINGS)
    lab.box("Run length").fill("50 kg")
    lab.box("Run length").press("Enter")
    alert = lab.panel().locator(".unlanded-alert").first
    alert.wait_for(timeout=10_000)
    assert "Run length" in alert.inner_text()
    assert "Kept 85 m." in alert.inner_text()
    shows(lab, folder, "85 m")


def test_mark_of_your_meter_is_dragged_along_the_curve(lab: Lab, folder: Path) -> None:
    opened(lab, READINGS)
    figure = lab.panel().locator(".bqplot.figure").first
    figure.scroll_into_view_if_needed()
    mark = figure.locator(".dot.element").last
    lab.drag(mark, -80)
    meter = lab.box("Meter impedance").input_value()
    assert 1e5 < si(meter, "ohm") < 5e6
    wanted = kit_says(folder, "85 m", meter)
    lab.page.wait_for_timeout(1500)
    assert table(lab)[-1] == wanted[-1]


def test_figure_goes_into_the_memo_and_the_memo_is_written(lab: Lab, folder: Path) -> None:
    opened(lab, READINGS)
    lab.button("Into the memo").click()
    lab.panel().get_by_text("Added to the memo, as no. 1").wait_for(timeout=10_000)
    lab.button("Save case").click()
    lab.panel().get_by_text("Saved.", exact=True).wait_for(timeout=10_000)
    (added,) = load_case(folder / QUAY).content.memo.added
    assert (added.kind, added.a, added.b) == ("loading", "black@far", "earth")

    opened(lab, "6-the-memo.ipynb")
    lab.panel().get_by_text("1. Reading against impedance, black to earth").wait_for()
    lab.button("Write Word and PDF").click()
    lab.panel().get_by_text("Written to tern-quay-memo").wait_for(timeout=120_000)
    memo = folder / "tern-quay-memo"
    picture = (memo / "figures" / "added-1-loading.png").read_bytes()
    with zipfile.ZipFile(memo / "memo.docx") as word:
        held = [word.read(n) for n in word.namelist() if n.startswith("word/media/")]
    assert picture in held
    assert (memo / "memo.pdf").read_bytes().startswith(b"%PDF")
    assert lab.errors == []


def test_saved_case_is_there_again_after_reload(lab: Lab, folder: Path) -> None:
    opened(lab, READINGS)
    lab.box("Run length").fill("61 m")
    lab.box("Run length").press("Enter")
    lab.panel().get_by_text("Not saved yet.").wait_for(timeout=10_000)
    lab.button("Save case").click()
    lab.panel().get_by_text("Saved.", exact=True).wait_for(timeout=10_000)
    opened(lab, "1-the-run.ipynb")  # the next notebook has the change
    assert lab.box("Run length").input_value() == "61 m"
    opened(lab, READINGS)
    assert lab.box("Run length").input_value() == "61 m"
    shows(lab, folder, "61 m")


def test_second_to_save_is_told_what_changed(lab: Lab, folder: Path) -> None:
    opened(lab, READINGS)
    other = Desk(folder / QUAY)
    other.change({"run.length": "70 m"})
    other.save()
    lab.box("Run length").fill("61 m")
    lab.box("Run length").press("Enter")
    lab.panel().get_by_text("Not saved yet.").wait_for(timeout=10_000)
    lab.button("Save case").click()
    alert = lab.panel().locator(".unlanded-alert").first
    alert.wait_for(timeout=10_000)
    assert "was changed by something else since it was read; given run.length" in alert.inner_text()
    assert load_case(folder / QUAY).content.run.length == 70.0


def test_a_later_cell_s_value_stands_as_it_does_headless(lab: Lab, folder: Path) -> None:
    notebook = nbformat.read(folder / READINGS, 4)
    for value in ("150 ft", "47.3 m"):
        notebook.cells.append(nbformat.v4.new_code_cell(
            f'panel.model.set_length("{value}")\npanel.model.set_resistance("4.7 Mohm")'))
        notebook.cells.append(nbformat.v4.new_code_cell("print(panel.text())"))
    nbformat.write(notebook, folder / "later.ipynb")
    headless = [[line for line in lines_of(cell) if line.strip()] for cell in
                run_notebook(folder / "later.ipynb").cells if cell.cell_type == "code"]
    opened(lab, "later.ipynb")
    assert lab.printed()[-4:] == headless[-4:]
    assert lab.box("Run length").input_value() == "47.3 m"
    assert lab.box("Meter impedance").input_value() == "4.7 Mohm"


@pytest.mark.parametrize(("button", "starts"), [("Save PNG", b"\x89PNG"), ("Save SVG", b"<")])
def test_picture_is_saved_from_the_browser(
    lab: Lab, tmp_path: Path, button: str, starts: bytes
) -> None:
    opened(lab, READINGS)
    with lab.page.expect_download(timeout=30_000) as caught:
        lab.button(button).click()
    saved = shutil.copyfile(caught.value.path(), tmp_path / "picture")
    assert saved.read_bytes().startswith(starts)


def test_time_to_the_redrawn_curve_is_reported(
    lab: Lab, told: Callable[[str, list[float]], None]
) -> None:
    opened(lab, READINGS)
    handle = lab.handle("Run length")
    handle.focus()
    figure = lab.panel().locator(".bqplot.figure").first
    times = []
    for step in range(20):
        figure.evaluate("""figure => {
            const path = [...figure.querySelectorAll('path.line')].find(
                p => getComputedStyle(p).strokeWidth === '2px'
                    && getComputedStyle(p).opacity !== '0');
            window.redrawn = new Promise((done, fail) => {
                setTimeout(() => fail(new Error('no curve was redrawn')), 10000);
                document.addEventListener('keydown', () => { window.pressed = performance.now(); },
                                          {capture: true, once: true});
                new MutationObserver((_, o) => { o.disconnect();
                    requestAnimationFrame(() => done(performance.now() - window.pressed)); })
                .observe(path, {attributes: true, attributeFilter: ['d']}); }); }""")
        lab.page.keyboard.press("ArrowLeft" if step % 2 else "ArrowRight")
        times.append(lab.page.evaluate("() => window.redrawn"))
        lab.page.wait_for_timeout(300)
    told("key press to redrawn curve", times)
    assert len(times) == 20
