"""Leakage of equipment by class: what its standard allows, or what is met, each with its source.

A limit is what one piece may leak, not what it does: summed over a floor it overstates. What is
met is given where a source gives it; a measured value is better than either.
"""

from __future__ import annotations

from collections.abc import Mapping

from ..errors import Refused, nearest
from .records import Source, Value

_TRADE = Source("trade tables of office equipment", "common practice")
_APPLIANCE = Source("IEC 60335-1", "seen", "13.2 and 16.2")
_COMPUTER = Source("IEC 62368-1", "from memory", "class I with plug")
_HEAT = Source("heating elements, cold or damp; it falls on drying", "from memory")

TYPICAL: Mapping[str, Value] = {
    "computer": Value(1e-3, "A", _TRADE, 0.5e-3, 2e-3),
    "computer with screens": Value(2e-3, "A", _TRADE, 1e-3, 3e-3),
    "printer": Value(0.75e-3, "A", _TRADE, 0.5e-3, 1e-3),
    "copier": Value(1e-3, "A", _TRADE, 0.5e-3, 1.5e-3),
    "fax": Value(0.75e-3, "A", _TRADE, 0.5e-3, 1e-3),
    "small portable": Value(0.6e-3, "A", _TRADE, 0.5e-3, 0.75e-3),
    "mains filter": Value(1e-3, "A", _TRADE, 0.5e-3, 1.5e-3),
    "office kit": Value(2e-3, "A", _TRADE, 1e-3, 3.5e-3),
}
"""Of one piece, by class [A]: what is met, with its range."""

LIMIT: Mapping[str, Value] = {
    "class II": Value(0.25e-3, "A", _APPLIANCE),
    "class I portable": Value(0.75e-3, "A", _APPLIANCE),
    "class I motor-operated, stationary": Value(3.5e-3, "A", _APPLIANCE),
    "class I computer": Value(3.5e-3, "A", _COMPUTER),
    "medical, class I": Value(5e-3, "A", Source("IEC 60601-1", "from memory", "earth leakage, "
                                                "normal condition")),
}
"""Of one piece, by class [A]: what its standard allows."""

_HEATING_FLOOR, _HEATING_CEILING = 0.75e-3, 5e-3
WET_ELEMENT = Value(1e-3, "A", _HEAT)  # for each kW, at most


def equipment(name: str) -> Value:
    """Leakage of one piece of a class [A]; unknown ones are refused with the nearest known.

    Where only a limit is known, it is given as the highest of a range from none of it.

    >>> equipment("class II").likely, equipment("class II").high
    (0.000125, 0.00025)
    """
    if name in TYPICAL:
        return TYPICAL[name]
    if name in LIMIT:
        limit = LIMIT[name]
        return Value(limit.likely / 2, "A", limit.source, 0.0, limit.likely)
    raise Refused("equipment", "is not a known class", given=name,
                  hint=nearest(str(name), [*TYPICAL, *LIMIT]))


def heating_limit(*, power: float) -> Value:
    """What a stationary class I heating appliance may leak [A] at its rated power [W], above 0.

    0.75 mA or 0.75 mA/kW, whichever is greater, 5 mA at most. Source: IEC 60335-1.

    >>> heating_limit(power=3000.0).likely
    0.00225
    """
    if not 0 < power < float("inf"):
        raise Refused("power", "must be above 0 W", given=f"{power:g} W")
    allowed = min(max(_HEATING_FLOOR, 0.75e-3 * power / 1e3), _HEATING_CEILING)
    return Value(allowed, "A", _APPLIANCE)
