"""What every panel has: the case on top, its figures live, its numbers as text, its buttons."""

from __future__ import annotations

import base64
import tempfile
from collections.abc import Callable, Mapping, Sequence
from pathlib import Path
from typing import Any

import ipywidgets as w

from ..errors import Refused
from ..report.figure import Figure
from .case_bar import CaseBar
from .desk import Desk
from .live import LiveFigure
from .look import CAUTION, STYLE, alert, said
from .pages import Pages


class Panel(w.VBox):  # type: ignore[misc]
    """A panel over one case. A subclass builds its view in `build` and renews it in `renew`.

    A notebook shows it as one bundle: the live widget; a picture, for where no widget can live;
    and the key numbers as text, which is what a rerun compares and a screen reader reads.
    """

    pages: Pages | None = None

    def __init__(self, case: str | Path | Desk) -> None:
        self.desk = case if isinstance(case, Desk) else Desk(case)
        self.message = w.HTML()
        self.body = w.VBox(self.build())
        self.body.add_class("unlanded-body")
        self.take_away = TakeAway(self)
        if self.pages is not None:
            self.pages.observe(lambda _: self.take_away.renew(), "selected_index")
        super().__init__([w.HTML(STYLE), CaseBar(self.desk), self.message, self.body,
                          self.take_away, w.HTML(CAUTION)])
        self.add_class("unlanded-panel")
        self.desk.observe(lambda _: self._renew(), "case")

    def _renew(self) -> None:
        self.guarded(self.renew)
        self.take_away.renew()

    def build(self) -> Sequence[w.Widget]:
        """The widgets of the panel, top to bottom, showing the case as it is; none by itself."""
        return ()

    def renew(self) -> None:
        """Show the case as it is now; a panel without widgets has nothing to show."""

    def figures(self) -> tuple[Figure, ...]:
        """The figures as they stand; the first one is the picture of the bundle."""
        return tuple(live.figure for live in self.live().values())

    def live(self) -> Mapping[str, LiveFigure]:
        """The figures on the screen, by what a choice of them calls each."""
        return {}

    def offers(self) -> Sequence[tuple[str, dict[str, Any]]]:
        """What can be put into the memo now: in words, and as the case file has it."""
        return ()

    def text(self) -> str:
        """The key numbers with their units, a line each."""
        return ""

    def guarded(self, action: Callable[[], None]) -> None:
        """Do it; a refusal is told, and the last good picture stays, marked as out of date."""
        self.message.value = ""
        self.body.remove_class("unlanded-stale")
        try:
            action()
        except Refused as refusal:
            self.message.value = alert(f"{refusal} The picture below is the last one that held.")
            self.body.add_class("unlanded-stale")

    def _repr_mimebundle_(self, **kwargs: Any) -> dict[str, Any]:
        bundle = super()._repr_mimebundle_(**kwargs)
        bundle = dict(bundle[0] if isinstance(bundle, tuple) else bundle)
        bundle["text/plain"] = self.text()
        if figures := self.figures():
            bundle["image/png"] = base64.b64encode(picture(figures[0])).decode()
        return bundle


class TakeAway(w.HBox):  # type: ignore[misc]
    """Buttons that put a figure or table into the case's memo, and save pictures."""

    def __init__(self, panel: Panel) -> None:
        self._panel = panel
        narrow = {"description_width": "5em"}
        self.offer = w.Dropdown(description="Of these", style=narrow, layout={"width": "25em"})
        self.put = w.Button(description="Into the memo", icon="plus",
                            tooltip="Add it to the memo of this case; save the case to keep it")
        self.picture = w.Dropdown(description="Picture", style=narrow, layout={"width": "20em"})
        self.png = w.Button(description="Save PNG", icon="download", layout={"width": "8em"},
                            tooltip="Save the picture as it is on the screen, as PNG")
        self.svg = w.Button(description="Save SVG", icon="download", layout={"width": "8em"},
                            tooltip="Save the picture as it is on the screen, as SVG")
        self.state = w.HTML()
        self.put.on_click(lambda _: self._put())
        self.png.on_click(lambda _: self._chosen().widget.save_png(f"{self._key()}.png", scale=2))
        self.svg.on_click(lambda _: self._chosen().widget.save_svg(f"{self._key()}.svg"))
        super().__init__(layout={"flex_flow": "wrap"})
        self.add_class("unlanded-take-away")
        self.renew()

    def renew(self) -> None:
        """Offer what the panel has now."""
        offers, live = [words for words, _ in self._panel.offers()], list(self._panel.live())
        for choice, options in ((self.offer, offers), (self.picture, live)):
            if list(choice.options) != options:
                choice.options, choice.index = options, 0 if options else None
        if self._panel.pages is not None and self._panel.pages.front in live:
            self.picture.value = self._panel.pages.front
        shown = [self.offer, self.put] if offers else []
        shown += [self.picture, self.png, self.svg] if live else []
        self.children = (*shown, self.state)

    def _put(self) -> None:
        entry = dict(self._panel.offers())[self.offer.value]
        try:
            new = self._panel.desk.add_to_memo(entry)
        except Refused as refusal:
            self.state.value = alert(str(refusal))
            return
        count = len(self._panel.desk.added)
        self.state.value = said(f"Added to the memo, as no. {count}. Save the case to keep it."
                                if new else "It is in the memo already.")

    def _chosen(self) -> LiveFigure:
        return self._panel.live()[self.picture.value]

    def _key(self) -> str:
        return self._chosen().figure.key


def picture(figure: Figure) -> bytes:
    """The figure as PNG, drawn as on paper."""
    from ..report.paper import draw

    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / "figure.png"
        draw(figure, path)
        return path.read_bytes()
