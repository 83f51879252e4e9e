"""The ends of the run of a case: what each conductor meets there."""

from __future__ import annotations

import math
from typing import Any, ClassVar, Self

from pydantic import Field, model_validator

from ..errors import Mistake, Refused
from ..physics.burden import Burden
from .fields import (
    Capacitance,
    Inductance,
    KnownCore,
    Power,
    Resistance,
    Return,
    Share,
    SupplyWord,
    Table,
    Title,
    Voltage,
    told_here,
)

_IMPEDANCE = {"resistance", "inductance", "capacitance", "front_resistance"}


class Load(Table):
    """What closes two conductors at an end: an impedance, or a nameplate's power."""

    _may_be_bare: ClassVar[bool] = False
    name: Title = "load"
    resistance: Resistance | None = None
    inductance: Inductance = 0.0
    capacitance: Capacitance = 0.0
    front_resistance: Resistance = 0.0
    power: Power | None = Field(None, examples=["120 W"])
    apparent_power: Power | None = Field(None, examples=["2.5 VA"])
    power_factor: Share = 1.0
    voltage: Voltage | None = Field(None, examples=["230 V"])

    @model_validator(mode="after")
    def _one_description(self) -> Self:
        given = self.model_fields_set
        nameplate, impedance = given & {"power", "apparent_power"}, given & _IMPEDANCE
        if not nameplate and (alone := given & {"voltage", "power_factor"}):
            raise Refused(min(alone), "goes with power or apparent_power, and neither is given")
        if not (nameplate or impedance - {"front_resistance"} or self._may_be_bare):
            raise Refused("", "says nothing: give an impedance, or power, or apparent_power",
                          hint='for example resistance = "390 ohm"')
        if not nameplate:
            self._impedance()
            return self
        if len(nameplate) == 2 or impedance:
            raise Refused("", "is described twice: give an impedance, or power, or apparent_power")
        if self.voltage is None:
            raise Refused("voltage", "is missing: the power belongs to a rated voltage",
                          hint='for example voltage = "230 V"')
        if self.power_factor == 0 and self.power is not None:
            raise Refused("power_factor", "must be above 0 where power is given")
        return self

    @property
    def bare(self) -> bool:
        """Whether nothing but its name is given."""
        return self.model_fields_set <= {"name"}

    def burden(self, *, frequency: float) -> Burden:
        """The load as a burden; a nameplate's power is a resistance and inductance in series."""
        if self.voltage is None:
            return self._impedance()
        if self.apparent_power is None:
            assert self.power is not None
            impedance = self.voltage**2 * self.power_factor / self.power
        else:
            impedance = self.voltage**2 / self.apparent_power
        reactance = impedance * math.sqrt(1 - self.power_factor**2)
        return Burden(impedance * self.power_factor, reactance / (2 * math.pi * frequency))

    def _impedance(self) -> Burden:
        """Refused at the load itself where it is no burden."""
        resistance = self.resistance
        if resistance is None:
            resistance = 0.0 if "inductance" in self.model_fields_set else math.inf
        try:
            return Burden(resistance, self.inductance, self.capacitance, self.front_resistance)
        except Refused as refusal:
            raise told_here(refusal) from None


class Termination(Table):
    """What a conductor meets at an end: a word of the supply, another conductor, or a load."""

    at: SupplyWord | None = None
    joined: KnownCore | None = None
    load: Load | None = None
    to: Return | None = Field(None, examples=["blue"])

    @model_validator(mode="before")
    @classmethod
    def _word_alone(cls, data: Any) -> Any:
        return data if isinstance(data, dict) else {"at": data}

    @model_validator(mode="after")
    def _one_kind(self) -> Self:
        if sum(x is not None for x in (self.at, self.joined, self.load)) != 1:
            raise Refused("", 'must be one of: a word of the supply, {joined = "…"}, or '
                              '{load = {…}, to = "…"}')
        if (self.load is None) != (self.to is None):
            raise Refused("to", "goes with a load, and a load with what it is connected to")
        return self


class Ends(Table):
    """`[run.ends]`: each end by conductor; a conductor that is not named is open there."""

    near: dict[KnownCore, Termination] = Field(
        default_factory=dict, examples=['{brown = "L", blue = "N"}'])
    far: dict[KnownCore, Termination] = Field(default_factory=dict)

    @model_validator(mode="after")
    def _not_to_itself(self) -> Self:
        found = [
            Mistake(f'{end}."{name}"', "cannot be connected to itself", name)
            for end, terminations in (("near", self.near), ("far", self.far))
            for name, t in terminations.items()
            if name in (t.joined, t.to)
        ]
        if found:
            raise Refused.all_of(found)
        return self
