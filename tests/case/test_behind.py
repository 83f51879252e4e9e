"""The tables of a case about its device: what they give the study, and what they refuse."""

from __future__ import annotations

import math

import pytest

from case_text import PAIR
from unlanded.case.build import build_run
from unlanded.case.loading import read_case
from unlanded.errors import Refused

DEVICE = '[device]\nrated = "30 mA"\n'


def case_of(entry, device=DEVICE):
    return read_case(f"{PAIR}{device}[[standing]]\n{entry}\n")


def leak_of(entry):
    case = case_of(entry)
    return case.content.standing[0].leak(build_run(case))


def test_equipment_by_class():
    leak = leak_of('name = "desks"\nequipment = "printer"\ncount = 4\nuse = "25 %"')
    # Trade table (common practice): printers leak 0.5 to 1 mA.
    assert abs(leak.phasors[1]) * leak.low == pytest.approx(0.5e-3, rel=1e-12, abs=0)
    assert abs(leak.phasors[1]) * leak.high == pytest.approx(1e-3, rel=1e-12, abs=0)
    assert (leak.count, leak.use, leak.angle_known, leak.line) == (4, 0.25, False, "unknown")


def test_a_measured_current_with_its_limits_and_angle():
    leak = leak_of('name = "a"\nlead_degrees = 60\n'
                   'current = {likely = "2 mA", low = "1 mA", high = "3 mA"}\nline = "L"')
    assert leak.phasors[1] == pytest.approx(1e-3 + 1j * math.sqrt(3) * 1e-3, rel=1e-12, abs=0)
    assert (leak.low, leak.high, leak.angle_known) == (0.5, 1.5, True)


@pytest.mark.parametrize(
    ("entry", "milliamperes"),
    [('capacitance = "47 nF"', 2 * math.pi * 50 * 47e-9 * 230e3),
     ('resistance = "37 kohm"', 230e3 / 37e3),
     ('length = "100 m"\ncapacitance_per_metre = "100 pF/m"', 0.72257),  # trade: 0.72 mA per 100 m
     ('length = "100 m"\ncapacitance_per_metre = "100 pF/m"\ntolerance = "20 %"', 0.72257)],
)  # fmt: skip
def test_what_an_impedance_leaks(entry, milliamperes):
    found = leak_of(f'name = "x"\n{entry}')
    assert 1e3 * abs(found.phasors[1]) == pytest.approx(milliamperes, rel=1e-5, abs=0)
    assert (found.low, found.high) == ((0.8, 1.2) if "tolerance" in entry else (1.0, 1.0))


def test_other_cable_leaks_per_metre_what_the_run_does():
    text = (PAIR + '[run.surround]\nkind = "plane"\ngap = "1 mm"\n' + DEVICE +
            '[[standing]]\nname = "x"\nlength = "30 m"\n')
    case = read_case(text)
    run = build_run(case)
    leak = case.content.standing[0].leak(run)
    assert abs(leak.phasors[1]) == pytest.approx(3 * abs(run.residual), rel=1e-9, abs=0)


def test_a_drive_alone_and_with_its_filter():
    alone = leak_of('name = "drive"\nhigh_frequency = "6 mA"\nlowest_frequency = "2 kHz"\n'
                    'highest_frequency = "9 kHz"')
    assert (alone.fast, alone.band, dict(alone.phasors)) == (6e-3, (2e3, 9e3), {})
    both = leak_of('name = "drive"\nhigh_frequency = "6 mA"\ncapacitance = "100 nF"')
    assert both.fast == 6e-3
    assert abs(both.phasors[1]) > 0


@pytest.mark.parametrize(
    ("entry", "message"),
    [('name = "x"', "must give one of equipment, current"),
     ('name = "x"\ncapacitance = "1 nF"\nresistance = "1 kohm"', "must give one of"),
     ('name = "x"\nequipment = "printr"', 'did you mean "printer"'),
     ('name = "x"\nresistance = "0 ohm"', "must be above 0 Ω"),
     ('name = "x"\nresistance = "1 kohm"\nlead_degrees = 3', "goes with current"),
     ('name = "x"\nresistance = "1 kohm"\nline = "L2"', "is not a line of this case; given L2"),
     ('name = "x"\ncurrent = {likely = "1 mA", high = "0.9 mA"}', "in rising order"),
     ('name = "x"\ncurrent = "1 mA"\nuse = 1.1', "must be 0 to 1"),
     ('name = "x"\ncurrent = "1 mA"\nlead_degrees = 91', "must be −90 to 90"),
     ('name = "x"\nhigh_frequency = "1 mA"\nlowest_frequency = "200 kHz"', "higher|100 kHz|below"),
     ('equipment = "printer"', "name: is missing"),
     ('name = "x"\ncurrent = "1 mA"\n[[standing]]\nname = "x"\ncurrent = "1 mA"', "is used twice")],
)  # fmt: skip
def test_refusals_of_an_entry(entry, message):
    with pytest.raises(Refused, match=message):
        case_of(entry)


@pytest.mark.parametrize(
    ("device", "message"),
    [("", "device: is missing, and standing and log are about it"),
     ('[device]\nrated = "30 mA"\nkind = "personnel"\n', "device.rated: must be 6 mA or 20 mA"),
     ('[device]\nrated = "30 mA"\nramp_step = "3 mA"\n', "ramp_step: goes with ramp_test"),
     ('[device]\nrated = "30 mA"\nramp_test = "2 mA"\nramp_step = "3 mA"\n', "above its step"),
     ('[device]\nrated = "30"\n', "device.rated: needs a unit")],
)  # fmt: skip
def test_refusals_of_a_device(device, message):
    with pytest.raises(Refused, match=message):
        case_of('name = "x"\ncurrent = "1 mA"', device)


def test_a_ramp_test_reaches_the_device():
    case = case_of('name = "x"\ncurrent = "1 mA"',
                   '[device]\nrated = "30 mA"\nramp_test = "22 mA"\nramp_step = "3 mA"\n')
    band = case.content.device.device().band
    assert (band.low, band.high) == pytest.approx((19e-3, 22e-3), rel=1e-12, abs=0)
