"""Loads that stray coupling may keep on: what each is sure to do at which voltage.

A threshold is a pair: at or under `off_at` the load is sure to be off, at or over `on_at` sure to
be on; between them it may be either. They are limits of standards for whole families; a data
sheet's own figures replace them.
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass
from typing import Literal

from ..errors import Refused, nearest
from .records import Source, Value

Measure = Literal["voltage", "lamp current"]


@dataclass(frozen=True)
class Threshold:
    """When a kind of load is on or off.

    Parameters
    ----------
    key : short, as a case writes it
    name : as a memo prints it
    off_at, on_at : RMS [V], mean rectified current [A] of a lamp, or a share of the rated
        voltage [1] where the unit is ""
    off_current : at or under which an input is off too, whatever its voltage up to `on_at` [A]
    states : words for off, between, and on
    measure : what is compared
    note : what an engineer should bear in mind
    """

    key: str
    name: str
    off_at: Value
    on_at: Value
    states: tuple[str, str, str]
    measure: Measure = "voltage"
    off_current: Value | None = None
    note: str = ""

    def volts(self, which: Value, rated: float | None) -> float:
        """A threshold in its own unit, a share of the rated voltage turned into volts."""
        if which.unit:
            return which.likely
        if rated is None:
            raise Refused(self.name, "needs the rated voltage: its thresholds are shares of it")
        return which.likely * rated


_HOLDS = ("will drop out", "may stay operated", "stays operated")
_INPUT = ("will go off", "may stay on", "stays on")
_LAMP = ("stays dark", "may glow", "glows")
_CONTACTOR = Source("IEC 60947-4-1", "from memory",
                    "8.2.1.2, drop-out between 20 and 75 % of rated, AC", 2018)
_PICK_UP = Source("IEC 60947-4-1 and IEC 60947-5-1", "seen", "operation from 85 % of rated")
_RELAY = Source("IEC 61810-1", "from memory", "release not below 15 % of rated, AC")
_INPUTS = Source("IEC 61131-2", "from memory", "operating ranges of AC inputs", 2017)
_GLOW = Source("visible from 10 to 50 µA, plainly lit from 0.5 mA: a judgement, no standard",
               "common practice")


def _input(volts: int, kind: int, off: float, leak: float, on: float) -> Threshold:
    # An AC input is off below either limit: of voltage at any current, of current at any voltage
    # that does not yet count as on.
    return Threshold(
        f"input {volts} V type {kind}", f"{volts} V AC input, type {kind}",
        Value(off, "V", _INPUTS), Value(on, "V", _INPUTS), _INPUT,
        off_current=Value(leak, "A", _INPUTS),
        note="the card's own data sheet counts before the standard")


THRESHOLDS: Mapping[str, Threshold] = {
    t.key: t
    for t in (
        Threshold("contactor", "contactor coil", Value(0.20, "", _CONTACTOR),
                  Value(0.75, "", _CONTACTOR), _HOLDS,
                  note="its holding power counts, not that of picking up"),
        Threshold("relay", "relay coil", Value(0.15, "", _RELAY), Value(0.85, "", _PICK_UP),
                  _HOLDS, note="small relays hold with a volt-ampere or less"),
        _input(120, 1, 20.0, 1e-3, 79.0), _input(120, 2, 20.0, 4e-3, 74.0),
        _input(120, 3, 20.0, 2.5e-3, 74.0),
        _input(230, 1, 40.0, 1e-3, 164.0), _input(230, 2, 40.0, 5e-3, 159.0),
        _input(230, 3, 40.0, 3e-3, 159.0),
        Threshold("LED lamp", "LED lamp", Value(10e-6, "A", _GLOW), Value(0.5e-3, "A", _GLOW),
                  _LAMP, measure="lamp current",
                  note="the lamp's own circuit decides; try one of the kind"),
    )
}


def threshold(key: str) -> Threshold:
    """The threshold of that key; unknown ones are refused with the nearest known.

    >>> threshold("contactor").volts(threshold("contactor").off_at, 230.0)
    46.0
    """
    if key not in THRESHOLDS:
        raise Refused("load", "is not a known kind", given=key, hint=nearest(key, THRESHOLDS))
    return THRESHOLDS[key]


def longest_control_cable(
    *, hold_power: float, drop_out: float, voltage: float, frequency: float, capacitance: float
) -> float:
    """Longest control cable that lets a contactor drop out, by the trade's formula [m].

    L = m / (1 + m) × P / (2π f c U²): a coil taken as purely inductive in series with the cable.

    Parameters
    ----------
    hold_power : P of the coil at rated voltage [VA], above 0
    drop_out : m, share of rated voltage at which it drops out [1]
    voltage, frequency : U [V] and f [Hz] of the control circuit
    capacitance : c of the cable between the contact's cores [F/m]

    It errs on the side of caution: coils have resistance. Source: contactor makers' guidance.

    >>> round(longest_control_cable(hold_power=4.5, drop_out=0.25, voltage=240, frequency=50,
    ...                             capacitance=0.26e-9))
    191
    """
    given = (hold_power, drop_out, voltage, frequency, capacitance)
    if not all(x > 0 for x in given):
        raise Refused("control cable", "every quantity must be above 0", given=given)
    omega = 2 * math.pi * frequency
    return drop_out / (1 + drop_out) * hold_power / (omega * capacitance * voltage**2)
