"""The memo: what goes in, a look at its pages, and the button that writes it. Over `memo_model`."""

from __future__ import annotations

import datetime
from collections.abc import Callable, Sequence
from functools import partial
from pathlib import Path
from typing import Any

import ipywidgets as w

from ..errors import Refused
from ..report.figure import Figure
from ..report.folder import Contents
from .look import alert, said
from .memo_model import PAPERS, WORDS, MemoModel
from .panel import Panel
from .work import Work

_WIDE = {"description_width": "9em"}
_LINE = {"width": "26em"}


class MemoPanel(Panel):
    """Choose, preview, and write Word and PDF."""

    def build(self) -> Sequence[w.Widget]:
        """What goes in on the left, how it is written on the right, and the pages below."""
        self.model = MemoModel(self.desk)
        self.added = w.VBox()
        self.work = Work(self._tell)
        self.state = w.HTML()
        self._pages: tuple[bytes, ...] = ()
        columns = w.HBox([w.VBox(self._chosen()), w.VBox(self._written())],
                         layout={"flex_flow": "wrap", "grid_gap": "24px"})
        pages = self._looked_at()
        self._fit()
        self._tell(None)
        return [columns, w.HBox([self.preview, self.write, self.bar, self.halt]), self.state,
                *pages]

    def _chosen(self) -> list[w.Widget]:
        self.chapters = {}
        for chapter, words in WORDS.items():
            if chapter in self.model.chapters:
                box = w.Checkbox(description=words, indent=False, layout=_LINE)
                box.observe(self._doing(partial(self.model.choose, chapter)), "value")
                self.chapters[chapter] = box
        return [w.HTML("<b>Parts</b> (circuit, cautions, assumptions and sources always go in)"),
                *self.chapters.values(), w.HTML("<b>Added from the panels</b>"), self.added]

    def _written(self) -> list[w.Widget]:
        self.names = {}
        for key, words in (("prepared_by", "Prepared by"), ("checked_by", "Checked by")):
            box = w.Text(description=words, continuous_update=False, style=_WIDE, layout=_LINE)
            box.observe(self._doing(partial(self.model.sign, key)), "value")
            self.names[key] = box
        self.date = w.DatePicker(description="Date", value=datetime.date.today(), style=_WIDE,
                                 layout=_LINE)
        self.paper = w.Dropdown(description="Paper", options=list(PAPERS), style=_WIDE,
                                layout=_LINE)
        self.template = w.Text(description="Word template", placeholder="a firm's own .docx",
                               continuous_update=False, style=_WIDE, layout=_LINE)
        self.folder = w.Text(description="Into folder", continuous_update=False, style=_WIDE,
                             layout=_LINE)
        self.overwrite = w.Checkbox(description="Replace an older memo in that folder",
                                    indent=False, layout=_LINE)
        return [*self.names.values(), self.date, self.paper, self.template, self.folder,
                self.overwrite]

    def _looked_at(self) -> list[w.Widget]:
        self.preview = w.Button(description="Preview", icon="eye",
                                tooltip="Set the memo and look at its pages; nothing is written")
        self.write = w.Button(description="Write Word and PDF", icon="file-text",
                              layout={"width": "13em"},
                              tooltip="Write the memo into the folder: Word, PDF, figures, tables")
        self.bar = w.FloatProgress(min=0.0, max=1.0, description="Memo", layout={"width": "20em"})
        self.halt = w.Button(description="Stop", icon="stop", layout={"width": "6em"},
                             tooltip="Stop setting the preview")
        self.page = w.BoundedIntText(description="Page", min=1, max=1, value=1,
                                     layout={"width": "11em"}, style={"description_width": "4em"})
        self.sheet = w.Image(format="png", layout={"max_width": "720px",
                                                   "border": "1px solid #999"})
        self.page.layout.display = self.sheet.layout.display = "none"
        self.preview.on_click(lambda _: self._look())
        self.write.on_click(lambda _: self._write())
        self.halt.on_click(lambda _: self._halt())
        self.page.observe(lambda _: self._turn(), "value")
        return [self.page, self.sheet]

    def renew(self) -> None:
        """Show the case as it is now; pages that were set before are marked as out of date."""
        self.model.read_case()
        self._fit()
        if self._pages:
            self.state.value = said("The pages below are of the case before the change.")

    def figures(self) -> tuple[Figure, ...]:
        """None: the memo is no one picture."""
        return ()

    def text(self) -> str:
        """The memo's parts and its summary."""
        return self.model.text()

    _quiet = False

    def _fit(self) -> None:
        """Show what the case says of its memo."""
        chosen = self.desk.case.content.memo
        self._quiet = True
        for chapter, box in self.chapters.items():
            box.value = self.model.chapters[chapter]
        for key, box in self.names.items():
            box.value = getattr(chosen, key)
        self._quiet = False
        stem = f"{self.desk.path.stem}-memo"
        if getattr(self, "_stem", "") != stem:
            self._stem = self.folder.value = stem
        self.added.children = [self._entry(k, words) for k, words in enumerate(self.model.added)
                               ] or [w.HTML("Nothing yet: “Into the memo” is below every panel.")]

    def _entry(self, number: int, words: str) -> w.Widget:
        out = w.Button(icon="trash", layout={"width": "3em"},
                       tooltip=f"Take no. {number + 1} out of the memo")
        out.on_click(lambda _: self.guarded(lambda: self.desk.take_from_memo(number)))
        return w.HBox([out, w.HTML(said(f"{number + 1}. {words}"))])

    def _doing(self, action: Callable[[Any], None]) -> Callable[[dict[str, Any]], None]:
        """What a control does when the engineer, and not the panel, changes it."""
        def change(event: dict[str, Any]) -> None:
            if not self._quiet:
                self._guard(lambda: action(event["new"]))
        return change

    def _guard(self, action: Callable[[], None]) -> None:
        try:
            action()
        except Refused as refusal:
            self.state.value = alert(str(refusal))
            return
        if not self._pages:
            self.state.value = ""

    def _contents(self) -> Contents:
        if self.date.value is None:
            raise Refused("date", "is missing")
        return self.model.contents(date=self.date.value, paper=PAPERS[self.paper.value],
                                   template=self.template.value)

    def _look(self) -> None:
        self.state.value = said("Setting the memo …")
        self.halt.layout.display = ""
        self.work.start(lambda progress: self.model.pages(self._contents(), progress), self._show,
                        self._stopped)

    def _write(self) -> None:
        folder, overwrite = self.folder.value, self.overwrite.value
        self.state.value = said("Writing the memo …")
        self.work.start(lambda _: self.model.write(folder, self._contents(), overwrite=overwrite),
                        self._wrote, self._stopped)
        self.halt.layout.display = "none"  # a folder is written whole or not at all

    def _show(self, pages: tuple[bytes, ...]) -> None:
        self._pages = pages
        self.page.max = len(pages)
        self.page.layout.display = self.sheet.layout.display = ""
        self.state.value = said(f"{len(pages)} pages.")
        self._turn()

    def _turn(self) -> None:
        if self._pages:
            self.sheet.value = self._pages[self.page.value - 1]

    def _wrote(self, files: tuple[Path, ...]) -> None:
        here = [f.name for f in files if f.parent.name == Path(self.folder.value.strip()).name]
        self.state.value = said(f"Written to {self.folder.value.strip()}: {', '.join(here)}, and "
                                f"{len(files) - len(here)} files of figures and tables.")

    def _halt(self) -> None:
        self.work.stop()
        self._stopped("Stopped.")

    def _stopped(self, sentence: str) -> None:
        self._tell(None)
        self.state.value = alert(sentence)

    def _tell(self, share: float | None) -> None:
        self.bar.layout.display = "none" if share is None else ""
        if share is None:
            self.halt.layout.display = "none"
        else:
            self.bar.value = share
