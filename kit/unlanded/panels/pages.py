"""Pages of a panel of which only the one in front is drawn, so that a slider's step stays quick."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass

import ipywidgets as w

from ..report.figure import Figure
from .live import LiveFigure


@dataclass(frozen=True)
class Page:
    """One page: what is on it, and how it is drawn anew."""

    widgets: Sequence[w.Widget]
    draw: Callable[[], None]


class Pages(w.Tab):  # type: ignore[misc]
    """Titled pages; `draw` draws the one in front, and turning to another draws that one.

    `guarded` runs what draws and tells what it refuses.
    """

    def __init__(
        self, pages: Mapping[str, Page], guarded: Callable[[Callable[[], None]], None]
    ) -> None:
        self._pages = list(pages.values())
        self._guarded = guarded
        super().__init__([w.VBox(list(p.widgets)) for p in self._pages], titles=list(pages),
                         selected_index=0)
        self.observe(lambda _: guarded(self.draw), "selected_index")

    @property
    def front(self) -> str:
        """Title of the page in front; "" where none is."""
        return "" if self.selected_index is None else self.titles[self.selected_index]

    def draw(self) -> None:
        """Draw the page in front."""
        if self.selected_index is not None:
            self._pages[self.selected_index].draw()


class LatePicture(w.VBox):  # type: ignore[misc]
    """A figure that is made when it is first drawn; a sentence where there is none."""

    def __init__(self, nothing: str = "") -> None:
        self._nothing = nothing
        self.live: LiveFigure | None = None
        super().__init__(layout={"width": "580px"})

    def draw(self, figure: Figure | None) -> None:
        """Show a figure, or that there is none."""
        if figure is None:
            self.children = [w.HTML(f'<p class="unlanded-said">{self._nothing}</p>')]
            return
        if self.live is None:
            self.live = LiveFigure(figure)
        else:
            self.live.update(figure)
        if self.live.view not in self.children:
            self.children = [self.live.view]


def drawn(pictures: Mapping[str, LatePicture]) -> dict[str, LiveFigure]:
    """Those that have been drawn so far, by the same names."""
    return {name: late.live for name, late in pictures.items() if late.live is not None}
