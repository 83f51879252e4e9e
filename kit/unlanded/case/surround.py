"""What surrounds the cable of a case: an earthed plane, a pipe or a screen."""

from __future__ import annotations

from typing import Annotated, Any, Literal

from pydantic import Field, StrictBool, model_validator

from ..errors import Refused
from ..reference.screens import SCREEN_RESISTANCE, SCREEN_TO_EARTH
from .fields import Gap, LinearCapacitance, LinearResistance, Table, Width

_OF_A_SCREEN = ("earthed", "to_earth", "resistance")


class _EarthedAlong(Table):
    """Metal that is at 0 V all along the run."""

    @model_validator(mode="before")
    @classmethod
    def _no_ends(cls, data: Any) -> Any:
        for key in _OF_A_SCREEN:
            if isinstance(data, dict) and key in data:
                raise Refused(key, f"belongs to a screen: a {data['kind']} is taken as earthed all "
                                   "along", hint='write kind = "screen" for the cable\'s own')
        return data


class PlaneBelow(_EarthedAlong):
    """An earthed surface `gap` below the lowest cover."""

    kind: Literal["plane"]
    gap: Gap = 0.0


class PipeRound(_EarthedAlong):
    """A metal pipe that the cable lies in, `gap` from its wall, or is held in the middle of."""

    kind: Literal["pipe"]
    bore: Width = Field(examples=["20 mm"])
    gap: Gap = 0.0
    centred: StrictBool = False


class ScreenRound(Table):
    """A screen `gap` outside the outermost cover, a conductor of the run called "screen".

    `resistance` is its own end to end; `to_earth` what its outside has to earth, which counts
    where it is earthed at no end.
    """

    kind: Literal["screen"]
    gap: Gap = 0.0
    earthed: Literal["both", "near", "far", "none"] = "both"
    to_earth: LinearCapacitance = Field(SCREEN_TO_EARTH.likely, examples=["120 pF/m"])
    resistance: LinearResistance = Field(SCREEN_RESISTANCE.likely, examples=["15 ohm/km"])


AnySurround = Annotated[PlaneBelow | PipeRound | ScreenRound, Field(discriminator="kind")]
