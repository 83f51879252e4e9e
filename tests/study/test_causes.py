"""The odds of the causes, against closed forms and against plain Monte Carlo."""

from __future__ import annotations

import math
from functools import cache

import numpy as np
import pytest

from example_causes import FAR, OMEGA, exact, reduced, run, seen
from unlanded.errors import Refused
from unlanded.study.causes import Explanation, explain, quantiles
from unlanded.study.hypotheses import LEAKAGE, SHARES
from unlanded.study.likelihood import likelihood
from unlanded.study.observation import Observation
from unlanded.study.readings import Pair
from unlanded.study.reduced import Reduced

ALL_WELL = (("digital-10M", "124.1 V"), ("low-impedance", "0.4 V"))


@cache
def told(*readings: tuple[str, str]) -> Explanation:
    return explain(reduced(), [seen(tool, text) for tool, text in readings])


def test_two_readings_with_two_burdens_give_the_thevenin_source() -> None:
    # Noise-free limit: |V1| on R1 and |V2| on R2 give the source of one capacitance,
    # ω C = √((V2²/R2² − V1²/R1²) / (V1² − V2²)), and with it the unloaded voltage.
    coupling, earth = 2.2e-9, 1.3e-9
    r1, r2 = 10e6, 300e3
    total = OMEGA * (coupling + earth)
    v1, v2 = (230 * OMEGA * coupling / math.hypot(total, 1 / r) for r in (r1, r2))
    omega_c = math.sqrt((v2**2 / r2**2 - v1**2 / r1**2) / (v1**2 - v2**2))
    assert omega_c == pytest.approx(total, rel=1e-9, abs=0)
    readings = [seen(exact("one", r1), f"{v1:.3f} V"), seen(exact("two", r2), f"{v2:.3f} V")]
    found = explain(reduced(), readings, shares={c: float(c == "capacitive coupling")
                                                 for c in SHARES})
    live, rest, weight = found.capacitances("spare", "capacitive coupling")
    # That one of the two is misread keeps a share of about one in a hundred.
    low, middle, high = quantiles(live + rest, weight, (0.025, 0.5, 0.975))
    assert middle == pytest.approx(omega_c / OMEGA, rel=2e-4, abs=0)
    assert (high - low) / middle < 1e-3


def test_odds_agree_with_plain_monte_carlo() -> None:
    readings = [seen("moving-coil", "90 V"), seen("low-impedance", "0.4 V"),
                seen("two-pole", "lit")]
    found = explain(reduced(), readings, stable=0.002)
    rng = np.random.default_rng(3)
    evidence = {cause: monte_carlo(readings, cause, rng)
                for cause in ("capacitive coupling", "leakage to earth",
                              "leakage to a live neighbour")}
    for cause, (mean, error) in evidence.items():
        (mine,) = (h for h, _ in found.of_cause("spare", cause))
        assert math.hypot(error / mean, mine.error) < 0.02
        assert mine.evidence == pytest.approx(
            mean, rel=4 * math.hypot(error / mean, mine.error), abs=0), cause


def monte_carlo(readings: list[Observation], cause: str, rng: np.random.Generator
                ) -> tuple[float, float]:
    """Evidence by plain draws from the prior through a divider written out by hand."""
    count = 1_600_000
    supply = 230 * (1 + 0.03 * rng.standard_normal(count))
    both = np.exp(0.12 * np.sinh(rng.standard_normal(count)) / math.sinh(1))
    live = 2e-9 * both * np.exp(0.15 * rng.standard_normal(count))
    earth = 1.5e-9 * both * np.exp(0.15 * rng.standard_normal(count))
    ohms = LEAKAGE.low * (LEAKAGE.high / LEAKAGE.low) ** rng.random(count)
    leak = 0.0 if cause == "capacitive coupling" else 1 / ohms
    to_live = leak if cause == "leakage to a live neighbour" else 0.0
    loads = {"moving-coil": (2.25e6, 0.05), "low-impedance": (3e3, 0.2), "two-pole": (200e3, 0.2)}
    volts = []
    for r in readings:
        nominal, tolerance = loads[r.instrument.key]
        y = 1 / (nominal * (1 + tolerance * rng.uniform(-1, 1, count)))
        volts.append(abs(supply * (1j * OMEGA * live + to_live)
                         / (1j * OMEGA * (live + earth) + leak + y)))
    weight = likelihood(readings, top=1.25 * 230).gain(np.array(volts)).prod(axis=0)
    return float(weight.mean()), float(weight.std() / math.sqrt(count))


def test_what_fits_coupling_is_called_coupling() -> None:
    odds = told(*ALL_WELL).odds("spare")
    assert odds["capacitive coupling"] > 0.85
    assert sum(odds.values()) == pytest.approx(1.0, rel=1e-12, abs=0)
    assert odds["solid connection"] < 1e-4


@pytest.mark.parametrize(("readings", "cause"), [
    ((("digital-10M", "229.8 V"), ("low-impedance", "228.9 V")), "solid connection"),
    ((("digital-10M", "21.3 V"), ("low-impedance", "0.4 V")), "leakage to earth"),
    ((("digital-10M", "226.0 V"), ("low-impedance", "17.1 V")), "leakage to a live neighbour"),
    ((("digital-10M", "1.23 V"), ("low-impedance", "1.2 V")), "magnetic pick-up"),
    ((("digital-10M", "60.0 V"), ("low-impedance", "60.1 V")), "none of these"),
])
def test_textbook_readings_get_their_cause(
    readings: tuple[tuple[str, str], ...], cause: str
) -> None:
    # What tells the causes apart (common practice, no source): a phantom falls,
    # a leak falls by R/(R + 3 kΩ), a connection and an induced voltage stay.
    assert told(*readings).likeliest("spare") == cause


def test_a_back_feed_shows_when_the_load_is_switched_off() -> None:
    readings = [seen("digital-10M", "229.8 V"), seen("low-impedance", "212.0 V"),
                seen("digital-10M", "124.0 V", actions=frozenset({"loads off"}))]
    odds = explain(reduced(), readings).odds("spare")
    assert odds["back-feed through a load"] > 0.95


def test_the_size_of_a_leak_comes_out() -> None:
    # 100 kΩ to earth beside 3.5 nF, coupled by 2 nF: |V| = 230 ω 2n / |jω 3.5n + 1/100k|
    volts = 230 * OMEGA * 2e-9 / abs(1j * OMEGA * 3.5e-9 + 1e-5 + 1e-7)
    found = told(("digital-10M", f"{volts:.2f} V"), ("low-impedance", "0.4 V"))
    sizes, weights = found.sizes("spare", "leakage to earth")
    low, high = quantiles(sizes, weights, (0.025, 0.975))
    assert low < 100e3 < high
    # Well below the reactance, V = 230 ω C R: R is as unknown as C, the supply and the meter.
    rng = np.random.default_rng(4)
    log = (0.15 * rng.standard_normal(10**6) + 0.03 * rng.standard_normal(10**6)
           + 0.12 * np.sinh(rng.standard_normal(10**6)) / math.sinh(1))
    want = np.exp(np.subtract(*np.quantile(log, (0.975, 0.025))))
    assert high / low == pytest.approx(want, rel=0.1, abs=0)


def test_one_misread_value_does_not_decide() -> None:
    found = told(*ALL_WELL, ("moving-coil", "120 V"), ("digital-10M", "12.4 V"))
    assert found.likeliest("spare") == "capacitive coupling"
    assert found.misread(3) > 0.9
    assert max(found.misread(k) for k in range(3)) < 0.1


def test_what_each_reading_told_is_the_change_of_the_odds_without_it() -> None:
    whole = told(*ALL_WELL)
    without = told(ALL_WELL[0])
    causes = ("capacitive coupling", "solid connection")
    ratio = [e.odds("spare")[causes[0]] / e.odds("spare")[causes[1]] for e in (whole, without)]
    got = whole.told("spare", 1)
    assert got[causes[0]] - got[causes[1]] == pytest.approx(
        math.log10(ratio[0] / ratio[1]), rel=0.03, abs=0)


def test_without_readings_the_odds_are_those_beforehand() -> None:
    odds = explain(reduced(), []).odds("spare")
    for cause, share in SHARES.items():
        assert odds[cause] == pytest.approx(share.likely, rel=0.02, abs=0)


def test_the_supply_is_itself_read() -> None:
    high = [seen("bench-1M", "241.50 V", Pair("hot@far")), seen("digital-10M", "129.9 V")]
    found = explain(reduced(), high)
    supply = next(h for h, _ in found.of_cause("spare", "capacitive coupling"))
    column = supply.scene.coordinates.index("supply")
    mean = np.average(supply.draws.score[:, column], weights=supply.draws.weight)
    assert 230 * (1 + 0.03 * mean) == pytest.approx(241.5, rel=3e-3, abs=0)


def test_the_stated_error_is_aimed_at() -> None:
    found = told(*ALL_WELL)
    assert 0 < found.error <= 0.01


def test_two_suspects_share_one_state() -> None:
    from dataclasses import replace

    import unlanded.physics.section as section
    wires = tuple(section.Conductor(n, 0.01 * k, 0.02, 1e-3)
                  for k, n in enumerate(("hot", "spare", "other")))
    matrix = np.array([[90e-12, -30e-12, -20e-12], [-30e-12, 90e-12, -30e-12],
                       [-20e-12, -30e-12, 90e-12]])
    base = run()
    three = replace(base, section=section.Section(wires, section.Plane(0)), capacitance=matrix,
                    near={"hot": base.near["hot"]}, far={}, resistance=(7e-3,) * 3)
    made = Reduced(three, three, three, ("spare", "other"))
    volts = [abs(three.voltage(f"{n}@far")) for n in made.suspects]
    well = [seen("digital-10M", f"{0.985 * v:.1f} V", Pair(f"{n}@far"))
            for n, v in zip(made.suspects, volts, strict=True)]
    found = explain(made, well)
    for n in made.suspects:
        assert found.likeliest(n) == "capacitive coupling"
    # A connection of the one lifts the other: both readings then point to it alone.
    lifted = (30 * 230 + 20 * 230) / 90
    found = explain(made, [seen("digital-10M", "230.1 V", Pair("spare@far")),
                           seen("low-impedance", "229.0 V", Pair("spare@far")),
                           seen("digital-10M", f"{0.98 * lifted:.1f} V", Pair("other@far"))])
    assert found.likeliest("spare") in ("solid connection", "back-feed through a load")
    assert found.likeliest("other") == "capacitive coupling"


def test_what_cannot_be_explained_is_refused() -> None:
    with pytest.raises(Refused, match="40 in one explanation"):
        explain(reduced(), [seen("digital-10M", "1.00 V")] * 41)
    base = run()
    with pytest.raises(Refused, match="a conductor that nothing feeds"):
        explain(Reduced(base, base, base, ()), [])


def test_the_same_readings_give_the_same_odds() -> None:
    readings = [seen(*r) for r in ALL_WELL]
    assert explain(reduced(), readings).odds("spare") == told(*ALL_WELL).odds("spare")


def test_weighted_quantiles_against_numpy() -> None:
    rng = np.random.default_rng(0)
    values = rng.normal(size=5000)
    got = quantiles(values, np.ones(5000), (0.05, 0.5, 0.95))
    np.testing.assert_allclose(got, np.quantile(values, (0.05, 0.5, 0.95)), rtol=0.02)


def test_far_and_near_are_the_same_to_a_coupled_conductor() -> None:
    near = explain(reduced(), [seen("digital-10M", "124.1 V", Pair("spare@near"))])
    far = explain(reduced(), [seen("digital-10M", "124.1 V", FAR)])
    assert near.odds("spare")["capacitive coupling"] == pytest.approx(
        far.odds("spare")["capacitive coupling"], rel=0.01, abs=0)
