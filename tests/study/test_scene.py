"""Hypotheses as something to solve."""

from __future__ import annotations

import numpy as np
import pytest

from example_causes import FAR, OMEGA, reduced, seen
from unlanded.reference.instruments import INSTRUMENTS
from unlanded.study.hypotheses import Variant, variants
from unlanded.study.readings import Pair
from unlanded.study.scene import Scene, average, groups, rms, suspects_in

PLAIN = Variant("capacitive coupling")
DIGITAL = INSTRUMENTS["digital-10M"]


def test_a_meter_loads_the_divider_as_by_hand() -> None:
    scene = Scene(reduced(), (PLAIN,), (DIGITAL,))
    zeros = np.zeros((1, len(scene.coordinates)))
    volts = scene.volts([seen(DIGITAL, "120.0 V")], np.array([0.5]), zeros)
    y = 1 / 10e6 + 1j * OMEGA * 100e-12
    want = abs(230 * 1j * OMEGA * 2e-9 / (1j * OMEGA * 3.5e-9 + y))
    assert float(volts[0, 0]) == pytest.approx(want, rel=1e-5, abs=0)


def test_a_resistor_beside_the_instrument_loads_too() -> None:
    scene = Scene(reduced(), (PLAIN,), (DIGITAL,))
    zeros = np.zeros((1, len(scene.coordinates)))
    both = [seen(DIGITAL, "120.0 V"), seen(DIGITAL, "9.00 V", resistor=100e3)]
    alone, beside = scene.volts(both, np.array([0.5]), zeros)[:, 0]
    want = 230 * OMEGA * 2e-9 / abs(1j * OMEGA * 3.6e-9 + 1 / 10e6 + 1e-5)
    assert float(beside) == pytest.approx(want, rel=1e-5, abs=0)
    assert beside < alone / 8


def test_the_tolerance_of_a_burden_is_a_coordinate_of_the_instrument() -> None:
    low = INSTRUMENTS["low-impedance"]
    scene = Scene(reduced(), (PLAIN,), (low,))
    score = np.zeros((2, len(scene.coordinates)))
    score[:, scene.coordinates.index("instrument low-impedance")] = [-9, 9]
    volts = scene.volts([seen(low, "0.4 V")], np.full(2, 0.5), score)[0]
    # 3 kΩ ± 20 % on 0.9 MΩ: the voltage is as the resistance.
    assert volts[1] / volts[0] == pytest.approx(1.2 / 0.8, rel=1e-4, abs=0)


def test_coordinates_are_those_of_the_run_the_tools_and_the_causes() -> None:
    load = Variant("back-feed through a load", "L", "far")
    scene = Scene(reduced(), (load,), (DIGITAL, DIGITAL))
    assert scene.coordinates == ("supply", "permittivity", "description", "live spare",
                                 "earth spare", "instrument digital-10M", "angle spare")
    assert scene.sized == "spare"
    assert Scene(reduced(), (PLAIN,), ()).sized == ""


def test_groups_hold_what_the_readings_cannot_tell_apart() -> None:
    found = variants(("L",), ("L",))
    plain = groups(found, [seen(DIGITAL, "1.00 V")])
    opened = groups(found, [seen(DIGITAL, "1.00 V",
                                 actions=frozenset({"far end disconnected"}))])
    assert len(plain) < len(opened)
    for made in (plain, opened):
        assert sum(g.share for g in made) == pytest.approx(7.0, rel=1e-12, abs=0)


def test_harmonics_add_as_squares() -> None:
    assert float(rms(np.array([[3.0], [4.0j]]))[0]) == pytest.approx(5.0, rel=1e-12, abs=0)


@pytest.mark.parametrize("share", [0.1, -0.2])
def test_an_averaging_instrument_counts_a_third_of_a_third_harmonic(share: float) -> None:
    # cos t + k cos 3t with no further zero: its rectified average is (2/π)(1 − k/3).
    got = average(np.array([[100.0], [100.0 * share]]), (1, 3))[0]
    assert got == pytest.approx(100 * (1 - share / 3), rel=1e-4, abs=0)


def test_a_moving_coil_meter_averages_and_a_digital_one_does_not() -> None:
    from example_causes import run
    from unlanded.study.supply import Supply

    coil = INSTRUMENTS["moving-coil"]
    scene = Scene(reduced(run(supply=Supply(230.0, 50.0, harmonics={3: 0.2}))), (PLAIN,), ())
    zeros = np.zeros((1, len(scene.coordinates)))
    readings = [seen(coil, "120 V", Pair("hot@far")), seen(DIGITAL, "230.0 V", Pair("hot@far"))]
    averaged, squared = scene.volts(readings, np.array([0.5]), zeros)[:, 0]
    assert averaged == pytest.approx(230 * (1 - 0.2 / 3), rel=1e-3, abs=0)
    assert squared == pytest.approx(230 * np.sqrt(1.04), rel=1e-5, abs=0)


def test_the_suspects_of_a_reading() -> None:
    reading = seen(DIGITAL, "1.00 V", Pair("hot@far", "spare@far"))
    assert suspects_in(reading, ("spare", "other")) == {"spare"}
    assert suspects_in(seen(DIGITAL, "1.00 V", FAR), ("other",)) == frozenset()
