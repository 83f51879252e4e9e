"""Trip by measurement: whether an instrument on a pair will trip the device, and how fast."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Literal

import numpy as np

from ..reference.devices import Device
from ..reference.instruments import Instrument
from .readings import Pair, ReadingSheet, SheetRow
from .residual import Margin
from .run import Run
from .standing import Complex

Verdict = Literal["will", "may", "will not", "not covered by the standard"]


@dataclass(frozen=True)
class MeasuredTrip:
    """One instrument on one pair, and what the device then sees.

    Parameters
    ----------
    added : residual current that the instrument adds, RMS [A]
    expected, lowest, highest : residual current with it in place, over the draws of the standing
        current, the instrument's tolerance and the range of the run's inputs [A]
    verdict : whether the device trips
    chance : of that, over the same draws and the device's own spread [1]
    longest : time within which its standard has it trip at `expected` [s]; NaN where none is
        stated. Held for less, the instrument may leave it closed.
    shortest : time for which it must not trip [s]
    """

    pair: Pair
    instrument: Instrument
    added: float
    expected: float
    lowest: float
    highest: float
    verdict: Verdict
    chance: float
    longest: float
    shortest: float


def verdict(device: Device, lowest: float, highest: float, *, frequency: float) -> Verdict:
    """What the device does at a residual current between two limits [A].

    "will" where even the lowest must trip it, "will not" where even the highest must not. A ramp
    test takes the place of its class's limits at its rated frequency.

    >>> verdict(Device(30e-3), 14.9e-3, 14.9e-3, frequency=50.0)
    'will not'
    >>> verdict(Device(30e-3, "general", "AC"), 40e-3, 40e-3, frequency=400.0)
    'not covered by the standard'
    """
    stated = device.limits_at(frequency)
    if stated is None:
        return "not covered by the standard"
    band = device.band
    of_class = device.non_operating, device.rated
    low, high = (band.low, band.high) if stated == of_class else stated
    if lowest >= high:
        return "will"
    return "will not" if highest < low else "may"


def measured_trips(
    sheet: ReadingSheet, margin: Margin, *, runs: Sequence[Run] = ()
) -> tuple[MeasuredTrip, ...]:
    """Every row of the sheet that draws a current, against the device of `margin`.

    `runs` are the sheet's run at the ends of its inputs' ranges.
    """
    return tuple(_trip(row, margin, sheet.run.frequency, runs)
                 for row in sheet.rows if abs(row.current) > 0)


def _trip(row: SheetRow, margin: Margin, frequency: float, runs: Sequence[Run]) -> MeasuredTrip:
    device = margin.device
    added = _added(row, runs)
    sets = [margin.with_added(current) for current in added]
    expected = float(sets[0].mean())
    lowest, highest = float(np.min(sets)), float(np.max(sets))
    said = verdict(device, lowest, highest, frequency=frequency)
    trips = said in ("will", "may")
    return MeasuredTrip(
        row.pair, row.instrument, abs(row.residual_added), expected, lowest, highest, said,
        float(device.band.chance(sets[0]).mean()),
        device.longest_time(expected) if trips else float("nan"),
        device.shortest_time(expected) if trips else float("nan"))


def _added(row: SheetRow, runs: Sequence[Run]) -> Complex:
    """What it may add: as the sheet has it, then at the ends of its tolerance and of the runs."""
    admittance = row.current / row.voltage
    tolerance = row.instrument.tolerance
    met = [(row.unloaded, row.source_impedance, row.residual_added / row.current)]
    for run in runs:
        port = run.port(row.pair.a, row.pair.b)
        met.append((port.voltage, port.impedance, port.residual_per_ampere))
    ends = [y * v / (1 + y * z) * per for v, z, per in met
            for y in (admittance / (1 - tolerance), admittance / (1 + tolerance))]
    return np.array([row.residual_added, *ends])
