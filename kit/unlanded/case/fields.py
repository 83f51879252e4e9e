"""The kinds of value a case file may hold: quantities with units, names, texts.

Every quantity is text with its unit and becomes a float in base SI. The limits stand here once;
the check and its message both read them.
"""

from __future__ import annotations

import json
import math
import unicodedata
from collections.abc import Callable
from dataclasses import dataclass, field, replace
from typing import Annotated, Any, Literal

from pydantic import BaseModel, BeforeValidator, ConfigDict, ValidationInfo, model_validator

from ..errors import Refused, nearest
from ..study.ends import SCREEN
from ..units import show, si

RESERVED = ("earth", "N", "L", "L1", "L2", "L3", "open")
LONGEST_NAME = 40
MOST_CORES = 61  # 1 + 6 + 12 + 18 + 24, the largest control cable met
MOST_ENTRIES = 1000


@dataclass
class Vocabulary:
    """The names that one case uses, gathered before it is validated, and the tables it has.

    `cores` is None where the list of cores itself cannot be read; `screen` has the name of the
    screen, if the cable has one. `tables` says which model reads which table of the file, by the
    identity of the table.
    """

    cores: tuple[str, ...] | None
    phases: tuple[str, ...]
    instruments: tuple[str, ...]
    screen: tuple[str, ...] = ()
    tables: dict[int, type[BaseModel]] = field(default_factory=dict)


def vocabulary(info: ValidationInfo) -> Vocabulary:
    """The names of the case under validation."""
    assert isinstance(info.context, Vocabulary)
    return info.context


class Table(BaseModel):
    """A table whose keys are all known; it tells the vocabulary which table it reads."""

    model_config = ConfigDict(extra="forbid", frozen=True, arbitrary_types_allowed=True)

    @model_validator(mode="before")
    @classmethod
    def _note_table(cls, data: Any, info: ValidationInfo) -> Any:
        if isinstance(data, dict):
            vocabulary(info).tables[id(data)] = cls
        return data


def _quantity(unit: str, low: float, high: float) -> BeforeValidator:
    """Text with a unit, in base SI, from `low` to `high`."""

    def check(given: Any) -> float:
        return _within(_measured(given, unit), unit, low, high, given)

    return BeforeValidator(check)


def _measured(given: Any, unit: str) -> float:
    if isinstance(given, str):
        return si(given, unit, place="")
    number = isinstance(given, int | float) and not isinstance(given, bool)
    raise Refused("", "must be a number with its unit, in quotes", given=written(given),
                  hint=f'for example "{given} {unit}"' if number and math.isfinite(given) else "")


def told_here(refusal: Refused) -> Refused:
    """A refusal of a lower floor, told at the key under validation."""
    return Refused.all_of(replace(m, place="") for m in refusal.mistakes)


def written(given: Any) -> str:
    """A value as a message shows it: in the words of TOML, and never empty.

    >>> written(True), written(""), written([1, 2]), written("85 m")
    ('true', '""', 'a list', '85 m')
    """
    match given:
        case bool():
            return str(given).lower()
        case list() | tuple():
            return "a list"
        case dict():
            return "a table"
        case int() if abs(given) > 1e30:
            return "a huge number"  # Python refuses to spell thousands of digits
    text = str(given)
    return text if text.strip() and text.isprintable() else json.dumps(text, ensure_ascii=True)


def _number(low: float, high: float) -> BeforeValidator:
    """A pure number, or text with a percentage, from `low` to `high`."""

    def check(given: Any) -> float:
        if isinstance(given, str):
            value = si(given, "1", place="")
        elif isinstance(given, int | float) and not isinstance(given, bool):
            value = _float(given)
        else:
            raise Refused("", "must be a number", given=written(given))
        return _within(value, "", low, high, given)

    return BeforeValidator(check)


def _float(given: int | float) -> float:
    try:
        value = float(given)
    except OverflowError:
        value = math.inf
    if not math.isfinite(value):
        raise Refused("", "must be a finite number", given=written(given))
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
SourceResistance = Annotated[float, _quantity("ohm", 0.0, 1e4)]
SourceInductance = Annotated[float, _quantity("H", 0.0, 10.0)]
LinearCapacitance = Annotated[float, _quantity("F/m", 0.0, 1e-7)]
AddedResistance = Annotated[float, _quantity("ohm", 1.0, 1e9)]
Cost = Annotated[float, _number(0.0, 1e6)]
Lead = Annotated[float, _number(-90.0, 90.0)]  # degrees


def _whole(low: int, high: int) -> BeforeValidator:
    def check(given: Any) -> int:
        if not isinstance(given, int) or isinstance(given, bool) or not low <= given <= high:
            raise Refused("", f"must be a whole number from {low} to {high}, without quotes",
                          given=written(given))
        return given

    return BeforeValidator(check)


Phases = Annotated[Literal[1, 2, 3], _whole(1, 3)]
Counts = Annotated[int, _whole(0, 10_000)]
Seed = Annotated[int, _whole(0, 2**32 - 1)]


def _order(given: Any) -> int:
    # "03" would be a second way to write the same order.
    orders = {str(n): n for n in range(2, 51)}
    if given in orders:
        return orders[given]
    raise Refused("", "must be the order of a harmonic, a whole number from 2 to 50",
                  given=written(given), hint='for example 3 = "5 %"')


Order = Annotated[int, BeforeValidator(_order)]


def _text(limit: int, *, lines: bool = False, least: int = 0) -> BeforeValidator:
    def check(given: Any) -> str:
        if not isinstance(given, str):
            raise Refused("", "must be text in quotes", given=written(given))
        if len(given.strip()) < least:
            raise Refused("", "must not be empty")
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
Title = Annotated[str, _text(200, least=1)]
Notes = Annotated[str, _text(20_000, lines=True)]


# What an instrument without a number may show, as the reading sheet writes it.
SHOWN_WORDS = ("OL", "off scale", "lit", "not lit")


def _shown(given: Any) -> str:
    """Text as typed: its digits tell the resolution."""
    if isinstance(given, str) and given in SHOWN_WORDS:
        return given
    words = " or ".join(f'"{w}"' for w in SHOWN_WORDS)
    try:
        volts = _measured(given, "V")
    except Refused as refusal:
        mistake = refusal.mistakes[0]
        raise Refused("", mistake.rule, given=mistake.given,
                      hint=mistake.hint or f'such as "37.2 V", or {words}') from None
    _within(volts, "V", 0.0, 1e6, given)
    return str(given)


def is_core_name(given: Any) -> bool:
    """Whether it can name a core, words of the supply aside."""
    return (isinstance(given, str) and 1 <= len(given) <= LONGEST_NAME and given.isprintable()
            and given == given.strip() and not set(given) & {"@", '"'})


def _core_name(given: Any) -> str:
    if not isinstance(given, str) or not is_core_name(given):
        raise Refused("", f"must be text of 1 to {LONGEST_NAME} printable characters, without @, "
                          "quotation marks, or blanks about it", given=written(given))
    if given in RESERVED:
        raise Refused("", "is a word of the supply and cannot name a core", given=given,
                      hint='call the core by its colour or number, an earth core for example "cpc"')
    return given


def _names(given: Any) -> tuple[Any, ...]:
    if not isinstance(given, list) or not given:
        raise Refused("", "must be a list of names", given=written(given) if given else "[]",
                      hint='for example ["brown", "blue", "green-yellow"]')
    if len(given) > MOST_CORES:
        raise Refused("", f"may have {MOST_CORES} names", given=f"{len(given)} names")
    for name in given:
        if given.count(name) > 1:
            raise Refused("", "a name may be used once", given=written(name))
    return tuple(given)


def _one_of(kind: str, known: Callable[[Vocabulary], tuple[str, ...] | None]) -> BeforeValidator:
    def check(given: Any, info: ValidationInfo) -> Any:
        words = known(vocabulary(info))
        if words is not None and given not in words:
            raise Refused("", f"is not {kind} of this case", given=written(given),
                          hint=_known(given if isinstance(given, str) else "", words,
                                      vocabulary(info)))
        return given

    return BeforeValidator(check)


def _known(given: str, words: tuple[str, ...], names: Vocabulary) -> str:
    """The nearest word; of a screen, why it is none."""
    if given in names.screen and f"{given}@near" not in words:
        return "what the screen meets is told by earthed of [run.surround]"
    if given.partition("@")[0] == SCREEN and SCREEN not in (*names.screen, *(names.cores or ())):
        return 'a run has a screen with kind = "screen" of [run.surround]'
    return nearest(given, words)


def _and(words: tuple[str, ...] | None, more: tuple[str, ...]) -> tuple[str, ...] | None:
    return None if words is None else words + more


def _points(names: Vocabulary) -> tuple[str, ...] | None:
    if names.cores is None:
        return None
    ends = tuple(f"{name}@{end}" for name in (*names.cores, *names.screen)
                 for end in ("near", "far"))
    return (*ends, "earth", "N", *names.phases)


CoreName = Annotated[str, BeforeValidator(_core_name)]
CoreNames = Annotated[tuple[CoreName, ...], BeforeValidator(_names)]
KnownCore = Annotated[str, _one_of("a core", lambda v: v.cores)]
KnownConductor = Annotated[
    str, _one_of("a core", lambda v: _and(v.cores, v.screen))
]
Return = Annotated[
    str, _one_of("a core or supply word", lambda v: _and(v.cores, ("earth", "N", *v.phases)))
]
Point = Annotated[str, _one_of("a point", _points)]
SupplyWord = Annotated[
    str, _one_of("a word of the supply", lambda v: (*v.phases, "N", "earth", "open"))
]
SupplyLine = Annotated[str, _one_of("a line of the supply", lambda v: v.phases)]
Shown = Annotated[str, BeforeValidator(_shown)]
InstrumentKey = Annotated[str, _one_of("an instrument", lambda v: v.instruments)]


def entries(given: Any) -> Any:
    """TOML's lists as the tuples that frozen records hold."""
    if not isinstance(given, list):
        raise Refused("", "must be a list", given=written(given))
    if len(given) > MOST_ENTRIES:
        raise Refused("", f"may have {MOST_ENTRIES} entries", given=f"{len(given)} entries")
    return tuple(given)
