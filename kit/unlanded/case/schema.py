"""What may be written in a case file. Each class is one table of it; values come out in base SI.

A field's `examples` are what a refusal offers where the key is missing.
"""

from __future__ import annotations

import math
from dataclasses import replace
from typing import Annotated, Any, Literal, Self

from pydantic import (
    BaseModel,
    BeforeValidator,
    ConfigDict,
    Field,
    StrictBool,
    StrictInt,
    ValidationInfo,
    ValidatorFunctionWrapHandler,
    field_validator,
    model_validator,
)

from ..errors import Mistake, Refused, nearest
from ..physics.burden import Burden
from ..reference.instruments import INSTRUMENTS, Instrument, Kind, custom_instrument
from ..reference.insulation import COVERS, MATERIALS, thickness
from ..reference.sizes import Size, Stranding, conductor_size
from .fields import (
    Capacitance,
    CoreName,
    CoreNames,
    Current,
    Frequency,
    Gap,
    Inductance,
    InstrumentKey,
    KnownCore,
    Length,
    Line,
    LinearResistance,
    Notes,
    Permittivity,
    Point,
    Position,
    Power,
    Resistance,
    Resolution,
    Return,
    Share,
    Shown,
    SupplyWord,
    Voltage,
    Width,
    entries,
    vocabulary,
)

BARE = "bare"


class Table(BaseModel):
    """A table whose keys are all known; it tells the vocabulary which table it reads."""

    model_config = ConfigDict(extra="forbid", frozen=True, arbitrary_types_allowed=True)

    @model_validator(mode="before")
    @classmethod
    def _note_table(cls, data: Any, info: ValidationInfo) -> Any:
        if isinstance(data, dict):
            vocabulary(info).tables[id(data)] = cls
        return data


class Supply(Table):
    """`[supply]`: what feeds the run."""

    voltage: Voltage = Field(examples=["230 V"])
    frequency: Frequency = Field(examples=["50 Hz"])
    phases: Literal[1, 2, 3] = Field(1, examples=[1])


class Limits(Table):
    """A pure number with the limits it may lie in; a number alone is its own limits."""

    likely: Permittivity = Field(examples=[4.8])
    low: Permittivity | None = None
    high: Permittivity | None = None

    @model_validator(mode="before")
    @classmethod
    def _number_alone(cls, data: Any) -> Any:
        return data if isinstance(data, dict) else {"likely": data}

    @model_validator(mode="after")
    def _rising(self) -> Self:
        if not self.at("low") <= self.likely <= self.at("high"):
            raise Refused("", "low, likely and high must be in rising order",
                          given=f"{self.at('low'):g}, {self.likely:g}, {self.at('high'):g}")
        return self

    def at(self, which: Literal["low", "likely", "high"]) -> float:
        """The limit of that name."""
        value = getattr(self, which)
        return self.likely if value is None else float(value)


def _here(refusal: Refused) -> Refused:
    """A refusal of a lower floor, told at the key under validation."""
    return Refused.all_of(replace(m, place="") for m in refusal.mistakes)


def _size(given: Any, info: ValidationInfo) -> Size:
    try:
        return conductor_size(given, stranding=info.data.get("stranding", "stranded"))
    except Refused as refusal:
        raise _here(refusal) from None


def _nominal_thickness(kind: str, size: Size) -> float:
    try:
        return thickness(kind, size).likely
    except Refused as refusal:
        raise _here(refusal) from None


class Wire(Table):
    """The metal and cover of a core: `type` gives insulation and thickness, or both are given.

    Fields are validated in this order, and each may read those before it.
    """

    stranding: Stranding = Field(examples=["flexible"])
    conductor: Size = Field(examples=["2.5 mm²"])
    type: Line | None = Field(None, examples=["H05VV"])
    insulation: Line | None = Field(None, validate_default=True, examples=["PVC"])
    thickness: Width | None = Field(None, validate_default=True, examples=["0.8 mm"])
    permittivity: Limits | None = Field(None, examples=[4.8])

    @field_validator("conductor", mode="before")
    @classmethod
    def _size(cls, given: Any, info: ValidationInfo) -> Size:
        return _size(given, info)

    @field_validator("type")
    @classmethod
    def _known_type(cls, given: str | None) -> str | None:
        if given is not None and given not in COVERS:
            raise Refused("", "is not a known cable type", given=given,
                          hint=nearest(given, COVERS))
        return given

    @field_validator("insulation")
    @classmethod
    def _known_material(cls, given: str | None, info: ValidationInfo) -> str | None:
        if given is None:
            if info.data.get("type"):
                return COVERS[info.data["type"]].material
            if "type" in info.data:
                raise Refused("", 'is missing: give the cable "type", or "insulation" and '
                                  '"thickness"', hint='for example type = "H07V"')
            return None
        if given != BARE and given not in MATERIALS:
            raise Refused("", "is not a known material", given=given,
                          hint=nearest(given, [*MATERIALS, BARE]))
        return given

    @field_validator("thickness", mode="wrap")
    @classmethod
    def _looked_up(
        cls, given: Any, check: ValidatorFunctionWrapHandler, info: ValidationInfo
    ) -> float | None:
        if given is not None:
            return float(check(given))
        read = info.data
        if not {"type", "conductor", "insulation"} <= set(read) or read["insulation"] == BARE:
            return None
        if read["type"] is None:
            raise Refused("", "is missing", hint='for example thickness = "0.8 mm"')
        return _nominal_thickness(read["type"], read["conductor"])

    @property
    def cover(self) -> float:
        """Thickness of the cover [m], 0 for a bare wire."""
        return self.thickness or 0.0

    def cover_permittivity(self, which: Literal["low", "likely", "high"]) -> float:
        """As given, or that limit of the material's range; 1 for a bare wire."""
        if self.permittivity is not None:
            return self.permittivity.at(which)
        if self.insulation in (None, BARE):
            return 1.0
        return float(getattr(MATERIALS[str(self.insulation)].permittivity, which))


class Cable(Wire):
    """What the layouts of equal cores have in common; `filler` is what lies between them."""

    cores: CoreNames = Field(examples=['["brown", "blue", "green-yellow"]'])
    filler_permittivity: Permittivity = 1.0

    @property
    def names(self) -> tuple[str, ...]:
        """The cores, in the file's order."""
        return self.cores


class LaidUp(Cable):
    """2 to 5 cores touching on a circle."""

    layout: Literal["laid up"]


class Control(Cable):
    """7 or 19 cores in layers round a centre core, the first named."""

    layout: Literal["control"]


class FlatTwin(Cable):
    """Two cores with a bare earth between, named in that order."""

    layout: Literal["flat twin and earth"]
    earth_conductor: Size = Field(examples=["1.5 mm²"])

    @field_validator("earth_conductor", mode="before")
    @classmethod
    def _earth_size(cls, given: Any, info: ValidationInfo) -> Size:
        return _size(given, info)


class Loose(Cable):
    """Separate singles, those under `unlike` differing from the rest."""

    unlike: dict[KnownCore, Wire] = Field(default_factory=dict)

    def wire(self, name: str) -> Wire:
        """The wire of that name."""
        return self.unlike.get(name, self)


class Singles(Loose):
    """Singles side by side, centres `spacing` apart, or touching."""

    layout: Literal["singles"]
    spacing: Width | None = Field(None, examples=["20 mm"])


class InConduit(Loose):
    """Singles lying at random in a conduit; the same seed gives the same arrangement."""

    layout: Literal["in conduit"]
    bore: Width = Field(examples=["15.8 mm"])
    wall: Literal["metal", "plastic"] = Field(examples=["metal"])
    seed: Annotated[StrictInt, Field(ge=0, lt=2**32)] = 1


class FreeConductor(Table):
    """`[[run.cable.conductors]]`: a conductor where it lies."""

    name: CoreName = Field(examples=["brown"])
    x: Position = Field(examples=["0 mm"])
    y: Position = Field(examples=["5 mm"])
    diameter: Width = Field(examples=["1.78 mm"])
    cover_diameter: Width | None = Field(None, examples=["3.4 mm"])
    permittivity: Limits | None = Field(None, examples=[4.8])
    resistance: LinearResistance | None = Field(None, examples=["7.41 mohm/m"])


class Free(Table):
    """Conductors at given places."""

    layout: Literal["free"]
    conductors: Annotated[tuple[FreeConductor, ...], Field(min_length=1), BeforeValidator(entries)]
    filler_permittivity: Permittivity = 1.0

    @property
    def names(self) -> tuple[str, ...]:
        """The conductors, in the file's order."""
        return tuple(c.name for c in self.conductors)


AnyCable = Annotated[
    LaidUp | Control | FlatTwin | Singles | InConduit | Free, Field(discriminator="layout")
]


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


class Load(Table):
    """What closes two conductors at an end: an impedance, or a nameplate's power."""

    name: Line = "load"
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
        nameplate = [p for p in (self.power, self.apparent_power) if p is not None]
        if not nameplate:
            self.burden(frequency=50.0)
            return self
        if len(nameplate) == 2 or self.model_fields_set & {
            "resistance", "inductance", "capacitance", "front_resistance"
        }:
            raise Refused("", "is described twice: give an impedance, or power, or apparent_power")
        if self.voltage is None:
            raise Refused("voltage", "is missing: the power belongs to a rated voltage",
                          hint='for example voltage = "230 V"')
        if self.power_factor == 0 and self.power is not None:
            raise Refused("power_factor", "must be above 0 where power is given")
        return self

    def burden(self, *, frequency: float) -> Burden:
        """The load as a burden; a nameplate's power is a resistance and inductance in series."""
        if self.voltage is None:
            resistance = math.inf if self.resistance is None else self.resistance
            return Burden(resistance, self.inductance, self.capacitance, self.front_resistance)
        if self.apparent_power is None:
            assert self.power is not None
            impedance = self.voltage**2 * self.power_factor / self.power
        else:
            impedance = self.voltage**2 / self.apparent_power
        reactance = impedance * math.sqrt(1 - self.power_factor**2)
        return Burden(impedance * self.power_factor, reactance / (2 * math.pi * frequency))


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

    near: dict[KnownCore, Termination] = Field(examples=['{brown = "L", blue = "N"}'])
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


class RunTable(Table):
    """`[run]`: the cable, what surrounds it, how long it is, and its two ends."""

    length: Length = Field(examples=["85 m"])
    cable: AnyCable = Field(examples=['{layout = "laid up", …}'])
    surround: AnySurround | None = None
    ends: Ends = Field(examples=['{near = {brown = "L", blue = "N"}}'])

    @model_validator(mode="after")
    def _one_surround(self) -> Self:
        if isinstance(self.cable, InConduit) and self.cable.wall == "metal" and self.surround:
            raise Refused("surround", "is given twice: a metal conduit is the surround itself")
        return self


class OwnInstrument(Table):
    """`[[own_instruments]]`: an instrument from its data sheet."""

    key: Line = Field(examples=["my-meter"])
    name: Line = Field(examples=["meter from the van"])
    kind: Kind = "digital"
    resistance: Resistance = math.inf
    capacitance: Capacitance = 0.0
    inductance: Inductance = 0.0
    percent: Share = 0.0
    counts: Annotated[StrictInt, Field(ge=0, le=10_000)] = 0
    resolution: Resolution = 0.1
    full_scale: Voltage = 1000.0
    threshold: Voltage | None = None
    tolerance: Share = 0.0

    @field_validator("key")
    @classmethod
    def _new_key(cls, key: str) -> str:
        if key in INSTRUMENTS:
            raise Refused("", "is already an instrument of the kit", given=key,
                          hint="take another key")
        return key

    @model_validator(mode="after")
    def _makes_an_instrument(self) -> Self:
        try:
            self.instrument()
        except Refused as refusal:
            raise Refused.all_of(
                replace(m, place=m.place.rpartition(", ")[2].replace(" ", "_"))
                for m in refusal.mistakes
            ) from None
        return self

    def instrument(self) -> Instrument:
        """The record that the study uses."""
        return custom_instrument(**dict(self))


class Sheet(Table):
    """`[sheet]`: which instruments the reading sheet shows, besides the case's own."""

    instruments: Annotated[tuple[InstrumentKey, ...], BeforeValidator(entries)] = ()


class Device(Table):
    """`[device]`: the residual-current device in front of the run."""

    rated: Current = Field(examples=["30 mA"])
    kind: Literal["general", "delayed", "personnel", "equipment"] = "general"
    waveform: Literal["AC", "A", "F", "B"] | None = None


class Reading(Table):
    """`[[readings]]`: what an instrument showed."""

    instrument: InstrumentKey = Field(examples=["digital-10M"])
    a: Point = Field(alias="from", examples=["black@far"])
    b: Point = Field(alias="to", examples=["earth"])
    shows: Shown = Field(examples=["37.2 V"])
    note: Line = ""


class CaseFile(Table):
    """The whole file."""

    title: Line = Field(examples=["Evaporator fan circuit"])
    site: Line = ""
    units: Literal["metric", "US customary"] = "metric"
    notes: Notes = ""
    supply: Supply = Field(examples=['{voltage = "230 V", frequency = "50 Hz"}'])
    run: RunTable = Field(examples=['{length = "85 m", …}'])
    sheet: Sheet = Sheet.model_construct()
    device: Device | None = None
    own_instruments: Annotated[tuple[OwnInstrument, ...], BeforeValidator(entries)] = ()
    readings: Annotated[tuple[Reading, ...], BeforeValidator(entries)] = ()
