"""The readings of a case as a table that can be typed into."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from typing import Any

import ipywidgets as w

from ..case.build import case_instruments
from ..errors import Refused
from ..reference.instruments import INSTRUMENTS
from ..study.observation import ACTIONS
from .causes_model import CausesModel
from .look import alert

_WIDTHS = {"instrument": "11.5em", "from": "10em", "to": "8em", "shows": "7em", "after": "13em",
           "resistor": "9em"}
_TITLES = {"instrument": "Instrument", "from": "From", "to": "To", "shows": "Shows",
           "after": "After", "resistor": "With a resistor"}
_NOTHING = "nothing done"


class ReadingsTable(w.VBox):  # type: ignore[misc]
    """A row for each reading, each cell changing the case, and a row for the next reading.

    What the case refuses is told below; the cell keeps what was typed, the case what it had.
    """

    def __init__(self, model: CausesModel) -> None:
        self.model = model
        self._shown: object = None
        self.rows, self.message = w.VBox(), w.HTML()
        self.new = self._cells({"instrument": self._tools()[0], "to": "earth"}, "new reading", None)
        self.add = w.Button(description="Add", icon="plus", layout={"width": "6em"},
                            tooltip="Add this reading to the case")
        self.add.on_click(lambda _: self._do(self._add))
        head = w.HBox([w.HTML(f"<b>{title}</b>", layout={"width": _WIDTHS[key]})
                       for key, title in _TITLES.items()])
        super().__init__([head, self.rows, w.HBox([*self.new.values(), self.add]), self.message])
        self.add_class("unlanded-readings")
        self.renew()

    def renew(self) -> None:
        """Show the readings of the case, and the points that it has."""
        content = self.model.desk.case.content
        shown = (self.model.rows(), self._points(), self._tools(), content.run.cable.names)
        if shown == self._shown:
            return
        self._shown = shown
        rows = []
        for number, row in enumerate(self.model.rows()):
            cells = self._cells(row, f"reading {number + 1}", number)
            out = w.Button(icon="trash", layout={"width": "3em"},
                           tooltip=f"Take reading {number + 1} out of the case")
            out.on_click(lambda _, n=number: self._do(lambda: self.model.take_reading(n)))
            rows.append(w.HBox([*cells.values(), out]))
        self.rows.children = rows
        for key in ("from", "to"):
            self._offer(self.new[key], self._points())
        self._offer(self.new["instrument"], self._tools())

    def _cells(
        self, row: Mapping[str, Any], what: str, number: int | None
    ) -> dict[str, w.ValueWidget]:
        """The cells of a row; of one that is in the case already, each changes it."""
        after = "; ".join(row.get("after", ())) or _NOTHING
        options = {"instrument": self._tools(), "from": self._points(), "to": self._points(),
                   "after": (_NOTHING, *dict.fromkeys((*ACTIONS, after))) if after != _NOTHING
                   else (_NOTHING, *ACTIONS)}
        cells: dict[str, w.ValueWidget] = {}
        for key, width in _WIDTHS.items():
            value = after if key == "after" else str(row.get(key, ""))
            if key in options:
                known = options[key] if not value or value in options[key] else (
                    *options[key], value)
                cell = w.Dropdown(options=known, value=value or known[0])
            else:
                cell = w.Text(value=value, continuous_update=False)
            cell.layout.width, cell.tooltip = width, f"{_TITLES[key]}, {what}"
            if number is not None:
                cell.observe(self._changer(number, key), "value")
            cells[key] = cell
        return cells

    def _changer(self, number: int, key: str) -> Callable[[dict[str, Any]], None]:
        def change(event: dict[str, Any]) -> None:
            value = _actions(event["new"]) if key == "after" else event["new"].strip()
            self._do(lambda: self.model.set_reading(number, key, value))
        return change

    def _add(self) -> None:
        taken = {key: cell.value.strip() for key, cell in self.new.items()}
        self.model.add_reading(
            instrument=taken["instrument"], from_=taken["from"], to=taken["to"],
            shows=taken["shows"], after=_actions(taken["after"]), resistor=taken["resistor"])
        self.new["shows"].value = ""

    def _do(self, action: Callable[[], None]) -> None:
        try:
            action()
        except Refused as refusal:
            self.message.value = alert(f"{refusal} The case keeps what it had.")
            return
        self.message.value = ""

    @staticmethod
    def _offer(cell: w.Dropdown, options: tuple[str, ...]) -> None:
        if cell.options != options:
            kept = cell.value
            cell.options = options
            cell.value = kept if kept in options else options[0]

    def _points(self) -> tuple[str, ...]:
        return self.model.investigation.run.points

    def _tools(self) -> tuple[str, ...]:
        """The keys of what can be read: the sheet's first, then all others of the kit."""
        own = [t.key for t in case_instruments(self.model.desk.case)]
        others = [key for key, tool in INSTRUMENTS.items() if tool.kind != "body"]
        return tuple(dict.fromkeys([*own, *others]))


def _actions(text: str) -> list[str]:
    return [] if text == _NOTHING else text.split("; ")
