"""What instruments should read on conductors that nothing feeds, and what margin a residual-current
device has left.

This page is the table of contents; each name is documented where it is defined. A calculation
never proves a conductor dead: prove dead at the point of work with a proved instrument.
"""

from __future__ import annotations

from importlib import import_module
from typing import Any

__version__ = "0.1.0"

# Public name -> module that defines it; imported when first used, so that `import unlanded` costs
# about what numpy does.
_CONTENTS = {
    # cross-sections
    "Conductor": "physics.section",
    "Pipe": "physics.section",
    "Plane": "physics.section",
    "Section": "physics.section",
    "capacitance_matrix": "physics.capacitance",
    "inductance_matrix": "physics.inductance",
    # one number
    "two_wires": "physics.closed_forms",
    "wire_over_plane": "physics.closed_forms",
    "coaxial": "physics.closed_forms",
    "off_centre_in_screen": "physics.closed_forms",
    "divider": "physics.divider",
    "reading": "physics.divider",
    "loading_error": "physics.divider",
    "si": "units",
    "show": "units",
    # networks and burdens
    "Burden": "physics.burden",
    "Network": "physics.network",
    "INSTRUMENTS": "reference.instruments",
    "instrument": "reference.instruments",
    "custom_instrument": "reference.instruments",
    # a run and its readings
    "Supply": "study.supply",
    "Driven": "study.ends",
    "Bonded": "study.ends",
    "Open": "study.ends",
    "Joined": "study.ends",
    "Through": "study.ends",
    "Run": "study.run",
    "Screen": "study.run",
    "Pair": "study.readings",
    "reading_sheet": "study.readings",
    # residual-current devices and their margin
    "Device": "reference.devices",
    "personnel_time": "reference.devices",
    "capacitive_leak": "study.standing",
    "resistive_leak": "study.standing",
    "equipment_leak": "study.standing",
    "run_leak": "study.standing",
    "residual_margin": "study.residual",
    "longest_run": "study.residual",
    "measured_trips": "study.trip",
    "regroup": "study.regrouping",
    # what readings mean
    "observe": "study.observation",
    "Reduced": "study.reduced",
    "explain": "study.causes",
    "next_readings": "study.next_reading",
    # how sure, how long, how small
    "Input": "study.spread",
    "propagate": "study.spread",
    "sensitivity": "study.spread",
    "UncertainRun": "study.uncertain",
    "spread_sheet": "study.banded",
    "solve_for": "study.sizing",
    "bleeder": "study.sizing",
    "meter_window": "study.sizing",
    "operation": "study.operation",
    "touch_sheet": "study.touch",
    "longest_control_cable": "reference.loads",
    # case files and memos
    "load_case": "case.loading",
    "build_run": "case.build",
    "Refused": "errors",
}

__all__ = ["__version__", *_CONTENTS]


def __getattr__(name: str) -> Any:
    if name not in _CONTENTS:
        raise AttributeError(f"module 'unlanded' has no attribute {name!r}")
    return getattr(import_module(f".{_CONTENTS[name]}", __name__), name)


def __dir__() -> list[str]:
    return sorted(__all__)
