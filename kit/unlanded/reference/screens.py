"""A cable's own screen: what a case that does not describe it is taken to have."""

from __future__ import annotations

from .records import Source, Value

_BRAID = Source("screens of control and signal cable, where a braid of copper wires has 5 to "
                "20 Ω/km, a foil with its drain wire up to 50", "judgement")
_OUTSIDE = Source("a screen of 5 to 15 mm under a sheath has about 100 to 200 pF/m on earthed "
                  "metal, 15 to 30 some 0.1 to 0.3 m off it, less in the open", "judgement")

SCREEN_RESISTANCE = Value(15e-3, "ohm/m", _BRAID, 5e-3, 50e-3)
SCREEN_TO_EARTH = Value(50e-12, "F/m", _OUTSIDE, 10e-12, 200e-12)
