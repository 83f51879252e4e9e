"""A short run with one spare conductor, which the tests of the causes share."""

from __future__ import annotations

import math

import numpy as np

from unlanded.physics.section import Conductor, Plane, Section
from unlanded.reference.instruments import INSTRUMENTS, Instrument, custom_instrument
from unlanded.study.ends import Driven, Termination
from unlanded.study.observation import NOTHING, Action, Observation, observe
from unlanded.study.readings import Pair
from unlanded.study.reduced import Reduced
from unlanded.study.run import Run
from unlanded.study.supply import Supply

FAR = Pair("spare@far")
PAIR = Section((Conductor("hot", 0, 0.02, 1e-3), Conductor("spare", 0.01, 0.02, 1e-3)), Plane(0))
OMEGA = 2 * math.pi * 50.0
# Maxwell matrix of 40 pF/m between the two and 30 pF/m from each to earth.
MATRIX = np.array([[70e-12, -40e-12], [-40e-12, 70e-12]])


def run(far: dict[str, Termination] | None = None, *, length: float = 50.0,
        supply: Supply | None = None) -> Run:
    """50 m, 230 V 50 Hz: 2 nF to the live conductor and 1.5 nF to earth."""
    return Run(PAIR, length, supply or Supply(230.0, 50.0), {"hot": Driven("L")}, far or {},
               (7e-3, 7e-3), MATRIX)


def reduced(base: Run | None = None) -> Reduced:
    """With the suspect "spare", and no range of the permittivity."""
    made = base or run()
    return Reduced(made, made, made, ("spare",))


def seen(tool: str | Instrument, text: str, pair: Pair = FAR, *,
         actions: frozenset[Action] = NOTHING, resistor: float = math.inf) -> Observation:
    """A reading by an instrument of the kit, or by one in hand."""
    found = INSTRUMENTS[tool] if isinstance(tool, str) else tool
    return observe(found, pair, text, actions=actions, resistor=resistor)


def exact(key: str, resistance: float) -> Instrument:
    """A meter whose statement is one count of a millivolt."""
    return custom_instrument(key, key, resistance=resistance, counts=1, resolution=1e-3)
