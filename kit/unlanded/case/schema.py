"""What may be written in a case file. Each class is one table of it; values come out in base SI.

A field's `examples` are what a refusal offers where the key is missing.
"""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import replace
from typing import Annotated, Literal, Self

from pydantic import BeforeValidator, Field, ValidationInfo, field_validator, model_validator

from ..errors import Mistake, Refused, nearest
from ..reference.instruments import INSTRUMENTS, Instrument, Kind, Responds, custom_instrument
from ..study.ends import SCREEN
from ..study.readings import Pair
from .behind import DeviceTable, LogTable, Standing
from .cable import AnyCable, InConduit
from .causes import Actions, CausesTable
from .fields import (
    SHOWN_WORDS,
    AddedResistance,
    Capacitance,
    Counts,
    Frequency,
    Inductance,
    InstrumentKey,
    Length,
    Line,
    Notes,
    Order,
    Phases,
    Point,
    Resistance,
    Resolution,
    Share,
    Shown,
    SourceInductance,
    SourceResistance,
    Table,
    Title,
    Voltage,
    entries,
)
from .inputs import LoadedTable, OperationTable, SizingTable, SpreadTable
from .memo import MemoTable
from .surround import AnySurround, ScreenRound
from .switching import Switching
from .terminations import Ends, Load


class SupplyTable(Table):
    """`[supply]`: what feeds the run."""

    voltage: Voltage = Field(examples=["230 V"])
    frequency: Frequency = Field(examples=["50 Hz"])
    phases: Phases = Field(1, examples=[1])
    resistance: SourceResistance = Field(0.0, examples=["0.3 ohm"])
    inductance: SourceInductance = Field(0.0, examples=["0.5 mH"])
    harmonics: dict[Order, Share] = Field(default_factory=dict, examples=['{3 = "5 %"}'])


_NO_ENDS = Ends.model_construct()


class RunTable(Table):
    """`[run]`: the cable, what surrounds it, how long it is, and its two ends."""

    length: Length = Field(examples=["85 m"])
    cable: AnyCable = Field(examples=['{layout = "laid up", …}'])
    surround: AnySurround | None = None
    switching: Switching | None = None
    ends: Ends = Field(default_factory=lambda: _NO_ENDS, validate_default=True,
                       examples=['{near = {brown = "L", blue = "N"}}'])

    @field_validator("ends")
    @classmethod
    def _ends_are_told(cls, ends: Ends, info: ValidationInfo) -> Ends:
        if "near" in ends.model_fields_set or info.data.get("switching", True) is not None:
            return ends
        if ends is _NO_ENDS:
            raise Refused("", "is missing", hint='for example ends = {near = {brown = "L", blue = '
                                                 '"N"}}, or describe [run.switching]')
        raise Refused("near", "is missing", hint='for example near = {brown = "L", blue = "N"}')

    @property
    def screen(self) -> ScreenRound | None:
        """The cable's own screen, where it has one."""
        return self.surround if isinstance(self.surround, ScreenRound) else None

    @model_validator(mode="after")
    def _one_of_a_name(self) -> Self:
        if self.screen and SCREEN in self.cable.names:
            raise Refused("surround", "is a screen, and goes by that name itself", given=SCREEN,
                          hint="give the core of that name another")
        return self

    @property
    def loads(self) -> tuple[tuple[Load, Pair], ...]:
        """Every load at the ends, and the pair that it is on."""
        found = [(t.load, Pair(f"{core}@{end}", f"{t.to}@{end}" if t.to in self.cable.names
                              else str(t.to)))
                 for end, ends in (("near", self.ends.near), ("far", self.ends.far))
                 for core, t in ends.items() if t.load is not None]
        if self.switching is not None:
            found.append((self.switching.load,
                          self.switching.made(frequency=1.0, line="").arrangement.load))
        return tuple(found)

    @model_validator(mode="after")
    def _ends_once(self) -> Self:
        cores = self.switching.cores.names if self.switching else ()
        found = [Mistake(f'ends.{end}."{name}"', "is given by [run.switching] already", name)
                 for end, ends in (("near", self.ends.near), ("far", self.ends.far))
                 for name in ends if name in cores]
        if found:
            raise Refused.all_of(found)
        return self

    @model_validator(mode="after")
    def _one_surround(self) -> Self:
        if isinstance(self.cable, InConduit) and self.cable.wall == "metal" and self.surround:
            raise Refused("surround", "is given twice: a metal conduit is the surround itself")
        return self


class OwnInstrument(Table):
    """`[[own_instruments]]`: an instrument from its data sheet."""

    key: Title = Field(examples=["my-meter"])
    name: Title = Field(examples=["meter from the van"])
    kind: Kind = "digital"
    resistance: Resistance = math.inf
    capacitance: Capacitance = 0.0
    inductance: Inductance = 0.0
    percent: Share = 0.0
    counts: Counts = 0
    resolution: Resolution = 0.1
    full_scale: Voltage = 1000.0
    threshold: Voltage | None = None
    tolerance: Share = 0.0
    responds: Responds = "rms"

    @field_validator("key")
    @classmethod
    def _new_key(cls, key: str) -> str:
        if key in INSTRUMENTS:
            raise Refused("", "is already an instrument of the kit", given=key,
                          hint="take another key")
        return key

    @model_validator(mode="after")
    def _makes_an_instrument(self) -> Self:
        given = self.model_fields_set
        if self.kind != "proximity" and not given & {"resistance", "capacitance"}:
            raise Refused("resistance", "is missing", hint='for example resistance = "10 Mohm"')
        if "inductance" in given and "resistance" not in given:
            raise Refused("resistance", "is missing: the inductance is in series with it")
        try:
            self.instrument()
        except Refused as refusal:
            raise Refused.all_of(
                replace(m, place=_field_named(m.place)) for m in refusal.mistakes
            ) from None
        return self

    def instrument(self) -> Instrument:
        """The record that the study uses."""
        return custom_instrument(**dict(self))


def _field_named(place: str) -> str:
    """The key that a refusal of the instrument is about: 'instrument "a", full scale'."""
    key = place.rpartition(", ")[2].replace(" ", "_")
    return key if key in OwnInstrument.model_fields else ""


class Sheet(Table):
    """`[sheet]`: which instruments the reading sheet shows, besides the case's own."""

    instruments: Annotated[tuple[InstrumentKey, ...], BeforeValidator(entries)] = ()

    @field_validator("instruments")
    @classmethod
    def _each_once(cls, keys: tuple[str, ...]) -> tuple[str, ...]:
        if twice := [key for key in keys if keys.count(key) > 1]:
            raise Refused("", "each instrument may be listed once", given=twice[0])
        return keys


class Reading(Table):
    """`[[readings]]`: what an instrument showed."""

    instrument: InstrumentKey = Field(examples=["digital-10M"])
    a: Point = Field(alias="from", examples=["black@far"])
    b: Point = Field(alias="to", examples=["earth"])
    shows: Shown = Field(examples=["37.2 V"])
    after: Actions = Field((), examples=[["neighbours off"]])
    resistor: AddedResistance = Field(math.inf, examples=["100 kohm"])
    note: Line = ""

    @model_validator(mode="after")
    def _between_two(self) -> Self:
        if self.a == self.b:
            raise Refused("to", "must be another point than from", given=self.b)
        return self


LAMPS = ("indicator", "proximity")
_SHOWN = {
    "digital": ('a voltage or "OL"', ("OL",)),
    "analogue": ('a voltage or "off scale"', ("off scale",)),
    "indicator": ('"lit" or "not lit"', ("lit", "not lit")),
    "proximity": ('"lit" or "not lit"', ("lit", "not lit")),
}


class CaseFile(Table):
    """The whole file."""

    title: Title = Field(examples=["Evaporator fan circuit"])
    site: Line = ""
    units: Literal["metric", "US customary"] = "metric"
    notes: Notes = ""
    supply: SupplyTable = Field(examples=['{voltage = "230 V", frequency = "50 Hz"}'])
    run: RunTable = Field(examples=['{length = "85 m", …}'])
    sheet: Sheet = Sheet.model_construct()
    device: DeviceTable | None = None
    standing: Annotated[tuple[Standing, ...], BeforeValidator(entries)] = ()
    log: LogTable | None = None
    own_instruments: Annotated[tuple[OwnInstrument, ...], BeforeValidator(entries)] = ()
    readings: Annotated[tuple[Reading, ...], BeforeValidator(entries)] = ()
    causes: CausesTable = CausesTable.model_construct()
    spread: SpreadTable = SpreadTable.model_construct()
    operation: Annotated[tuple[OperationTable, ...], BeforeValidator(entries)] = ()
    loaded: Annotated[tuple[LoadedTable, ...], BeforeValidator(entries)] = ()
    sizing: SizingTable | None = None
    memo: MemoTable = MemoTable.model_construct()

    @model_validator(mode="after")
    def _spread_fits(self) -> Self:
        if found := tuple(self.spread.mistakes(self.run)):
            raise Refused.all_of(found)
        return self

    @model_validator(mode="after")
    def _loads_are_known(self) -> Self:
        found = [m for count, entry in enumerate(self.operation, 1)
                 for m in (*self._named_twice(count),
                           *self._placed(entry, f"operation[{count}].load"),
                           *self._unlike(entry, f"operation[{count}].kind"))]
        if found:
            raise Refused.all_of(found)
        return self

    def _named_twice(self, count: int) -> Iterator[Mistake]:
        names = [entry.name for entry in self.operation[:count]]
        if names[-1] in names[:-1]:
            yield Mistake(f"operation[{count}].name", "is used twice", names[-1])

    def _placed(self, entry: OperationTable, place: str) -> Iterator[Mistake]:
        """Gives the entry the pair of the load that it names; what is wrong where it cannot."""
        if entry.load is None:
            return
        pairs = [pair for load, pair in self.run.loads if load.name == entry.load]
        if len(pairs) == 1:
            entry.put_on(pairs[0])
        elif pairs:
            yield Mistake(place, "is the name of more than one load", entry.load)
        else:
            labels = [load.name for load, _ in self.run.loads]
            yield Mistake(place, "is not a load of this run", entry.load,
                          nearest(entry.load, labels))

    def _unlike(self, entry: OperationTable, place: str) -> Iterator[Mistake]:
        """What a load is described as that its kind cannot be."""
        lamp = entry.kind.measure == "lamp current"
        on = {entry.watched().pair.a, entry.watched().pair.b}
        for load, pair in self.run.loads:
            if {pair.a, pair.b} != on:
                continue
            if lamp and load.voltage is not None:
                yield Mistake(place, "draws nothing until its chips conduct: its power is no "
                              "impedance", entry.kind.key, "leave the power out of the load")
            elif load.bare and not lamp:
                yield Mistake(place, "has an impedance, and the load there has only a name",
                              entry.kind.key, "give its power, or its impedance")

    @model_validator(mode="after")
    def _behind_a_device(self) -> Self:
        if self.device is None and (self.standing or self.log):
            raise Refused("device", "is missing, and standing and log are about it",
                          hint='for example [device] with rated = "30 mA"')
        names = [entry.name for entry in self.standing]
        found = [Mistake(f"standing[{count + 1}].name", "is used twice", name)
                 for count, name in enumerate(names) if name in names[:count]]
        if found:
            raise Refused.all_of(found)
        return self

    @model_validator(mode="after")
    def _adds_what_there_is(self) -> Self:
        known = {"leak": [entry.name for entry in self.standing],
                 "load": [entry.name for entry in self.operation]}
        found = [Mistake(f"memo.added[{count + 1}].{key}", "is not in this case", name,
                         nearest(name, names))
                 for count, entry in enumerate(self.memo.added) for key, names in known.items()
                 if (name := getattr(entry, key)) is not None and name not in names]
        if found:
            raise Refused.all_of(found)
        return self

    @model_validator(mode="after")
    def _instruments_fit(self) -> Self:
        found = [*self._keys_used_twice(), *self._impossible_readings()]
        if found:
            raise Refused.all_of(found)
        return self

    def _keys_used_twice(self) -> Iterator[Mistake]:
        keys = [i.key for i in self.own_instruments]
        for count, key in enumerate(keys):
            if key in keys[:count]:
                yield Mistake(f"own_instruments[{count + 1}].key", "is used twice", key)

    def _impossible_readings(self) -> Iterator[Mistake]:
        kinds = {key: i.kind for key, i in INSTRUMENTS.items()}
        kinds |= {i.key: i.kind for i in self.own_instruments}
        for count, reading in enumerate(self.readings):
            kind = kinds[reading.instrument]
            place = f"readings[{count + 1}]"
            if kind not in _SHOWN:
                yield Mistake(f"{place}.instrument", "shows nothing that can be read",
                              reading.instrument)
                continue
            means, words = _SHOWN[kind]
            volts = reading.shows not in SHOWN_WORDS
            if not (reading.shows in words or (volts and kind not in LAMPS)):
                yield Mistake(f"{place}.shows", f"must be {means} for kind {kind}", reading.shows)
