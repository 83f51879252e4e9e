"""The causes that a reading on a conductor nothing feeds can have, and what is thought beforehand.

Every cause is a change to the run: an element that joins the conductor to something, and for
magnetic pick-up a voltage in series along it. Its size is spread evenly over the logarithm of a
stated range. The shares are a judgement, which a case can replace.
"""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from typing import Literal, get_args

import numpy as np
from numpy.typing import ArrayLike, NDArray

from ..errors import Refused, nearest
from ..physics.network import EARTH
from ..reference.records import Source, Value
from .ends import ENDS, End
from .observation import Action

Cause = Literal[
    "capacitive coupling",
    "leakage to a live neighbour",
    "leakage to earth",
    "solid connection",
    "back-feed through a load",
    "magnetic pick-up",
    "none of these",
]
CAUSES: tuple[Cause, ...] = get_args(Cause)

_JUDGED = Source("how often each cause is met on site", "judgement")
SHARES: Mapping[Cause, Value] = {
    cause: Value(share, "", _JUDGED)
    for cause, share in zip(CAUSES, (0.50, 0.10, 0.08, 0.12, 0.10, 0.05, 0.05), strict=True)
}
SOLID_TO_LINE = Value(0.7, "", _JUDGED)  # the rest is to earth or neutral
FROM_THIS_CABLE = Value(0.6, "", _JUDGED)  # the rest is from another circuit of the same supply

_RANGE = Source("range that the cause is looked for in", "judgement")
LEAKAGE = Value(100e3, "Ω", Source("to ten times the 1 MΩ that an installation's insulation must "
                                   "have; above it the insulation is in order", "judgement"),
                1e3, 10e6)
CONTACT = Value(0.1, "Ω", _RANGE)  # of a solid connection, and of the earthed end of pick-up
LOAD = Value(1e3, "Ω", _RANGE, 10.0, 300e3)
LOAD_ANGLE = Value(30.0, "°", _RANGE, -30.0, 75.0)  # of the impedance, above 0 inductive
MUTUAL = Value(0.2e-6, "H/m", Source("mutual inductance of loaded neighbours, from a cable to a "
                                     "single core with return by earth", "judgement"),
               0.01e-6, 1.5e-6)
LOAD_CURRENT = Value(10.0, "A", _RANGE, 1.0, 100.0)


@dataclass(frozen=True)
class Variant:
    """One way in which a cause can be.

    Parameters
    ----------
    cause : which
    to : what the conductor is joined to, a line of the supply or "earth"; "" for nothing
    end : where, "near" or "far"; None anywhere along the run
    own : whether switching off the neighbours takes the voltage away
    share : of its cause [1]
    """

    cause: Cause
    to: str = ""
    end: End | None = None
    own: bool = True
    share: float = 1.0

    def joined(self, actions: frozenset[Action]) -> bool:
        """Whether the element is still there after the actions."""
        if not self.to or (self.end == "far" and "far end disconnected" in actions):
            return False
        return not (self.cause == "back-feed through a load" and "loads off" in actions)

    def live(self, actions: frozenset[Action]) -> bool:
        """Whether what it is joined to, or for magnetic pick-up the current, is still on."""
        if self.cause == "magnetic pick-up":
            return not actions & {"neighbours off", "loads off"}
        return self.to != EARTH and not (self.own and "neighbours off" in actions)

    def look(self, circumstances: Sequence[frozenset[Action]]) -> tuple[object, ...]:
        """What readings in these circumstances can tell of it: equal looks cannot be told apart."""
        place = self.end if self.cause == "magnetic pick-up" else None
        return (self.cause, self.to, place,
                *((self.joined(a), self.joined(a) and self.live(a)) for a in circumstances))


def variants(lines: Sequence[str], cable_lines: Sequence[str]) -> tuple[Variant, ...]:
    """Every variant of every cause; the shares of each cause add up to 1.

    `lines` are those of the supply, `cable_lines` those that conductors of the cable bring.
    """
    return tuple(_variants(tuple(lines), tuple(cable_lines) or tuple(lines)))


def _variants(lines: tuple[str, ...], cable_lines: tuple[str, ...]) -> Iterator[Variant]:
    yield Variant("capacitive coupling")
    for line in cable_lines:
        yield Variant("leakage to a live neighbour", line, share=1 / len(cable_lines))
    yield Variant("leakage to earth", EARTH)
    for end in ENDS:
        for line in lines:
            for own, share in ((True, FROM_THIS_CABLE.likely), (False, 1 - FROM_THIS_CABLE.likely)):
                each = share / (2 * len(lines))
                yield Variant("solid connection", line, end, own, SOLID_TO_LINE.likely * each)
                yield Variant("back-feed through a load", line, end, own, each)
        yield Variant("solid connection", EARTH, end, share=(1 - SOLID_TO_LINE.likely) / 2)
        yield Variant("magnetic pick-up", EARTH, end, share=0.5)
    yield Variant("none of these")


def size_range(cause: Cause, *, omega: float, length: float) -> Value | None:
    """What the size of a cause is, and its range: [ohm], or [V] for magnetic pick-up; else None.

    The induced voltage is ω M I length, with the ends of the ranges of M and I.
    """
    match cause:
        case "leakage to a live neighbour" | "leakage to earth":
            return LEAKAGE
        case "back-feed through a load":
            return LOAD
        case "magnetic pick-up":
            low, likely, high = (omega * length * getattr(MUTUAL, at) * getattr(LOAD_CURRENT, at)
                                 for at in ("low", "likely", "high"))
            return Value(likely, "V", MUTUAL.source, low, high)
    return None


def size_at(share: ArrayLike, given: Value) -> NDArray[np.float64]:
    """The size below which that share of the prior lies; the shape of `share`.

    >>> round(float(size_at(0.75, LEAKAGE)))
    1000000
    """
    decades = math.log(given.high / given.low)
    return np.asarray(given.low * np.exp(np.asarray(share, dtype=float) * decades))


def prior_shares(own: Mapping[str, float] | None = None) -> dict[Cause, float]:
    """Share of each cause before any reading; `own` replaces some, and all are made to add to 1."""
    given = dict(own or {})
    for cause, share in given.items():
        if cause not in CAUSES:
            raise Refused("cause", "is not known", given=cause, hint=nearest(cause, CAUSES))
        if not (share >= 0 and math.isfinite(share)):
            raise Refused(f'share of "{cause}"', "must be at least 0", given=share)
    shares = {c: float(given.get(c, SHARES[c].likely)) for c in CAUSES}
    total = sum(shares.values())
    if not total > 0:
        raise Refused("shares of the causes", "must not all be 0")
    return {c: s / total for c, s in shares.items()}
