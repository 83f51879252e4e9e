"""The reduced run against the whole network of the run, with the same thing connected."""

from __future__ import annotations

import math

import numpy as np
import pytest

from example_causes import FAR, MATRIX, OMEGA, PAIR, reduced, run
from unlanded.errors import Refused
from unlanded.physics.burden import Burden
from unlanded.study.ends import Bonded, Driven, Termination, Through
from unlanded.study.hypotheses import LEAKAGE, LOAD, Variant
from unlanded.study.observation import NOTHING
from unlanded.study.readings import Pair
from unlanded.study.reduced import Defect, Reduced, instruments_of, may_be_suspect
from unlanded.study.run import Run
from unlanded.study.supply import Supply

ZERO = {"supply": np.zeros(1)}
# A run short against its own impedance: its series resistance and what the middle of a conductor
# differs from its ends make less than this.
CLOSE = 2e-3


def port(made: Reduced, *defects: Defect, pair: Pair = FAR) -> tuple[complex, complex]:
    """Unloaded voltage and impedance with the defects."""
    state = made.solve(made.capacitance(ZERO), ZERO, defects, NOTHING)
    v, z = made.port(state, pair, ZERO)
    return complex(v[0, 0]), complex(z[0, 0])


def defect(variant: Variant, size: float, angle: float = 0.0) -> Defect:
    return Defect("spare", variant, np.array([size]), np.array([angle]))


def test_capacitive_coupling_is_the_divider_and_the_run() -> None:
    v, z = port(reduced())
    assert abs(v) == pytest.approx(230 * 40 / 70, rel=1e-6, abs=0)
    assert abs(z) == pytest.approx(1 / (OMEGA * 3.5e-9), rel=1e-9, abs=0)
    whole = run().port("spare@far")
    assert abs(v) == pytest.approx(abs(whole.voltage), rel=CLOSE, abs=0)
    assert abs(z) == pytest.approx(abs(whole.impedance), rel=CLOSE, abs=0)


@pytest.mark.parametrize(("variant", "size", "angle", "end"), [
    (Variant("leakage to a live neighbour", "L"), 200e3, 0.0, Through(Burden(200e3), "hot")),
    (Variant("leakage to earth", "earth"), 150e3, 0.0, Through(Burden(150e3), "earth")),
    (Variant("back-feed through a load", "L", "far"), 5e3, math.radians(60),
     Through(Burden(2.5e3, 5e3 * math.sin(math.radians(60)) / OMEGA), "L")),
    (Variant("solid connection", "L", "far"), 1.0, 0.0, Through(Burden(0.1), "L")),
])
def test_each_cause_is_what_the_run_makes_of_it(
    variant: Variant, size: float, angle: float, end: Termination
) -> None:
    v, z = port(reduced(), defect(variant, size, angle))
    whole = run({"spare": end}).port("spare@far")
    assert abs(v) == pytest.approx(abs(whole.voltage), rel=CLOSE, abs=0)
    if variant.cause != "solid connection":  # there the run's own resistance counts
        assert abs(z) == pytest.approx(abs(whole.impedance), rel=CLOSE, abs=0)


def test_an_induced_voltage_shows_at_the_end_that_is_not_earthed() -> None:
    pick_up = defect(Variant("magnetic pick-up", "earth", "near"), 1.5)
    v, z = port(reduced(), pick_up)
    assert abs(v) == pytest.approx(1.5, rel=1e-3, abs=0)
    assert abs(z) == pytest.approx(0.1, rel=1e-3, abs=0)
    at_earthed_end, _ = port(reduced(), pick_up, pair=Pair("spare@near"))
    assert abs(at_earthed_end) < 1e-4 * 1.5


def test_a_pair_with_the_live_conductor_is_the_difference() -> None:
    v, z = port(reduced(), pair=Pair("hot@far", "spare@far"))
    assert abs(v) == pytest.approx(230 * 30 / 70, rel=1e-4, abs=0)
    assert abs(z) == pytest.approx(1 / (OMEGA * 3.5e-9), rel=1e-9, abs=0)


def test_actions_take_away_what_they_should() -> None:
    base = run({"spare": Through(Burden(20e3), "earth")})
    made = reduced(base)
    def volts(*actions: str) -> float:
        state = made.solve(made.capacitance(ZERO), ZERO, (), frozenset(actions))  # type: ignore
        return float(abs(made.port(state, FAR, ZERO)[0][0, 0]))
    assert volts("neighbours off") == 0.0
    assert volts() < 5 < volts("loads off")
    assert volts("far end disconnected") == pytest.approx(volts("loads off"), rel=1e-12, abs=0)


def test_two_free_conductors_share_what_is_between_them() -> None:
    both = Run(PAIR, 50.0, Supply(230.0, 50.0), {}, {}, (7e-3, 7e-3), MATRIX)
    made = Reduced(both, both, both, ("hot", "spare"))
    state = made.solve(made.capacitance(ZERO), ZERO, (), NOTHING)
    want = np.linalg.inv(1j * OMEGA * 50 * MATRIX)
    np.testing.assert_allclose(state.impedance[0, 0], want, rtol=1e-9)


def test_harmonics_are_solved_beside_the_fundamental() -> None:
    made = reduced(run(supply=Supply(230.0, 50.0, harmonics={3: 0.1})))
    state = made.solve(made.capacitance(ZERO), ZERO, (), NOTHING)
    v, z = made.port(state, FAR, ZERO)
    assert made.orders == (1, 3)
    # The divider is the same at both; the impedance is a third.
    np.testing.assert_allclose(abs(v[1]), 0.1 * abs(v[0]), rtol=1e-3)
    np.testing.assert_allclose(abs(z[1]), abs(z[0]) / 3, rtol=1e-6)


def test_what_is_fed_is_no_suspect() -> None:
    with pytest.raises(Refused, match=r'"hot".*fed'):
        Reduced(run(), run(), run(), ("hot",))
    assert may_be_suspect(run({"spare": Bonded("earth")}), "spare")
    assert not may_be_suspect(run({"spare": Driven("L")}), "spare")


def test_sizes_run_over_their_ranges() -> None:
    made = reduced()
    ends = np.array([0.0, 1.0])
    leak = made.defect("spare", Variant("leakage to earth", "earth"), ends, ends)
    np.testing.assert_allclose(leak.size, [LEAKAGE.low, LEAKAGE.high], rtol=1e-12)
    load = made.defect("spare", Variant("back-feed through a load", "L", "far"), ends, ends)
    np.testing.assert_allclose(load.size, [LOAD.low, LOAD.high], rtol=1e-12)
    np.testing.assert_allclose(np.degrees(load.angle), [-30.0, 75.0], rtol=1e-12)


def test_an_instrument_without_tolerance_has_no_coordinate() -> None:
    from unlanded.reference.instruments import INSTRUMENTS, custom_instrument

    plain = custom_instrument("mine", "mine", resistance=1e6)
    assert instruments_of([INSTRUMENTS["digital-10M"], plain]) == ("instrument digital-10M",)
