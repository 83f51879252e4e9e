"""A load that contacts switch: which cores of the cable have which part in it."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Annotated, ClassVar, Self

from pydantic import BeforeValidator, Field, model_validator

from ..errors import Mistake, Refused
from ..study.arrangements import NEEDS, WITH_NEUTRAL, Cores, Word
from ..study.comparison import Switched
from .fields import KnownCore, SupplyLine, Table, entries
from .terminations import Load

_PARTS = ("live", "switched", "neutral")


class SwitchedLoad(Load):
    """A load by its impedance or nameplate, or, as a lamp may be, by its name alone."""

    _may_be_bare: ClassVar[bool] = True


class Switching(Table):
    """`[run.switching]`: the arrangement of a load's contacts, which are drawn open.

    It gives both ends of the cores that have a part in it.
    """

    arrangement: Word = Field(examples=["two-way"])
    live: KnownCore | None = Field(None, examples=["brown"])
    switched: KnownCore | None = Field(None, examples=["black"])
    travellers: Annotated[tuple[KnownCore, ...], BeforeValidator(entries)] = Field(
        (), examples=['["black", "grey"]'])
    neutral: KnownCore | None = Field(None, examples=["blue"])
    line: SupplyLine | None = None
    load: SwitchedLoad = Field(examples=['{name = "lamp"}'])

    @model_validator(mode="after")
    def _each_part_once(self) -> Self:
        if found := tuple(self._mistakes()):
            raise Refused.all_of(found)
        return self

    def _mistakes(self) -> Iterator[Mistake]:
        word = self.arrangement
        travel = word == "two-way"
        needed = ("travellers",) if travel else NEEDS[word]
        allowed = {*needed, *(("neutral",) if word in WITH_NEUTRAL else ())}
        for part in (*_PARTS, "travellers"):
            if part in self.model_fields_set and part not in allowed:
                yield Mistake(part, f"has no part in the arrangement {word}", "",
                              f"it takes {' and '.join(needed)}")
            elif part in needed and not getattr(self, part):
                example = type(self).model_fields[part].examples or [""]
                shown = example[0] if travel else f'"{example[0]}"'
                yield Mistake(part, f"is missing: the arrangement {word} needs it", "",
                              f"for example {part} = {shown}")
        if travel and self.travellers and len(self.travellers) != 2:
            yield Mistake("travellers", "must be two cores", ", ".join(self.travellers))
        names = [n for n in (self.live, self.switched, *self.travellers, self.neutral) if n]
        for name in dict.fromkeys(n for n in names if names.count(n) > 1):
            yield Mistake("", "a core can have one part only", name)

    @property
    def cores(self) -> Cores:
        """Who has which part; of two travellers the first is live."""
        if self.travellers:
            live, switched = self.travellers
            return Cores(live, switched, self.neutral)
        assert self.live is not None
        return Cores(self.live, self.switched, self.neutral)

    def made(self, *, frequency: float, line: str) -> Switched:
        """As the study has it, on the first `line` of the supply unless another is given."""
        return Switched(self.arrangement, self.cores, self.load.burden(frequency=frequency),
                        self.line or line, self.load.name)
