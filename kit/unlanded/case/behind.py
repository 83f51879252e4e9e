"""The tables of a case about its residual-current device: the device, what leaks behind it, a log.

Each class is one table of the file; values come out in base SI.
"""

from __future__ import annotations

import math
from dataclasses import replace
from typing import Annotated, Any, Literal, Self

from pydantic import BeforeValidator, Field, ValidationInfo, field_validator, model_validator

from ..errors import Mistake, Refused, nearest
from ..reference.devices import Device
from ..reference.equipment import equipment
from ..reference.records import Value
from ..study.run import Run
from ..study.standing import Leak, capacitive_leak, equipment_leak, resistive_leak
from .fields import (
    Capacitance,
    Counts,
    Current,
    Frequency,
    Lead,
    Length,
    Line,
    LinearCapacitance,
    Resistance,
    Share,
    Table,
    Title,
    told_here,
    vocabulary,
    written,
)

_KINDS = ("equipment", "current", "capacitance", "resistance", "length", "high_frequency")
_SHARED = ("spread", "balanced", "unknown")


class DeviceTable(Table):
    """`[device]`: the residual-current device in front of the run."""

    rated: Current = Field(examples=["30 mA"])
    kind: Literal["general", "delayed", "personnel", "equipment"] = "general"
    waveform: Literal["AC", "A", "F", "B"] | None = None
    ramp_test: Current | None = None
    ramp_step: Current | None = None

    @model_validator(mode="after")
    def _makes_a_device(self) -> Self:
        if self.ramp_step is not None and self.ramp_test is None:
            raise Refused("ramp_step", "goes with ramp_test, which is not given")
        try:
            self.device()
        except Refused as refusal:
            raise Refused.all_of(
                replace(m, place=m.place.rpartition(", ")[2]) for m in refusal.mistakes) from None
        return self

    def device(self) -> Device:
        """The record that the study uses."""
        return Device(self.rated, self.kind, self.waveform, self.ramp_test, self.ramp_step or 0.0)


class Amperes(Table):
    """A current with the limits it may lie in; a current alone is its own limits."""

    likely: Current = Field(examples=["1.2 mA"])
    low: Current | None = None
    high: Current | None = None

    @model_validator(mode="before")
    @classmethod
    def _current_alone(cls, data: Any) -> Any:
        return data if isinstance(data, dict) else {"likely": data}

    @model_validator(mode="after")
    def _rising(self) -> Self:
        if not (self.low or 0.0) <= self.likely <= (self.high or math.inf):
            raise Refused("", "low, likely and high must be in rising order")
        return self

    @property
    def limits(self) -> tuple[float, float, float]:
        """Likely, low and high [A]."""
        low = self.likely if self.low is None else self.low
        return self.likely, low, self.likely if self.high is None else self.high


def _known_class(given: Any) -> Value:
    if not isinstance(given, str):
        raise Refused("", "must be text in quotes", given=written(given))
    try:
        return equipment(given)
    except Refused as refusal:
        raise told_here(refusal) from None


class Standing(Table):
    """`[[standing]]`: one kind of thing that leaks behind the device, besides the run itself.

    It is one of: `equipment` (a class), `current` (measured, of one piece), `capacitance` (of a
    filter, from a line to earth), `resistance` (of a heater or damp insulation), `length` (of
    other cable); a drive gives `high_frequency` with its band, besides one of these or alone.
    """

    name: Title = Field(examples=["desk computers"])
    equipment: Annotated[Value, BeforeValidator(_known_class)] | None = None
    current: Amperes | None = None
    lead_degrees: Lead | None = None
    capacitance: Capacitance | None = None
    resistance: Resistance | None = None
    length: Length | None = None
    capacitance_per_metre: LinearCapacitance | None = None
    tolerance: Share = 0.0
    high_frequency: Current | None = None
    lowest_frequency: Frequency = 2e3
    highest_frequency: Frequency = 150e3
    line: Line = "unknown"
    count: Counts = 1
    use: Share = 1.0

    @field_validator("line")
    @classmethod
    def _known_line(cls, line: str, info: ValidationInfo) -> str:
        words = (*vocabulary(info).phases, *_SHARED)
        if line not in words:
            raise Refused("", "is not a line of this case", given=line, hint=nearest(line, words))
        return line

    @model_validator(mode="after")
    def _one_kind(self) -> Self:
        if found := tuple(self._mistakes()):
            raise Refused.all_of(found)
        return self

    def _mistakes(self) -> list[Mistake]:
        found = []
        given = self.model_fields_set
        kinds = [k for k in _KINDS if k in given]
        if not kinds or len([k for k in kinds if k != "high_frequency"]) > 1:
            found.append(Mistake("", f"must give one of {', '.join(_KINDS)}", ", ".join(kinds)))
        for key, needs in (("lead_degrees", {"current"}), ("capacitance_per_metre", {"length"}),
                           ("tolerance", {"capacitance", "resistance", "length"}),
                           ("lowest_frequency", {"high_frequency"}),
                           ("highest_frequency", {"high_frequency"})):
            if key in given and not needs & given:
                found.append(Mistake(key, f"goes with {' or '.join(sorted(needs))}"))
        if self.resistance == 0:
            found.append(Mistake("resistance", "must be above 0 Ω"))
        if self.lowest_frequency > self.highest_frequency:
            found.append(Mistake("highest_frequency", "must not be below lowest_frequency"))
        return found

    def leak(self, run: Run) -> Leak:
        """As the study has it; other cable leaks per metre what `run` does unless it says."""
        return replace(
            self._fundamental(run), line=self.line, count=self.count, use=self.use,
            fast=self.high_frequency or 0.0,
            band=(self.lowest_frequency, self.highest_frequency))

    def _fundamental(self, run: Run) -> Leak:
        limits = {"low": 1 - self.tolerance, "high": 1 + self.tolerance}
        if self.equipment is not None:
            v = self.equipment
            return equipment_leak(self.name, v.likely, None, low=v.low / v.likely,
                                  high=v.high / v.likely)
        if self.current is not None:
            likely, low, high = self.current.limits
            lead = None if self.lead_degrees is None else math.radians(self.lead_degrees)
            return equipment_leak(self.name, likely, lead, low=low / likely, high=high / likely)
        if self.capacitance is not None:
            return capacitive_leak(self.name, self.capacitance, run.supply, **limits)
        if self.resistance is not None:
            return resistive_leak(self.name, self.resistance, run.supply, **limits)
        if self.length is not None:
            per_metre = self.capacitance_per_metre
            if per_metre is None:
                per_metre = capacitance_per_metre(run)
            return capacitive_leak(self.name, per_metre * self.length, run.supply, **limits)
        return Leak(self.name, {})


def capacitance_per_metre(run: Run) -> float:
    """Of a line to earth, as the run's own residual current has it [F/m]."""
    omega = 2 * math.pi * run.frequency
    return abs(run.residual) / (omega * run.supply.voltage * run.length)


class LogTable(Table):
    """`[log]`: a CSV of residual or protective-conductor current, beside the case."""

    file: Title = Field(examples=["second-floor-log.csv"])
    zone: Title | None = None
    step: Current | None = None
