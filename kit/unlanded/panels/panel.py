"""What every panel has: the case on top, its figures live, its numbers as text, its buttons."""

from __future__ import annotations

import base64
import tempfile
from collections.abc import Callable, Sequence
from pathlib import Path
from typing import Any

import ipywidgets as w

from ..errors import Refused
from ..report.figure import Figure
from .desk import Desk, cases_beside
from .look import CAUTION, STYLE, said, table_html
from .quantity import alert

__all__ = ["Panel", "said", "table_html"]


class Panel(w.VBox):  # type: ignore[misc]
    """A panel over one case. A subclass builds its view in `build` and renews it in `renew`.

    A notebook shows it as one bundle: the live widget; a picture, for where no widget can live;
    and the key numbers as text, which is what a rerun compares and a screen reader reads.
    """

    def __init__(self, case: str | Path | Desk) -> None:
        self.desk = case if isinstance(case, Desk) else Desk(case)
        self._bar = CaseBar(self.desk)
        self.message = w.HTML()
        self.body = w.VBox(self.build())
        self.body.add_class("unlanded-body")
        super().__init__([w.HTML(STYLE), self._bar, self.message, self.body, w.HTML(CAUTION)])
        self.add_class("unlanded-panel")
        self.desk.observe(lambda _: self.guarded(self.renew), "case")

    def build(self) -> Sequence[w.Widget]:
        """The widgets of the panel, top to bottom, showing the case as it is."""
        raise NotImplementedError

    def renew(self) -> None:
        """Show the case as it is now."""
        raise NotImplementedError

    def figures(self) -> tuple[Figure, ...]:
        """The figures as they stand; the first one is the picture of the bundle."""
        return ()

    def text(self) -> str:
        """The key numbers with their units, a line each."""
        return ""

    def guarded(self, action: Callable[[], None]) -> None:
        """Do it; a refusal is told, and the last good picture stays, marked as out of date."""
        try:
            action()
        except Refused as refusal:
            self.message.value = alert(f"{refusal} The picture below is the last one that held.")
            self.body.add_class("unlanded-stale")
            return
        self.message.value = ""
        self.body.remove_class("unlanded-stale")

    def _repr_mimebundle_(self, **kwargs: Any) -> dict[str, Any]:
        bundle = super()._repr_mimebundle_(**kwargs)
        bundle = dict(bundle[0] if isinstance(bundle, tuple) else bundle)
        bundle["text/plain"] = self.text()
        if figures := self.figures():
            bundle["image/png"] = base64.b64encode(picture(figures[0])).decode()
        return bundle


class CaseBar(w.HBox):  # type: ignore[misc]
    """Which case is on the desk, and the buttons that read and save it."""

    def __init__(self, desk: Desk) -> None:
        self.desk = desk
        here = desk.path
        cases = list(dict.fromkeys([*(p.resolve() for p in cases_beside()), here.resolve()]))
        self.pick = w.Dropdown(description="Case", options=[(p.name, p) for p in sorted(cases)],
                               value=here.resolve(), style={"description_width": "3em"})
        self.save = w.Button(description="Save case", icon="save",
                             tooltip="Write the changes to the case file; its remarks are kept")
        self.again = w.Button(description="Read again", icon="refresh",
                              tooltip="Read the file again and drop what was not saved")
        self.state = w.HTML()
        super().__init__([self.pick, self.save, self.again, self.state])
        self.add_class("unlanded-bar")
        self.pick.observe(lambda change: self._do(lambda: desk.open(change["new"])), "value")
        self.save.on_click(lambda _: self._do(desk.save, "Saved."))
        self.again.on_click(lambda _: self._do(desk.open))
        desk.observe(lambda _: self._tell(), "unsaved")

    def _do(self, action: Callable[[], None], done: str = "") -> None:
        try:
            action()
        except Refused as refusal:
            self.state.value = alert(str(refusal))
            return
        self._tell(done)

    def _tell(self, done: str = "") -> None:
        self.state.value = said("Not saved yet." if self.desk.unsaved else done)


def picture(figure: Figure) -> bytes:
    """The figure as PNG, drawn as on paper."""
    from ..report.paper import draw

    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / "figure.png"
        draw(figure, path)
        return path.read_bytes()
