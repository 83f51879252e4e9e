"""Devices: break times, bands and weights against printed figures."""

from __future__ import annotations

import math

import numpy as np
import pytest
from scipy import stats

from unlanded.errors import Refused
from unlanded.reference.devices import Device, TripBand, personnel_time, ring_wave
from unlanded.reference.records import Source

EXAMPLE = Source("an example", "judgement")


@pytest.mark.parametrize(
    ("kind", "multiple", "longest", "shortest"),
    # IEC 61008-1, table of maximum break and minimum non-actuating times (seen).
    [("general", 1, 0.3, 0.0), ("general", 2, 0.15, 0.0), ("general", 5, 0.04, 0.0),
     ("delayed", 1, 0.5, 0.13), ("delayed", 2, 0.2, 0.06), ("delayed", 5, 0.15, 0.05)],
)  # fmt: skip
@pytest.mark.parametrize("rated", [10e-3, 30e-3, 0.1, 0.3])
def test_break_times_as_printed(kind, multiple, longest, shortest, rated):
    device = Device(rated, kind)
    assert device.longest_time(multiple * rated) == longest
    assert device.shortest_time(multiple * rated) == shortest


def test_break_time_between_and_below_the_printed_multiples():
    device = Device(30e-3)
    assert device.longest_time(59e-3) == 0.3
    assert device.longest_time(149e-3) == 0.15
    assert device.longest_time(5.0) == 0.04
    assert math.isnan(device.longest_time(29.9e-3))  # the standard has it do nothing in any time
    assert math.isnan(Device(30e-3, "equipment").longest_time(1.0))


@pytest.mark.parametrize(
    ("milliamperes", "printed", "half_digit"),
    # UL 943, T = (20/I)^1.43 (seen); 5.59 s at 6 mA and 0.025 s at 264 mA are the curve's ends.
    # The other digits are worked out independently from the formula.
    [(5, 7.26, 0.005), (6, 5.594, 0.0005), (10, 2.694, 0.0005), (20, 1.000, 0.0005),
     (30, 0.560, 0.0005), (40, 0.371, 0.0005), (100, 0.1001, 0.00005), (264, 0.02498, 0.000005),
     (300, 0.02081, 0.000005), (1000, 0.020, 0.0005)],
)  # fmt: skip
def test_inverse_time_curve(milliamperes, printed, half_digit):
    found = personnel_time(milliamperes * 1e-3)
    assert found == pytest.approx(printed, rel=half_digit / printed, abs=0)


@pytest.mark.parametrize(
    ("device", "low", "high"),
    # IEC 61008-1: half and whole of the rated current (from memory); UL 943 and 943C (seen).
    [(Device(30e-3), 15e-3, 30e-3), (Device(0.3, "delayed"), 0.15, 0.3),
     (Device(6e-3, "personnel"), 4e-3, 6e-3), (Device(20e-3, "personnel"), 15e-3, 20e-3)],
)  # fmt: skip
def test_trip_band(device, low, high):
    assert device.non_operating == pytest.approx(low, rel=1e-12, abs=0)
    band = device.band
    assert (band.low, band.high) == pytest.approx((low, high), rel=1e-12, abs=0)
    assert float(band.chance(0.999 * low)) == 0.0
    assert float(band.chance(high)) == 1.0
    assert band.source.standing == "judgement"


def test_band_against_scipy():
    band = TripBand(15e-3, 21.6e-3, 30e-3, EXAMPLE)
    peer = stats.triang(6.6 / 15, loc=15e-3, scale=15e-3)
    currents = np.linspace(15.5e-3, 29.5e-3, 30)
    np.testing.assert_allclose(band.chance(currents), peer.cdf(currents), rtol=1e-12)
    flat = TripBand(19e-3, None, 22e-3, EXAMPLE)
    np.testing.assert_allclose(flat.chance(currents[9:13]),
                               stats.uniform(19e-3, 3e-3).cdf(currents[9:13]), rtol=1e-12)


def test_a_ramp_test_takes_the_place_of_the_band():
    exact = Device(30e-3, ramp_test=22e-3).band
    assert exact.chance([21.999e-3, 22e-3]).tolist() == [0.0, 1.0]
    stepped = Device(30e-3, ramp_test=22e-3, ramp_step=3e-3).band
    assert float(stepped.chance(20.5e-3)) == pytest.approx(0.5, rel=1e-12, abs=0)
    assert not Device(30e-3, ramp_test=22e-3).outside_its_standard
    assert Device(30e-3, ramp_test=14e-3).outside_its_standard
    assert Device(30e-3, ramp_test=31e-3).outside_its_standard


@pytest.mark.parametrize(
    ("waveform", "frequency", "low", "high"),
    # IEC 62423 (from memory): type B at 150, 400 and 1000 Hz; type F composite 0.5 to 1.4.
    [("B", 150, 0.5, 2.4), ("B", 400, 0.5, 6.0), ("B", 1000, 1.0, 14.0), ("F", 1000, 0.5, 1.4),
     ("AC", 50, 0.5, 1.0), ("A", 60, 0.5, 1.0)],
)  # fmt: skip
def test_limits_by_frequency(waveform, frequency, low, high):
    found = Device(30e-3, waveform=waveform).limits_at(frequency)
    assert found == pytest.approx((low * 30e-3, high * 30e-3), rel=1e-12, abs=0)


def test_where_the_standard_is_silent_a_current_counts_in_full():
    for waveform, frequency in (("AC", 150.0), ("A", 1000.0), ("F", 2000.0), ("B", 1001.0)):
        device = Device(30e-3, waveform=waveform)
        assert device.limits_at(frequency) is None
        assert device.weight(frequency) == 1.0
    assert Device(30e-3, waveform="B").weight(1000.0) == pytest.approx(0.5, rel=1e-12, abs=0)


def test_ring_wave_of_small_devices():
    assert ring_wave(Device(10e-3)).likely == 25.0  # IEC 61008-1 (from memory)
    assert ring_wave(Device(30e-3)).likely == 200.0


@pytest.mark.parametrize(
    ("given", "message"),
    [({"rated": 0.0}, "rated: must be above 0 A"),
     ({"rated": math.nan}, "rated: must be above 0 A"),
     ({"rated": 30e-3, "kind": "personnel"}, "must be 6 mA or 20 mA"),
     ({"rated": 6e-3, "kind": "personnel", "waveform": "A"}, "goes with kinds general"),
     ({"rated": 30e-3, "kind": "genral"}, 'did you mean "general"'),
     ({"rated": 30e-3, "ramp_test": 3e-3, "ramp_step": 3e-3}, "above its step")],
)  # fmt: skip
def test_refusals(given, message):
    with pytest.raises(Refused, match=message):
        Device(**given)


def test_refuses_a_time_at_no_current():
    with pytest.raises(Refused, match="residual current: must be above 0 A"):
        personnel_time(0.0)
