"""The network against nodal admittances set up by hand, and what every passive network obeys."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from numpy.testing import assert_allclose

from unlanded.errors import Refused
from unlanded.physics.burden import Burden
from unlanded.physics.network import EARTH, Network

FREQUENCIES = np.array([16.7, 50.0, 2500.0])
SEEDS = st.integers(0, 2**32 - 1)
seeded = settings(max_examples=40, deadline=None)


class Drawn:
    """A random network of resistors, capacitors, coils and coupled branches with two sources.

    `network()` builds it in the kit; `voltages(f)` solves the same from an incidence matrix and
    branch admittances, each source turned into a current beside its impedance.
    """

    def __init__(self, seed: int) -> None:
        rng = np.random.default_rng(seed)
        self.names = [f"n{k}" for k in range(rng.integers(3, 8))]
        places = [*self.names, EARTH]

        def pair() -> tuple[str, str]:
            a, b = rng.choice(len(places), 2, replace=False)
            return places[a], places[b]

        def spread(low: float, high: float) -> float:
            return float(10 ** rng.uniform(low, high))

        # Capacitors to earth, so that nothing floats, and elements anywhere. Reactances stay under
        # some 1e6 of the smallest resistance: beyond, the nodal admittances lose the digits.
        self.burdens = [(n, EARTH, Burden(capacitance=spread(-7, -5))) for n in self.names]
        for _ in range(6):
            makes = (Burden(spread(1, 7)), Burden(spread(1, 5), inductance=spread(-3, 1)),
                     Burden(spread(4, 7), capacitance=spread(-11, -8)),
                     Burden(spread(3, 5), capacitance=1e-7, front_resistance=spread(1, 3)))
            self.burdens.append((*pair(), makes[rng.integers(len(makes))]))
        root = rng.uniform(-1, 1, (3, 3)) * 1e-2
        self.pairs = [pair() for _ in range(3)]
        self.resistance = np.diag(10 ** rng.uniform(-1, 2, 3))
        self.inductance = root @ root.T + 1e-4 * np.eye(3)
        self.sources = [(*pair(), complex(*rng.normal(0, 100, 2)), spread(0, 3), spread(-4, -1))
                        for _ in range(2)]
        self.rng = rng

    def network(self) -> Network:
        network = Network()
        for a, b, burden in self.burdens:
            network.burden(a, b, burden)
        network.series_branches(self.pairs, self.resistance, self.inductance)
        self.numbers = [network.voltage_source(a, b, v, resistance=r, inductance=x)
                        for a, b, v, r, x in self.sources]
        return network

    def incidence(self, pairs) -> np.ndarray:
        out = np.zeros((len(pairs), len(self.names) + 1))
        number = {n: k for k, n in enumerate([*self.names, EARTH])}
        for row, (a, b, *_) in enumerate(pairs):
            out[row, number[a]], out[row, number[b]] = 1, -1
        return out[:, :-1]

    def admittance(self, frequency: float) -> np.ndarray:
        w = 2j * np.pi * frequency
        y = np.zeros((len(self.names),) * 2, dtype=complex)
        for at, (_, _, b) in zip(self.incidence(self.burdens), self.burdens, strict=True):
            own = 1 / (b.resistance + w * b.inductance) + w * b.capacitance
            y += np.outer(at, at) / (b.front_resistance + 1 / own)
        at = self.incidence(self.pairs)
        y += at.T @ np.linalg.inv(self.resistance + w * self.inductance) @ at
        for at, (*_, r, x) in zip(self.incidence(self.sources), self.sources, strict=True):
            y += np.outer(at, at) / (r + w * x)
        return y

    def voltages(self, frequency: float) -> np.ndarray:
        w = 2j * np.pi * frequency
        into = sum(at * v / (r + w * x) for at, (_, _, v, r, x)
                   in zip(self.incidence(self.sources), self.sources, strict=True))
        return np.linalg.solve(self.admittance(frequency), into)


def largest(values, expected, rtol=1e-9):
    """Agreement within `rtol` of the largest value: small ones are differences of large ones."""
    assert np.abs(values - expected).max() <= rtol * np.abs(expected).max()


@seeded
@given(SEEDS)
def test_voltages_by_nodal_admittances(seed):
    drawn = Drawn(seed)
    solution = drawn.network().solve(FREQUENCIES)
    for k, f in enumerate(FREQUENCIES):
        largest(np.array([solution.voltage(n)[k] for n in drawn.names]), drawn.voltages(f))


@seeded
@given(SEEDS)
def test_impedances_by_nodal_admittances(seed):
    drawn = Drawn(seed)
    solution = drawn.network().solve(FREQUENCIES)
    for k, f in enumerate(FREQUENCIES):
        transfer = [[solution.transfer(a, EARTH, b, EARTH)[k] for b in drawn.names]
                    for a in drawn.names]
        largest(np.array(transfer), np.linalg.inv(drawn.admittance(f)))


@seeded
@given(SEEDS)
def test_reciprocity(seed):
    drawn = Drawn(seed)
    solution = drawn.network().solve(FREQUENCIES)
    a, b, c = drawn.names[:3]
    forth, back = solution.transfer(a, b, c, EARTH), solution.transfer(c, EARTH, a, b)
    scale = np.sqrt(np.abs(solution.impedance(a, b) * solution.impedance(c)))
    assert np.all(np.abs(forth - back) <= 1e-9 * scale)


@seeded
@given(SEEDS)
def test_passivity(seed):
    # Whatever flows in, no more power comes back out: Re Z has no eigenvalue below 0.
    drawn = Drawn(seed)
    solution = drawn.network().solve(FREQUENCIES)
    for k in range(len(FREQUENCIES)):
        z = np.array([[solution.transfer(a, EARTH, b, EARTH)[k] for b in drawn.names]
                      for a in drawn.names])
        power = np.linalg.eigvalsh((z + z.conj().T) / 2)
        assert power.min() >= -1e-12 * np.abs(z).max()


@seeded
@given(SEEDS)
def test_power_delivered_is_power_dissipated(seed):
    drawn = Drawn(seed)
    solution = drawn.network().solve(50.0)
    delivered = dissipated = 0.0
    for number, (_, _, v, r, _) in zip(drawn.numbers, drawn.sources, strict=True):
        current = solution.source_current(number)[0]
        delivered += (v * current.conjugate()).real
        dissipated += r * abs(current) ** 2
    for a, b, burden in drawn.burdens:
        dissipated += abs(solution.voltage(a, b)[0]) ** 2 * burden.admittance(50.0).real
    across = np.array([solution.voltage(a, b)[0] for a, b in drawn.pairs])
    branch = np.linalg.solve(drawn.resistance + 100j * np.pi * drawn.inductance, across)
    dissipated += (branch.conj() @ drawn.resistance @ branch).real
    assert delivered == pytest.approx(dissipated, rel=1e-8, abs=0)


@seeded
@given(SEEDS)
def test_burden_is_the_same_as_solving_with_it_built_in(seed):
    drawn = Drawn(seed)
    network = drawn.network()
    a, b = drawn.names[0], drawn.names[1] if seed % 2 else EARTH
    burden = Burden(float(10 ** drawn.rng.uniform(0, 7)), capacitance=100e-12)
    unloaded = network.solve(FREQUENCIES)
    connected = unloaded.connect(burden, a, b, sources=drawn.numbers)
    network.burden(a, b, burden)
    built_in = network.solve(FREQUENCIES)
    # A voltage between two nodes is the difference of theirs, and has their rounding.
    nodes = np.max([np.abs(unloaded.voltage(n)) for n in drawn.names], axis=0)
    assert np.all(np.abs(connected.voltage - built_in.voltage(a, b)) <= 1e-9 * nodes)
    assert_allclose(connected.current, burden.admittance(FREQUENCIES) * connected.voltage,
                    rtol=1e-12, atol=0)
    for k, number in enumerate(drawn.numbers):
        largest(connected.source_currents[:, k], built_in.source_current(number))


@seeded
@given(SEEDS)
def test_frequencies_at_once_are_those_one_by_one(seed):
    network = Drawn(seed).network()
    together = network.solve(FREQUENCIES)
    for k, f in enumerate(FREQUENCIES):
        assert_allclose(together.unknowns[k], network.solve(f).unknowns[0], rtol=1e-9, atol=0)


def test_values_given_per_frequency():
    # A skin-effect resistance and a harmonic source, each with its own value at each frequency.
    network = Network()
    source = network.voltage_source("a", EARTH, [230.0, 4.0, 2.0])
    network.series_branches([("a", "b")], [[[1.0]], [[2.0]], [[5.0]]], [[1e-3]])
    network.resistor("b", EARTH, 10.0)
    solution = network.solve([50.0, 150.0, 250.0])
    expected = [v / (10 + r + 2j * np.pi * f * 1e-3)
                for v, r, f in ((230, 1, 50), (4, 2, 150), (2, 5, 250))]
    assert_allclose(solution.source_current(source), expected, rtol=1e-12, atol=0)


# Closed forms.


def test_divider_of_two_capacitors_does_not_depend_on_frequency():
    network = Network()
    network.voltage_source("live", EARTH, 230.0)
    network.capacitor("live", "spare", 3e-9)
    network.capacitor("spare", EARTH, 1e-9)
    solution = network.solve(FREQUENCIES)
    assert_allclose(solution.voltage("spare"), 172.5, rtol=1e-12, atol=0)
    assert_allclose(solution.impedance("spare"), 1 / (2j * np.pi * FREQUENCIES * 4e-9),
                    rtol=1e-12, atol=0)


def test_series_resonance_multiplies_the_voltage_by_its_quality():
    # ω L = 1 / ω C = 100 Ω at 50 Hz with 2 Ω in series: the current is V / R, and Q = 50.
    network = Network()
    source = network.voltage_source("a", EARTH, 10.0, resistance=2.0, inductance=1 / np.pi)
    network.capacitor("a", EARTH, 1 / (100 * np.pi * 100))
    solution = network.solve(50.0)
    assert_allclose(solution.source_current(source), 5.0, rtol=1e-9, atol=0)
    assert_allclose(solution.voltage("a"), -500j, rtol=1e-9, atol=0)


def coupled(mutual, burden):
    """A coil of 0.1 H on 230 V, coupled with one of 0.4 H that feeds a burden."""
    network = Network()
    number = network.voltage_source("p", EARTH, 230.0)
    network.series_branches([("p", EARTH), ("s", EARTH)], np.diag([1.0, 2.0]),
                            [[0.1, mutual], [mutual, 0.4]])
    network.burden("s", EARTH, burden)
    solution = network.solve(50.0)
    return solution.voltage("s")[0], solution.source_current(number)[0]


def test_coupled_coils():
    # Z_in = Z₁ + (ω M)² / (Z₂ + Z), and the secondary carries −jωM I₁ / (Z₂ + Z).
    w, load = 100 * np.pi, 50.0
    secondary = 2 + 1j * w * 0.4 + load
    primary = 230 / (1 + 1j * w * 0.1 + (w * 0.12) ** 2 / secondary)
    voltage, current = coupled(0.12, Burden(load))
    assert_allclose(current, primary, rtol=1e-12, atol=0)
    assert_allclose(voltage, 1j * w * 0.12 * primary * load / secondary, rtol=1e-12, atol=0)


def test_open_secondary_has_the_mutual_voltage():
    voltage, current = coupled(0.12, Burden(1e15))
    assert_allclose(voltage, 100j * np.pi * 0.12 * current, rtol=1e-9, atol=0)


def test_nearly_ideal_transformer_changes_voltage_and_impedance_by_the_turns():
    # 2 : 1, inductances far above the load, all flux shared but 1e-9: 115 V, and 4 × 8 Ω seen.
    network = Network()
    number = network.voltage_source("p", EARTH, 230.0)
    mutual = 5e5 * (1 - 1e-9)
    network.series_branches([("p", EARTH), ("s", EARTH)], np.zeros((2, 2)),
                            [[1e6, mutual], [mutual, 2.5e5]])
    network.resistor("s", EARTH, 8.0)
    solution = network.solve(50.0)
    assert_allclose(np.abs(solution.voltage("s")), 115.0, rtol=1e-3, atol=0)
    assert_allclose(230 / np.abs(solution.source_current(number)), 32.0, rtol=1e-3, atol=0)


def test_source_with_impedance_is_its_norton_equal():
    network = Network()
    number = network.voltage_source("a", "b", 12.0, resistance=3.0, inductance=0.02)
    network.resistor("b", EARTH, 1.0)
    network.resistor("a", EARTH, 5.0)
    solution = network.solve(50.0)
    loop = 12 / (3 + 1 + 5 + 2j * np.pi)
    assert_allclose(solution.source_current(number), loop, rtol=1e-12, atol=0)
    assert_allclose(solution.voltage("a"), 5 * loop, rtol=1e-12, atol=0)
    assert_allclose(solution.voltage("b"), -loop, rtol=1e-12, atol=0)
    assert_allclose(solution.voltage("a", "b"), 12 - loop * (3 + 2j * np.pi), rtol=1e-12, atol=0)


def test_what_a_source_delivers_per_ampere_drawn():
    # 3 Ω and 6 Ω sources share a current 2 : 1, and give the negative of it when it is injected.
    network = Network()
    first = network.voltage_source("a", EARTH, 9.0, resistance=3.0)
    second = network.voltage_source("a", EARTH, 9.0, resistance=6.0)
    solution = network.solve(50.0)
    assert_allclose(solution.source_transfer("a", EARTH, first), 2 / 3, rtol=1e-12, atol=0)
    assert_allclose(solution.source_transfer("a", EARTH, second), 1 / 3, rtol=1e-12, atol=0)
    connected = solution.connect(Burden(7.0), "a", sources=(first, second))
    assert_allclose(connected.current, 1.0, rtol=1e-12, atol=0)
    assert_allclose(connected.source_currents, [[2 / 3, 1 / 3]], rtol=1e-12, atol=0)


def test_capacitance_matrix_over_nodes_that_repeat():
    # Cores 0 and 2 on one node, core 1 on earth: what is left is the sum over the corner block.
    c = np.array([[90.0, -40, -30], [-40, 80, -20], [-30, -20, 70]]) * 1e-12
    network = Network()
    network.capacitance_matrix(["a", EARTH, "a"], c)
    seen = network.solve(50.0).impedance("a")
    assert_allclose(seen, 1 / (100j * np.pi * (90 - 30 - 30 + 70) * 1e-12), rtol=1e-12, atol=0)


def test_batch_of_networks():
    # Three cases at one frequency: capacitances and an admittance of their own each.
    cm, cg, y = (np.array(v) for v in ([1e-9, 2e-9, 3e-9], [5e-9, 1e-9, 2e-9], [1e-6, 0, 1e-7j]))
    network = Network()
    network.voltage_source("live", EARTH, 230.0)
    matrices = np.array([[cm, -cm], [-cm, cm + cg]]).transpose(2, 0, 1)
    network.capacitance_matrices(["live", "spare"], matrices)
    network.admittance("spare", EARTH, y)
    w = 100j * np.pi
    assert_allclose(network.solve([50.0] * 3).voltage("spare"),
                    230 * w * cm / (w * (cm + cg) + y), rtol=1e-12, atol=0)
    with pytest.raises(Refused, match='between "live" and "spare": must be given once, or for'):
        network.solve([50.0] * 2)


# Refusals, each beside what is accepted.


def lone(c):
    network = Network()
    network.resistor("a", EARTH, 50.0)
    network.capacitance_matrix(["x", "y"], c)
    return network


def test_floating_nodes_are_named():
    assert lone([[2e-12, -1e-12], [-1e-12, 1e-12]]).solve(50.0)
    with pytest.raises(Refused, match='node "x", "y": floats: nothing connects it to earth'):
        lone([[1e-12, -1e-12], [-1e-12, 1e-12]]).solve(50.0)


def test_rounding_in_a_capacitance_matrix_is_no_path_to_earth():
    c = np.array([[1e-12, -1e-12], [-1e-12, 1e-12]])
    c[0, 0] *= 1 + 1e-12
    with pytest.raises(Refused, match='"x", "y": floats'):
        lone(c).solve(50.0)


def test_burden_that_conducts_nothing_leaves_its_node_floating():
    network = Network()
    network.burden("a", EARTH, Burden())
    with pytest.raises(Refused, match='node "a": floats'):
        network.solve(50.0)
    network.burden("a", EARTH, Burden(1e15))
    assert_allclose(network.solve(50.0).impedance("a"), 1e15, rtol=1e-12, atol=0)


def test_sources_in_a_loop_are_refused():
    def loop(resistance):
        network = Network()
        network.voltage_source("a", EARTH, 230.0)
        network.voltage_source("b", "a", 10.0)
        network.voltage_source("b", EARTH, 239.0, resistance=resistance)
        return network.solve(50.0)

    assert_allclose(loop(0.5).source_current(2), -2.0, rtol=1e-12, atol=0)
    with pytest.raises(Refused, match="sources in a loop without impedance"):
        loop(0.0)


@pytest.mark.parametrize("frequency", [0.0, -50.0, np.nan, np.inf, [50.0, 0.0], [], [[50.0]]])
def test_frequency_must_be_above_zero(frequency):
    network = lone([[2e-12, -1e-12], [-1e-12, 1e-12]])
    assert network.solve(1e-3)
    with pytest.raises(Refused, match="frequency: must be above 0 Hz"):
        network.solve(frequency)


def test_unknown_node_is_refused():
    solution = lone([[2e-12, -1e-12], [-1e-12, 1e-12]]).solve(50.0)
    assert solution.impedance("x", "y").shape == (1,)
    with pytest.raises(Refused, match='node "z": is not in this network; given a, x, y'):
        solution.voltage("z")


@pytest.mark.parametrize("join", [
    lambda n: n.burden("a", "a", Burden(1.0)),
    lambda n: n.resistor("a", "a", 1.0),
])
def test_node_joined_to_itself_is_refused(join):
    with pytest.raises(Refused, match='node "a": cannot be joined to itself'):
        join(Network())


@pytest.mark.parametrize(("build", "message"), [
    (lambda n: n.capacitance_matrix(["a", "b"], np.eye(3)), "must be 2 × 2; given .3, 3."),
    (lambda n: n.capacitance_matrix(["a"], [[[1e-9]]]), "must be one matrix; given .1, 1, 1."),
    (lambda n: n.capacitance_matrix(["a"], [[np.nan]]), "capacitance matrix: must hold finite"),
    (lambda n: n.series_branches([("a", "b")], np.eye(2), [[1.0]]), "resistance: must be 1 × 1"),
    (lambda n: n.series_branches([("a", "b")], [[1.0]], [1.0, 2.0]), "inductance: must be 1 × 1"),
    (lambda n: n.series_branches([("a", "b")], [[np.inf]], [[0.0]]), "must hold finite numbers"),
    (lambda n: n.voltage_source("a", EARTH, np.nan), 'source at "a": voltage, resistance'),
    (lambda n: n.voltage_source("a", EARTH, 1.0, resistance=-1e-9), 'source at "a": voltage'),
    (lambda n: n.voltage_source("a", EARTH, 1.0, inductance=-1e-9), 'source at "a": voltage'),
])
def test_misfits_are_refused(build, message):
    with pytest.raises(Refused, match=message):
        build(Network())


@pytest.mark.parametrize("what", ["voltage", "series", "capacitance", "admittance"])
@pytest.mark.parametrize("frequencies", [50.0, [50.0, 150.0]])
def test_values_for_another_number_of_frequencies_are_refused(what, frequencies):
    network = Network()
    network.voltage_source("a", EARTH, 230.0)
    each = {
        "voltage": lambda: network.voltage_source("b", EARTH, [230.0, 4.0, 2.0]),
        "series": lambda: network.series_branches([("b", EARTH)], [[[1.0]]] * 3, [[0.0]]),
        "capacitance": lambda: network.capacitance_matrices(["b", EARTH], [np.eye(2)] * 3),
        "admittance": lambda: network.admittance("b", EARTH, [1.0, 2.0, 3.0]),
    }
    each[what]()
    network.resistor("b", EARTH, 1.0)
    assert network.solve([50.0, 150.0, 250.0])
    with pytest.raises(Refused, match='"b" and "earth": must be given once, or for each of'):
        network.solve(frequencies)
