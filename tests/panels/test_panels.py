"""The views, without a browser: they open on every site that fits, follow the case, and refuse."""

from __future__ import annotations

import asyncio
import base64
from pathlib import Path

import ipywidgets as w
import pytest

from unlanded.case.loading import load_case
from unlanded.panels.causes import CausesPanel
from unlanded.panels.margin import MarginPanel
from unlanded.panels.memo import MemoPanel
from unlanded.panels.operation import OperationPanel
from unlanded.panels.panel import Panel
from unlanded.panels.readings import ReadingPanel
from unlanded.panels.run import RunPanel

FITTING = [
    *((kind, site) for kind in (RunPanel, ReadingPanel)
      for site in ("tern-quay", "alder-mill", "heron-house", "larkmoor", "chalk-hill")),
    (CausesPanel, "tern-quay"), (MarginPanel, "heron-house"), (MarginPanel, "alder-mill"),
    (OperationPanel, "larkmoor"), (OperationPanel, "chalk-hill"), (MemoPanel, "tern-quay"),
]


def inner(widget: w.Widget) -> list[w.Widget]:
    """A widget and everything in it."""
    return [widget, *(x for child in getattr(widget, "children", ()) for x in inner(child))]


@pytest.mark.parametrize(("kind", "site"), FITTING, ids=lambda x: getattr(x, "__name__", x))
def test_opens_with_numbers_and_every_control_named(
    sites: Path, kind: type[Panel], site: str
) -> None:
    panel = kind(sites / f"{site}.toml")
    bundle = panel._repr_mimebundle_()
    assert bundle["text/plain"] == panel.text()
    assert panel.message.value == ""
    if panel.figures():
        assert base64.b64decode(bundle["image/png"]).startswith(b"\x89PNG")
    controls = [x for x in inner(panel) if isinstance(
        x, w.Text | w.Dropdown | w.IntSlider | w.Button | w.Checkbox | w.DatePicker)]
    assert len(controls) > 5
    assert [x for x in controls if not (x.description or x.tooltip)] == []


def test_picking_another_case_rebuilds_the_controls(sites: Path) -> None:
    panel = ReadingPanel(sites / "tern-quay.toml")
    bar = panel.children[1]
    bar.pick.value = (sites / "alder-mill.toml").resolve()
    assert panel.run_length.text.value == "25 ft"
    assert panel.model.pair.a == "white@far"
    assert panel.pair.value == panel.model.pair
    assert "Router cord" in bar.title.value
    panel.run_length.slider.value += 1
    assert panel.run_length.text.value.endswith(" ft")
    assert "Not saved yet." in bar.state.value


def test_case_that_does_not_fit_is_told_and_the_picture_marked(sites: Path) -> None:
    panel = MarginPanel(sites / "heron-house.toml")
    bar = panel.children[1]
    bar.pick.value = (sites / "larkmoor.toml").resolve()
    assert "has no residual-current device" in panel.message.value
    assert "unlanded-stale" in panel.body._dom_classes
    bar.pick.value = (sites / "heron-house.toml").resolve()
    assert panel.message.value == ""
    assert "unlanded-stale" not in panel.body._dom_classes


def test_save_bar(sites: Path) -> None:
    panel = RunPanel(sites / "tern-quay.toml")
    bar = panel.children[1]
    panel.run_length.text.value = "61 m"
    bar.name.value = "mine"
    bar.save_as.click()
    assert load_case(sites / "mine.toml").content.run.length == 61.0
    assert bar.pick.value == (sites / "mine.toml").resolve()
    bar.name.value = "../mine"
    bar.save_as.click()
    assert "without folders" in bar.state.value
    panel.run_length.text.value = "62 m"
    bar.again.click()
    assert panel.run_length.text.value == "61 m"


def test_into_the_memo_once(sites: Path) -> None:
    panel = ReadingPanel(sites / "tern-quay.toml")
    panel.take_away.offer.value = "Table of readings"
    panel.take_away.put.click()
    assert "as no. 1" in panel.take_away.state.value
    panel.take_away.put.click()
    assert "in the memo already" in panel.take_away.state.value
    (entry,) = panel.desk.case.content.memo.added
    assert (entry.kind, entry.meter) == ("readings", 10e6)


def test_dragged_mark_sets_the_meter(sites: Path) -> None:
    panel = ReadingPanel(sites / "tern-quay.toml")
    mark = panel.loading.mark("points", len(panel.loading.figure.points) - 1)
    assert (mark.enable_move, mark.restrict_x) == (True, True)
    for x, event in ((700e3, "drag"), (412_345.0, "drag_end")):
        mark._handle_custom_msgs(None, {"event": event, "point": {"x": x, "y": 1.0}, "index": 0})
        if event == "drag":
            assert panel.impedance.text.value == "700 kohm"
            # Where the pointer has it is the browser's to say.
            assert mark.x[0] == pytest.approx(10e6, rel=1e-9, abs=0)
    assert panel.impedance.text.value == "412 kohm"
    assert mark.x[0] == pytest.approx(412e3, rel=1e-9, abs=0)
    panel.model.bands()
    assert panel.model.table().rows[-1][0] == "your meter, 412 kΩ"


def test_bands_follow_when_the_handle_rests(sites: Path) -> None:
    panel = ReadingPanel(sites / "tern-quay.toml")

    async def main() -> None:
        panel.run_length.slider.value += 1
        assert "…" in panel.table.value
        for _ in range(100):
            await asyncio.sleep(0.1)
            if "…" not in panel.table.value:
                return

    asyncio.run(main())
    assert "…" not in panel.table.value
    assert panel.loading.figure.bands


def test_readings_table_changes_the_case(sites: Path) -> None:
    panel = CausesPanel(sites / "tern-quay.toml")
    table = panel.readings
    shows = table.rows.children[0].children[3]
    shows.value = "about 50"
    assert "The case keeps what it had." in table.message.value
    shows.value = "50.0 V"
    assert table.message.value == ""
    table.new["from"].value = "black@near"
    table.new["shows"].value = "51.2 V"
    table.add.click()
    assert [r.shows for r in panel.desk.case.content.readings] == ["50.0 V", "0.9 V", "51.2 V"]
    assert len(table.rows.children) == 3
    table.rows.children[2].children[-1].click()
    assert len(panel.desk.case.content.readings) == 2


def test_odds_follow_a_changed_reading_and_can_be_stopped(sites: Path) -> None:
    panel = CausesPanel(sites / "tern-quay.toml")

    async def main() -> None:
        panel.model.set_reading(0, "shows", "50.0 V")
        assert "unlanded-stale" in panel.body._dom_classes
        panel.halt.click()
        assert "Stopped." in panel.message.value
        panel.again.click()
        for _ in range(200):
            await asyncio.sleep(0.1)
            if "unlanded-stale" not in panel.body._dom_classes:
                return

    asyncio.run(main())
    assert "unlanded-stale" not in panel.body._dom_classes
    assert panel.working.layout.display == "none"


def test_only_the_page_in_front_is_drawn(sites: Path) -> None:
    panel = MarginPanel(sites / "heron-house.toml")
    assert list(panel.live()) == ["Standing current"]
    panel.pages.selected_index = 2
    assert list(panel.live()) == ["Standing current", "Instruments"]
    assert panel.take_away.picture.value == "Instruments"
    drawn = panel.budget.live.figure
    panel.pieces.slider.value += 1
    assert panel.budget.live.figure is drawn
    panel.pages.selected_index = 0
    assert panel.budget.live.figure is not drawn


def test_memo_panel_writes_and_tells(sites: Path, tmp_path: Path) -> None:
    panel = MemoPanel(sites / "tern-quay.toml")
    panel.chapters["causes"].value = panel.chapters["margin"].value = False
    panel.names["prepared_by"].value = "A. Engineer"
    panel.template.value = "no-such.docx"
    panel.write.click()
    assert "no-such.docx" in panel.state.value
    assert not (tmp_path / "tern-quay-memo").exists()
    panel.template.value = ""
    panel.write.click()
    assert "Written to tern-quay-memo" in panel.state.value
    assert (tmp_path / "tern-quay-memo" / "memo.pdf").exists()
    assert panel.desk.case.content.memo.prepared_by == "A. Engineer"
