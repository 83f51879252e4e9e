"""A nodal solver for phasors: what joins nodes, what drives them, and burdens between any two.

Unknowns are the node voltages against `earth` and the currents of sources and series branches
(modified nodal analysis; Ho, Ruehli and Brennan, IEEE Trans. CAS-22, 1975). The matrix is
symmetric, so the network is reciprocal. Its inverse is kept: a burden is then a rank-one change.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field

import numpy as np
from numpy.typing import ArrayLike, NDArray

from ..errors import Refused
from .burden import Burden

Complex = NDArray[np.complex128]
EARTH = "earth"
_NO_PATH = 1e-9  # share of its own capacitance below which a conductor's path to earth is rounding


@dataclass
class Network:
    """Elements added one by one, then `solve(frequencies)`. Node `earth` is the reference."""

    _nodes: dict[str, int] = field(default_factory=dict)
    _burdens: list[tuple[str, str, Burden | _Given]] = field(default_factory=list)
    _matrices: list[tuple[tuple[str, ...], NDArray[np.float64]]] = field(default_factory=list)
    _branches: list[_Branches] = field(default_factory=list)
    _links: list[tuple[str, str]] = field(default_factory=list)

    def burden(self, a: str, b: str, burden: Burden) -> None:
        """A burden from node a to node b; one that conducts nothing leaves them floating."""
        if a == b:
            raise Refused(f'node "{a}"', "cannot be joined to itself")
        self._add(a)
        self._add(b)
        if burden.admittance(1.0):
            self._link(a, b)
        self._burdens.append((a, b, burden))

    def resistor(self, a: str, b: str, resistance: float) -> None:
        """A resistance [ohm], above 0."""
        self.burden(a, b, Burden(resistance))

    def inductor(self, a: str, b: str, inductance: float) -> None:
        """An inductance [H], above 0."""
        self.burden(a, b, Burden(0.0, inductance))

    def capacitor(self, a: str, b: str, capacitance: float) -> None:
        """A capacitance [F], above 0."""
        self.burden(a, b, Burden(capacitance=capacitance))

    def capacitance_matrix(self, nodes: Sequence[str], matrix: ArrayLike) -> None:
        """A Maxwell capacitance matrix [F] (n, n) over n nodes, counted against earth.

        A node may occur more than once, and may be earth.
        """
        c = np.asarray(matrix, dtype=float)
        if c.ndim != 2:
            raise Refused("capacitance matrix", "must be one matrix", given=c.shape)
        _refuse_misfit("capacitance matrix", c, len(nodes))
        for i, node in enumerate(nodes):
            self._add(node)
            if c[i].sum() > _NO_PATH * c[i, i]:
                self._link(node, EARTH)
            for j in range(i):
                if c[i, j] != 0:
                    self._link(node, nodes[j])
        self._matrices.append((tuple(nodes), c))

    def capacitance_matrices(self, nodes: Sequence[str], matrices: ArrayLike) -> None:
        """A Maxwell capacitance matrix [F] for each frequency (F, n, n): a batch of networks.

        The first says which nodes they join.
        """
        c = np.asarray(matrices, dtype=float)
        _refuse_misfit("capacitance matrices", c, len(nodes))
        self.capacitance_matrix(nodes, c[0])
        self._matrices[-1] = (tuple(nodes), c)

    def admittance(self, a: str, b: str, admittance: ArrayLike) -> None:
        """An admittance [S] from a to b, one or one per frequency (F,)."""
        self._link(a, b)
        self._burdens.append((a, b, _Given(np.asarray(admittance, dtype=complex))))

    def series_branches(
        self, pairs: Sequence[tuple[str, str]], resistance: ArrayLike, inductance: ArrayLike
    ) -> None:
        """Coupled branches from a to b: (n, n) resistance [ohm] and inductance [H].

        Either may have a leading axis over the frequencies.
        """
        r, x = np.asarray(resistance, dtype=float), np.asarray(inductance, dtype=float)
        _refuse_misfit("series resistance", r, len(pairs))
        _refuse_misfit("series inductance", x, len(pairs))
        self._branch(_Branches(tuple(pairs), r, x, np.zeros(len(pairs), dtype=complex)))

    def voltage_source(
        self,
        a: str,
        b: str,
        voltage: ArrayLike,
        *,
        resistance: float = 0.0,
        inductance: float = 0.0,
    ) -> int:
        """A source that holds V_a − V_b at `voltage` [V], a phasor or one per frequency (F,).

        Returns its number for `Solution.source_current`: the current it delivers into a [A].
        """
        if not (np.all(np.isfinite(voltage)) and 0 <= resistance + inductance < np.inf
                and min(resistance, inductance) >= 0):
            raise Refused(f'source at "{a}"', "voltage, resistance and inductance must be finite, "
                          "the last two at least 0", given=(voltage, resistance, inductance))
        emf = np.asarray(np.asarray(voltage, dtype=complex)[..., None])
        r, x = np.full((1, 1), resistance), np.full((1, 1), inductance)
        # A branch current counts from a to b; a source delivers the other way.
        self._branch(_Branches(((a, b),), r, x, emf))
        return sum(len(b.pairs) for b in self._branches) - 1

    def solve(self, frequencies: ArrayLike) -> Solution:
        """The network at each frequency (F,) [Hz], above 0."""
        f = np.atleast_1d(np.asarray(frequencies, dtype=float))
        if not (f.ndim == 1 and len(f) and np.all(f > 0) and np.all(np.isfinite(f))):
            raise Refused("frequency", "must be above 0 Hz", given=frequencies)
        self._refuse_floating()
        self._refuse_counts(len(f))
        matrix, right = self._assembled(f)
        try:
            inverse = np.asarray(np.linalg.inv(matrix), dtype=np.complex128)
        except np.linalg.LinAlgError:
            raise Refused("network", "has no single solution: sources in a loop without impedance, "
                          "or a lossless resonance") from None
        return Solution(f, dict(self._nodes), inverse,
                        (inverse @ right[..., None])[..., 0])

    def _add(self, node: str) -> None:
        if node != EARTH:
            self._nodes.setdefault(node, len(self._nodes))

    def _link(self, a: str, b: str) -> None:
        self._add(a)
        self._add(b)
        self._links.append((a, b))

    def _branch(self, branches: _Branches) -> None:
        for a, b in branches.pairs:
            self._link(a, b)
        self._branches.append(branches)

    def _refuse_floating(self) -> None:
        reached, grown = {EARTH}, True
        while grown:
            new = {n for a, b in self._links if (a in reached) != (b in reached) for n in (a, b)}
            grown = bool(new)
            reached |= new
        floating = [n for n in self._nodes if n not in reached]
        if floating:
            names = ", ".join(f'"{n}"' for n in floating)
            raise Refused(f"node {names}", "floats: nothing connects it to earth",
                          hint="bond it, drive it, or give the section a surround")

    def _refuse_counts(self, count: int) -> None:
        """Refuses what is given per frequency for another number of them than `count`."""
        given: list[tuple[Sequence[str], tuple[int, ...]]] = [
            *((b.pairs[0], m.shape[:-2]) for b in self._branches
              for m in (b.resistance, b.inductance, b.emf[..., None])),
            *((nodes, c.shape[:-2]) for nodes, c in self._matrices),
            *(((a, b), y.value.shape) for a, b, y in self._burdens if isinstance(y, _Given))]
        for nodes, shape in given:
            if shape not in ((), (1,), (count,)):
                names = " and ".join(f'"{n}"' for n in nodes)
                raise Refused(f"between {names}", "must be given once, or for each of "
                              f"{count} frequencies", given=shape)

    def _assembled(self, f: NDArray[np.float64]) -> tuple[Complex, Complex]:
        omega = 2 * np.pi * f
        nodes = len(self._nodes)
        size = nodes + sum(len(b.pairs) for b in self._branches)
        # One row and column more stand for earth, and are dropped at the end.
        matrix = np.zeros((len(f), size + 1, size + 1), dtype=complex)
        right = np.zeros((len(f), size), dtype=complex)
        number = {**self._nodes, EARTH: size}
        for a, b, burden in self._burdens:
            y = burden.admittance(f)
            i, j = number[a], number[b]
            matrix[:, i, i] += y
            matrix[:, j, j] += y
            matrix[:, i, j] -= y
            matrix[:, j, i] -= y
        for names, c in self._matrices:
            # A node may stand for several conductors, whose charges then add.
            at, which = np.unique([number[n] for n in names], return_inverse=True)
            fold = np.eye(len(at))[which]
            matrix[:, at[:, None], at] += 1j * omega[:, None, None] * (fold.T @ c @ fold)
        row = nodes
        for branches in self._branches:
            rows = np.arange(row, row + len(branches.pairs))
            for r, (a, b) in zip(rows, branches.pairs, strict=True):
                matrix[:, r, number[a]] += 1
                matrix[:, number[a], r] += 1
                matrix[:, r, number[b]] -= 1
                matrix[:, number[b], r] -= 1
            z = branches.resistance + 1j * omega[:, None, None] * branches.inductance
            matrix[:, rows[:, None], rows] -= z
            right[:, rows] = branches.emf
            row += len(rows)
        return matrix[:, :size, :size], right


@dataclass(frozen=True)
class _Given:
    """An admittance as given, whatever the frequency."""

    value: Complex

    def admittance(self, frequency: ArrayLike) -> Complex:
        return np.broadcast_to(self.value, np.shape(frequency))


@dataclass(frozen=True)
class _Branches:
    """Branches a → b with V_a − V_b − Z I = E."""

    pairs: tuple[tuple[str, str], ...]
    resistance: NDArray[np.float64]
    inductance: NDArray[np.float64]
    emf: Complex


def _refuse_misfit(place: str, matrix: NDArray[np.float64], size: int) -> None:
    if matrix.shape[-2:] != (size, size):
        raise Refused(place, f"must be {size} × {size}", given=matrix.shape)
    if not np.all(np.isfinite(matrix)):
        raise Refused(place, "must hold finite numbers")


@dataclass(frozen=True)
class Connected:
    """A burden in place, phasors per frequency (F,)."""

    voltage: Complex
    current: Complex
    source_currents: Complex  # (F, sources asked for)


@dataclass(frozen=True)
class Solution:
    """A solved network: `frequencies` (F,) [Hz] and phasors of RMS value."""

    frequencies: NDArray[np.float64]
    nodes: dict[str, int]
    inverse: Complex
    unknowns: Complex

    def voltage(self, a: str, b: str = EARTH) -> Complex:
        """V_a − V_b (F,) [V]."""
        return self._at(self.unknowns, a) - self._at(self.unknowns, b)

    def impedance(self, a: str, b: str = EARTH) -> Complex:
        """What a burden between a and b sees, its Thevenin impedance (F,) [ohm]."""
        return self.transfer(a, b, a, b)

    def transfer(self, a: str, b: str, c: str, d: str) -> Complex:
        """Voltage from c to d per ampere drawn out of b and into a (F,) [ohm]."""
        column = self._column(a, b)
        return self._at(column, c) - self._at(column, d)

    def source_current(self, number: int) -> Complex:
        """Current that a voltage source delivers into its first node (F,) [A]."""
        return np.asarray(-self.unknowns[:, len(self.nodes) + number])

    def source_transfer(self, a: str, b: str, number: int) -> Complex:
        """What a source delivers more per ampere drawn out of a and into b (F,) [1]."""
        return np.asarray(self._column(a, b)[:, len(self.nodes) + number])

    def connect(
        self, burden: Burden, a: str, b: str = EARTH, *, sources: Sequence[int] = ()
    ) -> Connected:
        """The burden between a and b: voltage across it, current through it from a to b.

        `source_currents` are those of the sources named, with the burden in place.
        """
        y = burden.admittance(self.frequencies)
        voltage = self.voltage(a, b) / (1 + y * self.impedance(a, b))
        current = y * voltage
        supplied = [self.source_current(k) + current * self.source_transfer(a, b, k)
                    for k in sources]
        return Connected(voltage, current, np.array(supplied, dtype=complex).reshape(
            len(sources), -1).T)

    def _at(self, unknowns: Complex, node: str) -> Complex:
        if node == EARTH:
            return np.zeros(len(unknowns), dtype=complex)
        return np.asarray(unknowns[:, self._number(node)])

    def _column(self, a: str, b: str) -> Complex:
        """Every unknown per ampere injected into a and taken out of b."""
        zero = np.zeros(self.inverse.shape[:2], dtype=complex)
        into = zero if a == EARTH else self.inverse[:, :, self._number(a)]
        out = zero if b == EARTH else self.inverse[:, :, self._number(b)]
        return np.asarray(into - out)

    def _number(self, node: str) -> int:
        if node not in self.nodes:
            raise Refused(f'node "{node}"', "is not in this network", given=", ".join(self.nodes))
        return self.nodes[node]
