"""The tables of a case about what is not known exactly, and about what follows from it.

Each class is one table of the file; values come out in base SI.
"""

from __future__ import annotations

import math
from collections.abc import Iterator
from typing import Annotated, Any, Generic, Self, TypeVar

from pydantic import (
    AfterValidator,
    BeforeValidator,
    Field,
    PrivateAttr,
    StrictBool,
    model_validator,
)

from ..errors import Mistake, Refused, nearest
from ..reference.loads import THRESHOLDS, Threshold, threshold
from ..study.operation import Watched
from ..study.readings import Pair
from ..study.spread import Distribution, limits, triangular, uniform, within
from .fields import (
    Capacitance,
    Current,
    Gap,
    KnownCore,
    Length,
    Line,
    LinearCapacitance,
    Permittivity,
    Point,
    Resistance,
    Share,
    Table,
    Title,
    Voltage,
    Width,
    told_here,
    written,
)

Q = TypeVar("Q")


def _number(given: Any) -> float:
    if isinstance(given, bool) or not isinstance(given, int | float) or not math.isfinite(given):
        raise Refused("", "must be a finite number", given=written(given))
    return float(given)


def _family(given: Any) -> str:
    from scipy import stats

    known = [n for n in dir(stats) if isinstance(getattr(stats, n), stats.rv_continuous)]
    if given not in known:
        raise Refused("", "is not a continuous distribution of scipy.stats", given=written(given),
                      hint=nearest(str(given), known))
    return str(given)


def _some(share: float) -> float:
    if not 0 < share < 1:
        raise Refused("", "must be above 0 and below 100 %", given=f"{100 * share:g} %")
    return share


Number = Annotated[float, BeforeValidator(_number)]
Tolerance = Annotated[Share, AfterValidator(_some), Field(examples=["10 %"])]


class Uncertain(Table, Generic[Q]):
    """A quantity that is not known exactly, in one of these ways:

    `tolerance` about the case's value; `low` and `high`, with `likely` between them or without;
    `distribution`, a name of scipy.stats with its `shapes`, `loc` and `scale` as multiples of
    the case's value.
    """

    tolerance: Tolerance | None = None
    low: Q | None = None
    likely: Q | None = None
    high: Q | None = None
    distribution: Annotated[str, BeforeValidator(_family)] | None = None
    shapes: dict[str, Number] = Field(default_factory=dict)
    loc: Number = 0.0
    scale: Number = 1.0

    @model_validator(mode="before")
    @classmethod
    def _tolerance_alone(cls, data: Any) -> Any:
        return data if isinstance(data, dict) else {"tolerance": data}

    @model_validator(mode="after")
    def _one_way(self) -> Self:
        given = self.model_fields_set
        ways = [w for w in ("tolerance", "low", "distribution") if w in given]
        if len(ways) != 1 or ("low" in given) != ("high" in given) or (
                "likely" in given and "low" not in given):
            raise Refused("", "must be a tolerance, low and high (with likely, or without), or a "
                              "distribution", hint='for example {tolerance = "5 %"}')
        try:
            self.over(1.0)
        except Refused as refusal:
            raise told_here(refusal) from None
        return self

    def over(self, value: float) -> Distribution:
        """Its distribution, about the case's own value where it says no other."""
        if self.tolerance is not None:
            return within(value, self.tolerance)
        if self.distribution is not None:
            return self._of_family(value)
        low, likely, high = (float(x) if x is not None else None  # type: ignore[arg-type]
                             for x in (self.low, self.likely, self.high))
        assert low is not None
        assert high is not None
        return uniform(low, high) if likely is None else triangular(low, likely, high)

    def _of_family(self, value: float) -> Distribution:
        from scipy import stats

        try:
            made: Distribution = getattr(stats, str(self.distribution))(
                **self.shapes, loc=self.loc * value, scale=self.scale * value)
            ends = limits(made)
        except (TypeError, ValueError) as error:
            raise Refused("distribution", "does not take these shapes", given=str(error)) from None
        if not (0 < ends[0] < ends[1] < math.inf):
            raise Refused("distribution", "must stay above 0", given=f"{ends[0]:g} to {ends[1]:g}",
                          hint="choose one with limits, such as truncnorm")
        return made


_GEOMETRY = ("thickness", "spacing", "bore", "gap")


def home_of(run: Any, key: str) -> str | None:
    """The table of `[run]` that gives a dimension: its cable, or else its surround."""
    return next((home for home in ("cable", "surround")
                 if getattr(getattr(run, home), key, None) is not None), None)


class SpreadTable(Table):
    """`[spread]`: how sure the inputs are; what is not named keeps its value.

    Without a `permittivity` here the covers have the range of their material, or of their limits;
    without `to_earth` a screen that nothing earths has the range of the trade, unless its own
    capacitance to earth is given.
    """

    coverage: Share = 0.95
    length: Uncertain[Length] | None = None
    voltage: Uncertain[Voltage] | None = None
    permittivity: Uncertain[Permittivity] | None = None
    thickness: Uncertain[Width] | None = None
    spacing: Uncertain[Width] | None = None
    bore: Uncertain[Width] | None = None
    gap: Uncertain[Gap] | None = None
    to_earth: Uncertain[LinearCapacitance] | None = None
    loads: dict[Line, Tolerance] = Field(default_factory=dict)
    arrangement: StrictBool = True

    @model_validator(mode="after")
    def _sensible(self) -> Self:
        if not 0.5 <= self.coverage < 1:
            raise Refused("coverage", "must be 50 % to below 100 %", given=f"{self.coverage:.3g}")
        return self

    @property
    def geometry(self) -> dict[str, Uncertain[float]]:
        """What varies of the section's dimensions, by key."""
        return {k: v for k in _GEOMETRY if (v := getattr(self, k)) is not None}

    def _of_nothing(self, surround: Any) -> Iterator[Mistake]:
        for key in ("gap", "to_earth"):
            given = getattr(self, key)
            if given and given.low is None and getattr(surround, key, None) == 0:
                yield Mistake(f"spread.{key}", "is a share of the case's own value, which is 0", "",
                              "give low and high")

    def mistakes(self, run: Any) -> Iterator[Mistake]:
        """What does not fit the cable and its surround."""
        for key in self.geometry:
            if home_of(run, key) is None:
                yield Mistake(f"spread.{key}", "is not a dimension that this cable gives",
                              run.cable.layout)
        if run.surround:
            yield from self._of_nothing(run.surround)
        if self.to_earth and not (run.screen and run.screen.earthed == "none"):
            yield Mistake("spread.to_earth", "is of a screen that is earthed at no end, and there "
                          "is none", "", 'it goes with earthed = "none" of [run.surround]')
        labels = [load.name for load, _ in run.loads]
        for label in self.loads:
            if label not in labels:
                yield Mistake(f'spread.loads."{label}"', "is not a load of this case", label,
                              nearest(label, labels))


def _known_kind(given: Any) -> Threshold:
    try:
        return threshold(given if isinstance(given, str) else written(given))
    except Refused as refusal:
        raise told_here(refusal) from None


_POINTS = {"from": 'for example from = "2@near"', "to": 'for example to = "N"'}


class OperationTable(Table):
    """`[[operation]]`: a load that stray coupling must not keep on, with its contacts open.

    It is where `load` says, the name of a load at the run's ends, or between two points. Its
    thresholds are those of its kind unless the data sheet's own are given.
    """

    name: Title = Field(examples=["interlock relay"])
    kind: Annotated[Threshold, BeforeValidator(_known_kind)] = Field(examples=["relay"])
    load: Line | None = None
    a: Point | None = Field(None, alias="from", examples=["2@near"])
    b: Point | None = Field(None, alias="to", examples=["N"])
    rated_voltage: Voltage | None = None
    off_voltage: Voltage | None = None
    on_voltage: Voltage | None = None
    off_current: Current | None = None
    on_current: Current | None = None
    conducts_from: Voltage = 50.0
    series_capacitance: Capacitance | None = None
    _pair: Pair = PrivateAttr(Pair(""))

    @model_validator(mode="after")
    def _is_somewhere(self) -> Self:
        points = {"from": self.a, "to": self.b}
        if self.load is not None:
            if given := [key for key, point in points.items() if point is not None]:
                raise Refused(given[0], "is given twice: load says where it is")
            return self
        if missing := [Mistake(key, "is missing", "", f"{_POINTS[key]}, or load = its name")
                       for key, point in points.items() if point is None]:
            raise Refused.all_of(missing)
        if self.a == self.b:
            raise Refused("to", "must be another point than from", given=self.b)
        self.put_on(Pair(str(self.a), str(self.b)))
        return self

    def put_on(self, pair: Pair) -> None:
        """Says on which pair its load is."""
        self._pair = pair

    @model_validator(mode="after")
    def _makes_a_load(self) -> Self:
        lamp = self.kind.measure == "lamp current"
        wrong = {"off_voltage", "on_voltage"} if lamp else {
            "off_current", "on_current", "conducts_from", "series_capacitance"}
        if found := sorted(wrong & self.model_fields_set):
            raise Refused(found[0], f"does not apply to the kind {self.kind.key}")
        if self.series_capacitance == 0:
            raise Refused("series_capacitance", "must be above 0 F", hint="leave it out where "
                                                                          "there is none")
        try:
            _ = self.watched().limits
        except Refused as refusal:
            raise told_here(refusal) from None
        return self

    def watched(self) -> Watched:
        """The record that the study uses."""
        lamp = self.kind.measure == "lamp current"
        return Watched(
            self.name, self._pair, self.kind, self.rated_voltage,
            self.off_current if lamp else self.off_voltage,
            self.on_current if lamp else self.on_voltage, self.conducts_from,
            math.inf if self.series_capacitance is None else self.series_capacitance)


class LoadedTable(Table):
    """`[[loaded]]`: a current in the run, for the voltage that it induces along the others.

    Without `back` it returns by earth, as that of an earth fault does.
    """

    go: KnownCore = Field(examples=["brown"])
    back: KnownCore | None = None
    current: Current = Field(examples=["16 A"])

    @model_validator(mode="after")
    def _two_conductors(self) -> Self:
        if self.go == self.back:
            raise Refused("back", "must be another conductor than go", given=self.go)
        return self

    @property
    def currents(self) -> dict[str, complex]:
        """By conductor, from the near to the far end [A]."""
        back = {} if self.back is None else {self.back: complex(-self.current)}
        return {self.go: complex(self.current), **back}


class SizingTable(Table):
    """`[sizing]`: the limits that the inverse questions are asked for.

    `collapse_to` is what a meter must bring a coupled voltage down to, `reading_limit` what a
    meter of high impedance may show; `source_resistance` is of a genuine circuit that may stand
    on the pair, which may be read low by `loading_error`.
    """

    collapse_to: Voltage = Field(examples=["10 V"])
    reading_limit: Voltage | None = None
    source_resistance: Resistance = 0.0
    loading_error: Share = 0.05

    @model_validator(mode="after")
    def _sensible(self) -> Self:
        if not 0 < self.loading_error < 1:
            raise Refused("loading_error", "must be above 0 and below 100 %")
        return self


KINDS = tuple(THRESHOLDS)
