"""The cable of a case: its layout, and the metal and cover of its cores."""

from __future__ import annotations

from typing import Annotated, Any, Literal, Self

from pydantic import (
    BeforeValidator,
    Field,
    ValidationInfo,
    ValidatorFunctionWrapHandler,
    field_validator,
    model_validator,
)

from ..errors import Refused, nearest
from ..reference.insulation import COVERS, MATERIALS, thickness
from ..reference.sizes import Size, Stranding, conductor_size
from ..units import show
from .fields import (
    MOST_CORES,
    CoreName,
    CoreNames,
    KnownCore,
    Line,
    LinearResistance,
    Permittivity,
    Position,
    Seed,
    Table,
    Width,
    entries,
    told_here,
    written,
)

BARE = "bare"


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


def _size(given: Any, info: ValidationInfo) -> Size:
    try:
        if not isinstance(given, str):
            raise Refused("", "must be an area in mm² or a gauge in AWG, in quotes",
                          given=written(given), hint='for example "2.5 mm²"')
        return conductor_size(given, stranding=info.data.get("stranding", "stranded"))
    except Refused as refusal:
        raise told_here(refusal) from None


def _nominal_thickness(kind: str, size: Size) -> float:
    known = COVERS[kind].thicknesses
    if size.name not in known:
        raise Refused("", f"is not in the table of {kind} for this conductor", given=size.name,
                      hint=f"give the thickness, or one of {', '.join(known)}")
    return thickness(kind, size).likely


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

    @model_validator(mode="after")
    def _bare_has_no_cover(self) -> Self:
        if self.insulation == BARE and (self.thickness or self.permittivity):
            raise Refused("insulation", "is bare, and a bare wire has no thickness or permittivity")
        return self

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
    seed: Seed = 1


class FreeConductor(Table):
    """`[[run.cable.conductors]]`: a conductor where it lies."""

    name: CoreName = Field(examples=["brown"])
    x: Position = Field(examples=["0 mm"])
    y: Position = Field(examples=["5 mm"])
    diameter: Width = Field(examples=["1.78 mm"])
    cover_diameter: Width | None = Field(None, examples=["3.4 mm"])
    permittivity: Limits | None = Field(None, examples=[4.8])
    resistance: LinearResistance | None = Field(None, examples=["7.41 mohm/m"])

    @model_validator(mode="after")
    def _whole_cover(self) -> Self:
        if (self.cover_diameter is None) != (self.permittivity is None):
            missing = "permittivity" if self.permittivity is None else "cover_diameter"
            raise Refused(missing, "is missing: cover_diameter and permittivity go together")
        if self.cover_diameter is not None and self.cover_diameter < self.diameter:
            raise Refused("cover_diameter",
                          f"must be at least the metal's {show(self.diameter, 'm')}",
                          given=show(self.cover_diameter, "m"))
        return self


def _few(given: Any) -> Any:
    if isinstance(given, list) and not 1 <= len(given) <= MOST_CORES:
        raise Refused("", f"must be 1 to {MOST_CORES} conductors", given=f"{len(given)}")
    return entries(given)


class Free(Table):
    """Conductors at given places."""

    layout: Literal["free"]
    conductors: Annotated[tuple[FreeConductor, ...], BeforeValidator(_few)] = Field(
        examples=['[{name = "brown", x = "0 mm", y = "5 mm", diameter = "1.78 mm"}]']
    )
    filler_permittivity: Permittivity = 1.0

    @property
    def names(self) -> tuple[str, ...]:
        """The conductors, in the file's order."""
        return tuple(c.name for c in self.conductors)


AnyCable = Annotated[
    LaidUp | Control | FlatTwin | Singles | InConduit | Free, Field(discriminator="layout")
]
