"""What surrounds the cable of a case: an earthed plane, a pipe or a screen."""

from __future__ import annotations

from typing import Annotated, Literal

from pydantic import Field, StrictBool

from .fields import Gap, Table, Width


class PlaneBelow(Table):
    """An earthed surface `gap` below the lowest cover."""

    kind: Literal["plane"]
    gap: Gap = 0.0


class PipeRound(Table):
    """A metal pipe that the cable lies in, `gap` from its wall, or is held in the middle of."""

    kind: Literal["pipe"]
    bore: Width = Field(examples=["20 mm"])
    gap: Gap = 0.0
    centred: StrictBool = False


class ScreenRound(Table):
    """A screen `gap` outside the outermost cover."""

    kind: Literal["screen"]
    gap: Gap = 0.0


AnySurround = Annotated[PlaneBelow | PipeRound | ScreenRound, Field(discriminator="kind")]
