"""What a case says of its memo, `[memo]`: who signs, what is added to it, what is left out."""

from __future__ import annotations

from typing import Annotated, Literal, Self, get_args

from pydantic import BeforeValidator, Field, model_validator

from ..errors import Mistake, Refused
from ..units import si
from .causes import CauseWord
from .fields import KnownCore, Line, Point, Resistance, Table, Title, entries

Chapter = Literal["expected", "causes", "margin", "operation", "annex"]
CHAPTERS: tuple[Chapter, ...] = get_args(Chapter)
"""What can be left out; circuit, cautions, assumptions and sources are in every memo."""

# Kind -> keys that it must have, and keys that it may have.
_KEYS: dict[str, tuple[frozenset[str], frozenset[str]]] = {
    "formulas": (frozenset(), frozenset()),
    "loading": (frozenset({"from", "to", "meter"}), frozenset()),
    "length": (frozenset({"from", "to", "meter"}), frozenset()),
    "readings": (frozenset({"from", "to", "meter"}), frozenset()),
    "tried cause": (frozenset({"conductor", "cause"}), frozenset({"size"})),
    "added load": (frozenset({"leak"}), frozenset()),
    "resistor beside": (frozenset({"load", "resistor"}), frozenset()),
}


class Added(Table):
    """`[[memo.added]]`: a figure or a table that goes into the memo besides its usual ones.

    kind : "formulas", nearest to the section; of a pair (`from`, `to`) and a `meter`
    of some resistance: "loading", "length" (figures) or "readings" (a table); "tried cause", what
    a `cause` of some `size` on a `conductor` would read; "added load", more pieces of a `leak`;
    "resistor beside", what a `resistor` leaves on a `load` of `[[operation]]`.
    """

    kind: Literal["formulas", "loading", "length", "readings", "tried cause", "added load",
                  "resistor beside"]
    a: Point | None = Field(None, alias="from", examples=["black@far"])
    b: Point | None = Field(None, alias="to", examples=["earth"])
    meter: Resistance | None = Field(None, examples=["10 Mohm"])
    conductor: KnownCore | None = Field(None, examples=["black"])
    cause: CauseWord | None = Field(None, examples=["leakage to earth"])
    size: Line = Field("", examples=["200 kohm"])
    leak: Title | None = Field(None, examples=["desk computers"])
    load: Title | None = Field(None, examples=["interlock relay"])
    resistor: Resistance | None = Field(None, examples=["22 kohm"], gt=0)

    @model_validator(mode="after")
    def _keys_of_its_kind(self) -> Self:
        must, may = _KEYS[self.kind]
        names = {"a": "from", "b": "to"}
        given = {names.get(key, key) for key in self.model_fields_set} - {"kind"}
        found = [Mistake(key, f'is missing, and "{self.kind}" needs it') for key in must - given]
        found += [Mistake(key, f'does not go with "{self.kind}"') for key in given - must - may]
        if found:
            raise Refused.all_of(sorted(found, key=lambda m: m.place))
        if self.a is not None and self.a == self.b:
            raise Refused("to", "must be another point than from", given=self.b)
        if self.size:
            si(self.size, size_unit(self.cause or ""), place="size")
        return self


def size_unit(cause: str) -> str:
    """Of what a cause's size is, as `units.si` takes it."""
    return "V" if cause == "magnetic pick-up" else "ohm"


class MemoTable(Table):
    """`[memo]`: the parts of the memo that are the engineer's choice."""

    prepared_by: Line = Field("", examples=["A. Engineer"])
    checked_by: Line = Field("", examples=["B. Engineer"])
    leave_out: Annotated[tuple[Chapter, ...], BeforeValidator(entries)] = Field(
        (), examples=[["annex"]])
    added: Annotated[tuple[Added, ...], BeforeValidator(entries)] = ()
