"""What a case says of the causes of its readings, and of what was done before a reading."""

from __future__ import annotations

from typing import Annotated, Any, Literal

from pydantic import BeforeValidator, Field

from ..errors import Refused, nearest
from ..study.hypotheses import CAUSES, Cause
from ..study.observation import ACTIONS, Action
from .fields import Cost, KnownConductor, Share, Table, entries


def _word_of(kind: str, words: tuple[str, ...]) -> BeforeValidator:
    def check(given: Any) -> Any:
        if given not in words:
            raise Refused("", f"is not {kind}", given=given, hint=nearest(str(given), words))
        return given

    return BeforeValidator(check)


CauseWord = Annotated[Cause, _word_of("a cause", CAUSES)]
ActionWord = Annotated[Action, _word_of("something that can be done before a reading", ACTIONS)]
Actions = Annotated[tuple[ActionWord, ...], BeforeValidator(entries)]


class CausesTable(Table):
    """`[causes]`: on which conductors a cause is looked for, and what is thought beforehand."""

    suspects: Annotated[tuple[KnownConductor, ...], BeforeValidator(entries)] = Field(
        (), examples=[["black"]])
    shares: dict[CauseWord, Share] = Field(
        default_factory=dict, examples=['{"solid connection" = "20 %"}'])
    section: Literal["as described", "not known"] = "as described"
    costs: dict[str, Cost] = Field(
        default_factory=dict, examples=['{"far end disconnected" = 5, "coil-tester" = 1}'])
