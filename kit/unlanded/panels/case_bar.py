"""The bar on top of every panel: which case is on the desk, and the buttons that read and save."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import ipywidgets as w

from ..errors import Refused
from .desk import Desk, cases_beside
from .look import alert, said


class CaseBar(w.VBox):  # type: ignore[misc]
    """Picks, saves and reads the case."""

    def __init__(self, desk: Desk) -> None:
        self.desk, self._quiet = desk, False
        self.pick = w.Dropdown(description="Case", style={"description_width": "3em"},
                               layout={"width": "17em"})
        self.save = w.Button(description="Save case", icon="save", layout={"width": "8em"},
                             tooltip="Write the changes to the case file; its remarks are kept")
        self.again = w.Button(description="Read again", icon="refresh", layout={"width": "9em"},
                              tooltip="Read the file again and drop what was not saved")
        self.name = w.Text(description="or as", placeholder="another-name.toml",
                           style={"description_width": "3em"}, layout={"width": "16em"})
        self.save_as = w.Button(description="Save as", icon="copy", layout={"width": "7em"},
                                tooltip="Save under the name beside it; the case as read stays")
        self.title, self.state = w.HTML(), w.HTML()
        super().__init__([
            w.HBox([self.pick, self.save, self.again, self.name, self.save_as],
                   layout={"flex_flow": "wrap"}),
            w.HBox([self.title, self.state], layout={"flex_flow": "wrap"})])
        self.add_class("unlanded-bar")
        self.state.add_class("unlanded-state")
        self._list()
        self.pick.observe(self._picked, "value")
        self.save.on_click(lambda _: self._do(desk.save, "Saved."))
        self.again.on_click(lambda _: self._do(desk.open, "Read again."))
        self.save_as.on_click(lambda _: self._do(self._save_as, "Saved under the new name."))
        desk.observe(lambda _: self._tell(), "unsaved")
        desk.observe(lambda _: self._list(), "case")

    def _list(self) -> None:
        """Show the cases there are, and which one is on the desk."""
        here = self.desk.path.resolve()
        cases = dict.fromkeys([*(p.resolve() for p in cases_beside()), here])
        self._quiet = True
        try:
            options = tuple((p.name, p) for p in sorted(cases))
            if self.pick.options != options:
                self.pick.options = options
            self.pick.value = here
            self.title.value = said(self.desk.case.content.title)
        finally:
            self._quiet = False

    def _picked(self, change: dict[str, Path | None]) -> None:
        if not self._quiet and change["new"] is not None:
            self._do(lambda: self.desk.open(change["new"]))

    def _save_as(self) -> None:
        name = self.name.value.strip()
        if not name or Path(name).name != name:
            raise Refused("name", "must be a file name without folders", given=name,
                          hint="for example my-case.toml")
        stem = name if name.endswith(".toml") else f"{name}.toml"
        self.desk.save(self.desk.path.parent / stem)

    def _do(self, action: Callable[[], None], done: str = "") -> None:
        try:
            action()
        except Refused as refusal:
            self.state.value = alert(str(refusal))
            self._list()
            return
        self._tell(done)

    def _tell(self, done: str = "") -> None:
        self.state.value = said("Not saved yet." if self.desk.unsaved else done)
