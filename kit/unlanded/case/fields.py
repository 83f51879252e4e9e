"""The kinds of value a case file may hold: quantities with units, names, texts.

Every quantity is text with its unit and becomes a float in base SI. The limits stand here once;
the check and its message both read them.
"""

from __future__ import annotations

import math
import unicodedata
from collections.abc import Callable
from dataclasses import dataclass, field
from typing import Annotated, Any

from pydantic import BaseModel, BeforeValidator, ValidationInfo

from ..errors import Refused, nearest
from ..units import show, si

RESERVED = ("earth", "N", "L", "L1", "L2", "L3", "open")
LONGEST_NAME = 40


@dataclass
class Vocabulary:
    """The names that one case uses, gathered before it is validated, and the tables it has.

    `cores` is None where the list of cores itself cannot be read. `tables` says which model
    reads which table of the file, by the identity of the table.
    """

    cores: tuple[str, ...] | None
    phases: tuple[str, ...]
    instruments: tuple[str, ...]
    tables: dict[int, type[BaseModel]] = field(default_factory=dict)


def vocabulary(info: ValidationInfo) -> Vocabulary:
    """The names of the case under validation."""
    assert isinstance(info.context, Vocabulary)
    return info.context


def _quantity(unit: str, low: float, high: float) -> BeforeValidator:
    """Text with a unit, in base SI, from `low` to `high`."""

    def check(given: Any) -> float:
        return _within(si(given, unit, place=""), unit, low, high, given)

    return BeforeValidator(check)


def _number(low: float, high: float) -> BeforeValidator:
    """A pure number, or text with a percentage, from `low` to `high`."""

    def check(given: Any) -> float:
        if isinstance(given, str):
            value = si(given, "1", place="")
        elif isinstance(given, int | float) and not isinstance(given, bool):
            value = _float(given)
        else:
            raise Refused("", "must be a number", given=given)
        return _within(value, "", low, high, given)

    return BeforeValidator(check)


def _float(given: int | float) -> float:
    try:
        value = float(given)
    except OverflowError:
        value = math.inf
    if not math.isfinite(value):
        raise Refused("", "must be a finite number", given=given)
    return value


def _within(value: float, unit: str, low: float, high: float, given: object) -> float:
    if low <= value <= high:
        return value
    symbol = {"ohm": "Ω", "F/m": "F/m"}.get(unit, unit)
    raise Refused("", f"must be {show(low, symbol)} to {show(high, symbol)}", given=given)


Length = Annotated[float, _quantity("m", 1e-2, 1e5)]
Width = Annotated[float, _quantity("m", 1e-6, 10.0)]
Gap = Annotated[float, _quantity("m", 0.0, 10.0)]
Position = Annotated[float, _quantity("m", -10.0, 10.0)]
Voltage = Annotated[float, _quantity("V", 1e-3, 1e6)]
Resolution = Annotated[float, _quantity("V", 1e-9, 1e6)]
Frequency = Annotated[float, _quantity("Hz", 1.0, 1e5)]
Current = Annotated[float, _quantity("A", 1e-6, 1e5)]
Power = Annotated[float, _quantity("W", 1e-6, 1e9)]
Resistance = Annotated[float, _quantity("ohm", 0.0, 1e15)]
LinearResistance = Annotated[float, _quantity("ohm/m", 0.0, 1e3)]
Inductance = Annotated[float, _quantity("H", 0.0, 1e6)]
Capacitance = Annotated[float, _quantity("F", 0.0, 1.0)]
Permittivity = Annotated[float, _number(1.0, 100.0)]
Share = Annotated[float, _number(0.0, 1.0)]


def _text(limit: int, *, lines: bool = False) -> BeforeValidator:
    def check(given: Any) -> str:
        if not isinstance(given, str):
            raise Refused("", "must be text in quotes", given=given)
        if len(given) > limit:
            raise Refused("", f"may be {limit} characters long", given=f"{len(given)} characters")
        if not lines and "\n" in given:
            raise Refused("", "must be on one line", given=given)
        odd = next((c for c in given if unicodedata.category(c) == "Cc" and c not in "\n\t"), None)
        if odd is not None:
            raise Refused("", "has a control character", given=f"U+{ord(odd):04X}")
        return given

    return BeforeValidator(check)


Line = Annotated[str, _text(200)]
Notes = Annotated[str, _text(20_000, lines=True)]


# What an instrument without a number may show, as the reading sheet writes it.
SHOWN_WORDS = ("OL", "off scale", "lit", "not lit")


def _shown(given: Any) -> str:
    """Text as typed: its digits tell the resolution."""
    if isinstance(given, str) and given in SHOWN_WORDS:
        return given
    words = " or ".join(f'"{w}"' for w in SHOWN_WORDS)
    try:
        volts = si(given, "V", place="")
    except Refused as refusal:
        mistake = refusal.mistakes[0]
        raise Refused("", mistake.rule, given=mistake.given,
                      hint=mistake.hint or f"a voltage, {words}") from None
    _within(volts, "V", 0.0, 1e6, given)
    return str(given)


def _core_name(given: Any) -> str:
    rule = f"a core's name is text of 1 to {LONGEST_NAME} characters on one line, without @"
    if not isinstance(given, str) or not 1 <= len(given) <= LONGEST_NAME:
        raise Refused("", rule, given=given)
    if "@" in given or given != given.strip() or not given.isprintable():
        raise Refused("", rule, given=repr(given))
    if given in RESERVED:
        raise Refused("", "is a word of the supply and cannot name a core", given=given,
                      hint='call the core by its colour or number, an earth core for example "cpc"')
    return given


def _names(given: Any) -> tuple[Any, ...]:
    if not isinstance(given, list) or not given:
        raise Refused("", "must be a list of names", given=given,
                      hint='for example ["brown", "blue", "green-yellow"]')
    for name in given:
        if given.count(name) > 1:
            raise Refused("", "a name may be used once", given=name)
    return tuple(given)


def _one_of(kind: str, known: Callable[[Vocabulary], tuple[str, ...] | None]) -> BeforeValidator:
    def check(given: Any, info: ValidationInfo) -> Any:
        words = known(vocabulary(info))
        if words is not None and given not in words:
            raise Refused("", f"is not {kind} of this case", given=given,
                          hint=nearest(str(given), words))
        return given

    return BeforeValidator(check)


def _and(words: tuple[str, ...] | None, more: tuple[str, ...]) -> tuple[str, ...] | None:
    return None if words is None else words + more


def _points(names: Vocabulary) -> tuple[str, ...] | None:
    if names.cores is None:
        return None
    ends = tuple(f"{core}@{end}" for core in names.cores for end in ("near", "far"))
    return (*ends, "earth", "N", *names.phases)


CoreName = Annotated[str, BeforeValidator(_core_name)]
CoreNames = Annotated[tuple[CoreName, ...], BeforeValidator(_names)]
KnownCore = Annotated[str, _one_of("a core", lambda v: v.cores)]
Return = Annotated[str, _one_of("a core or return", lambda v: _and(v.cores, ("earth", "N")))]
Point = Annotated[str, _one_of("a point", _points)]
SupplyWord = Annotated[
    str, _one_of("a word of the supply", lambda v: (*v.phases, "N", "earth", "open"))
]
Shown = Annotated[str, BeforeValidator(_shown)]
InstrumentKey = Annotated[str, _one_of("an instrument", lambda v: v.instruments)]


def entries(given: Any) -> Any:
    """TOML's lists as the tuples that frozen records hold."""
    if not isinstance(given, list):
        raise Refused("", "must be a list", given=given)
    return tuple(given)
