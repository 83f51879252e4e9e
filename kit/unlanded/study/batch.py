"""Many runs at once: one network, with its capacitance, length, supply and loads by case.

A batch is what uncertainty, curves and inverse questions are made of. It answers what a `Run`
answers, with arrays over its B cases.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from functools import cached_property

import numpy as np
from numpy.typing import ArrayLike, NDArray

from ..errors import Refused
from ..physics.line import sections_needed
from ..physics.network import EARTH, Network, Solution
from .run import Run

Real = NDArray[np.float64]
Complex = NDArray[np.complex128]


@dataclass(frozen=True, eq=False)
class Ports:
    """Two points as a burden meets them in each case (B,): see `Port`."""

    voltage: Complex
    impedance: Complex
    residual_per_ampere: Complex

    def loaded(self, admittance: ArrayLike) -> Complex:
        """Voltage across a burden of that admittance [S] put there; broadcasts with (B,)."""
        return np.asarray(self.voltage / (1 + np.asarray(admittance) * self.impedance))


@dataclass(frozen=True, eq=False)
class RunBatch:
    """B variations of a run.

    Parameters
    ----------
    run : what they have in common
    capacitance : Maxwell matrices (B, n, n) or (1, n, n) [F/m]
    length : (B,) or (1,) [m]
    supply : share of the run's supply voltage (B,) or (1,) [1]
    load : by the label of a load at an end, share of its impedance (B,) or (1,) [1]

    The series impedance per metre is the run's own in every case: it is small against that of
    the capacitances.
    """

    run: Run
    capacitance: Real
    length: Real
    supply: Real = field(default_factory=lambda: np.ones(1))
    load: Mapping[str, Real] = field(default_factory=dict)

    def __post_init__(self) -> None:
        counts = {len(v) for v in (self.capacitance, self.length, self.supply,
                                   *self.load.values())} - {1}
        if len(counts) > 1:
            raise Refused("batch", "all that varies must vary in the same number of cases",
                          given=", ".join(map(str, sorted(counts))))
        if not (np.all(self.length > 0) and np.all(np.isfinite(self.length))):
            raise Refused("run length", "must be above 0 m", given=f"{np.min(self.length):g} m")

    @classmethod
    def of(cls, run: Run, *, length: ArrayLike | None = None) -> RunBatch:
        """The run with each of the lengths (B,) [m], or just as it is."""
        along = run.length if length is None else length
        return cls(run, run.matrix[None], np.atleast_1d(np.asarray(along, dtype=float)))

    def __len__(self) -> int:
        return max(len(v) for v in (self.capacitance, self.length, self.supply,
                                    *self.load.values()))

    @property
    def residual(self) -> Complex:
        """Sum of the currents of the supply's lines and neutral (B,) [A]."""
        solution, sources = self._solved
        return np.asarray(sum(solution.source_current(k) for k in sources))

    def voltage(self, a: str, b: str = EARTH) -> Complex:
        """Unloaded voltage from a to b (B,) RMS [V]."""
        return np.asarray(self._solved[0].voltage(self.run.node(a), self.run.node(b)))

    def port(self, a: str, b: str = EARTH) -> Ports:
        """What two points that are not the same node offer to anything put between them."""
        i, j = self.run.node(a), self.run.node(b)
        if i == j:
            raise Refused(f'points "{a}" and "{b}"', "are the same node: nothing can be between")
        solution, sources = self._solved
        drawn = np.asarray(sum(solution.source_transfer(i, j, k) for k in sources))
        return Ports(solution.voltage(i, j), solution.impedance(i, j), drawn)

    @property
    def lumps(self) -> int:
        """π sections that every case is divided into: as many as the neediest takes."""
        omega = 2 * np.pi * self.run.frequency
        resistance, inductance = self.run.series
        own = np.trace(self.capacitance, axis1=1, axis2=2) * self.length**2
        worst = int(np.argmax(own))
        matrix = self.capacitance[worst % len(self.capacitance)]
        series = np.asarray(resistance + 1j * omega * inductance, dtype=complex)
        return sections_needed(series[None], 1j * omega * matrix[None],
                               length=float(self.length[worst % len(self.length)]))

    @cached_property
    def _solved(self) -> tuple[Solution, tuple[int, ...]]:
        network = Network()
        frequency = np.full(len(self), self.run.frequency)
        sources = self.run.feed(network, self.supply)
        self.run.lay(network, self.capacitance, self.length, self.lumps)
        for a, b, t in self.run.closed:
            share = self.load.get(t.label, 1.0)
            network.admittance(a, b, t.burden.admittance(frequency) / share)
        return network.solve(frequency), sources
