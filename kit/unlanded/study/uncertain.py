"""A run whose inputs are not all known: length, supply, loads, and the cross-section.

Capacitance is smooth in what a section is made of, so where one or two of its inputs vary it is
solved at Chebyshev nodes and interpolated; random arrangements are solved each by itself.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping, Sequence
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass, field, replace
from functools import cached_property

import numpy as np
from numpy.polynomial import chebyshev
from numpy.typing import ArrayLike, NDArray

from ..physics.capacitance import capacitance_matrices
from ..physics.multipole import Geometry
from ..physics.packing import packed_positions
from ..physics.section import Section
from .batch import RunBatch
from .run import Run
from .spread import Distribution, Input, limits, quasi_random, uniform

Real = NDArray[np.float64]
TOLERANCE = 5e-3  # of a capacitance: a sixtieth of what the range of PVC's permittivity makes of it
ARRANGEMENTS = 4096  # random packings that draws are taken from
_NODES = (5, 9, 17)
_CORES = 2


@dataclass(frozen=True, eq=False)
class SectionSpread:
    """A cross-section of which something varies.

    Parameters
    ----------
    inputs : what varies
    geometry : from values of the inputs (B, d) to B sections as arrays
    smooth : whether their capacitance is a smooth function of the inputs
    """

    inputs: tuple[Input, ...]
    geometry: Callable[[Real], Geometry]
    smooth: bool = True

    def matrices(self, values: Real) -> Real:
        """Capacitance matrices (B, n, n) [F/m] for values of the inputs (B, d)."""
        if self.smooth and len(self.inputs) <= 2 and (found := self._surface) is not None:
            return found.at(values)
        few, where = np.unique(values, axis=0, return_inverse=True)
        return _solved(self.geometry(few))[where.reshape(-1)]

    @cached_property
    def _surface(self) -> _Surface | None:
        box = [limits(i.distribution) for i in self.inputs]
        for nodes in _NODES[: 4 - len(box)]:
            surface = _Surface.through(lambda v: _solved(self.geometry(v)), box, nodes)
            if surface.converged:
                return surface
        return None


def _solved(geometry: Geometry) -> Real:
    """Capacitance matrices of a batch, a part on each core: LAPACK lets go of the interpreter."""
    parts = np.array_split(np.arange(len(geometry.metal)), _CORES)
    batches = [geometry.take(part) for part in parts if len(part)]
    with ThreadPoolExecutor(_CORES) as pool:
        return np.concatenate(list(pool.map(
            lambda g: capacitance_matrices(g, TOLERANCE), batches)))


@dataclass(frozen=True, eq=False)
class _Surface:
    """A Chebyshev interpolant of matrices over a box of one or two dimensions."""

    box: Real  # (d, 2)
    coefficients: Real  # (nodes^d, n, n)
    nodes: int

    @classmethod
    def through(
        cls, matrices: Callable[[Real], Real], box: Sequence[tuple[float, float]], nodes: int
    ) -> _Surface:
        ends = np.array(box)
        x = chebyshev.chebpts1(nodes)
        grid = np.stack(np.meshgrid(*[x] * len(ends), indexing="ij"), axis=-1)
        grid = grid.reshape(-1, len(ends))
        found = matrices(ends[:, 0] + (grid + 1) / 2 * (ends[:, 1] - ends[:, 0]))
        return cls(ends, np.tensordot(np.linalg.inv(_basis(grid, nodes)), found, axes=1), nodes)

    @property
    def converged(self) -> bool:
        """Whether the highest orders add less than the tolerance of a capacitance."""
        order = np.indices([self.nodes] * len(self.box)).reshape(len(self.box), -1)
        last = np.any(order == self.nodes - 1, axis=0)
        return bool(np.all(np.abs(self.coefficients[last]).sum(axis=0)
                           <= TOLERANCE * np.abs(self.coefficients[0])))

    def at(self, values: Real) -> Real:
        low, high = self.box.T
        return np.tensordot(_basis(2 * (values - low) / (high - low) - 1, self.nodes),
                            self.coefficients, axes=1)


def _basis(x: Real, nodes: int) -> Real:
    """Products of Chebyshev polynomials (B, nodes^d) at points of the cube (B, d)."""
    out = np.ones((len(x), 1))
    for column in x.T:
        own = chebyshev.chebvander(column, nodes - 1)
        out = (out[:, :, None] * own[:, None, :]).reshape(len(x), -1)
    return out


@dataclass(frozen=True, eq=False)
class Thickness:
    """Thickness of the covers of `names` [m], one for all; in the section it is `likely`."""

    likely: float
    distribution: Distribution
    names: Sequence[str]


@dataclass(frozen=True, eq=False)
class Conduit:
    """Singles that lie in a conduit about the origin, and what varies of it.

    Parameters
    ----------
    radius : inside [m]
    arrangements : how many random packings draws are taken from; of 1 alone, how they lie is known
    seed : of the packings
    bore : inner diameter [m]
    thickness : of covers

    What is None is known. One packing is told by its order and chances of dropping: for other sizes
    the singles fall in the same order, and lie as they then come to rest.
    """

    radius: float
    arrangements: int = ARRANGEMENTS
    seed: int = 1
    bore: Distribution | None = None
    thickness: Thickness | None = None

    @property
    def inputs(self) -> Iterator[Input]:
        """What varies of it, in the order of the columns that `lying` takes."""
        if self.thickness is not None:
            yield Input("thickness of the covers", self.thickness.distribution)
        if self.bore is not None:
            yield Input("bore of the conduit", self.bore)
        if self.arrangements > 1:
            yield Input("how the singles lie", uniform(0.0, 1.0))

    def lying(self, batch: Geometry, section: Section, values: Real) -> Geometry:
        """The batch of B times the section, for values of the inputs (B, d)."""
        columns = iter(values.T)
        cover, radius = batch.cover.copy(), np.full(len(values), self.radius)
        if self.thickness is not None:
            group = [section.index(n) for n in self.thickness.names]
            cover[:, group] += (next(columns) - self.thickness.likely)[:, None]
        if self.bore is not None:
            radius = next(columns) / 2
        share = next(columns) if self.arrangements > 1 else np.zeros(len(values))
        which = np.minimum((share * self.arrangements).astype(int), self.arrangements - 1)
        place = packed_positions(cover, pipe_radius=radius, count=self.arrangements,
                                 seed=self.seed, which=which)
        return replace(batch, centre=place[..., 0] + 1j * place[..., 1], cover=cover,
                       pipe_radius=radius if batch.wall == "pipe" else batch.pipe_radius)


def covers_spread(
    section: Section, permittivity: Mapping[str, tuple[Distribution, Sequence[str]]], *,
    conduit: Conduit | None = None
) -> SectionSpread:
    """A section whose covers' permittivity varies, and, for singles in a conduit, how they lie.

    Parameters
    ----------
    permittivity : by what a reader calls it, its distribution and the conductors that share it:
        the same material has the same permittivity in all of them
    conduit : None keeps the conductors where they are
    """
    inputs = [Input(name, distribution) for name, (distribution, _) in permittivity.items()]
    groups = [[section.index(n) for n in names] for _, names in permittivity.values()]
    base = Geometry.of([section])
    lie = tuple(conduit.inputs) if conduit else ()

    def geometry(values: Real) -> Geometry:
        whole = base.take(np.zeros(len(values), dtype=np.intp))
        for k, group in enumerate(groups):
            whole.ratio[:, group] = values[:, k, None] / base.filler[0]
        return conduit.lying(whole, section, values[:, len(groups):]) if conduit else whole

    return SectionSpread((*inputs, *lie), geometry, smooth=conduit is None)


def sections_spread(inputs: Sequence[Input], section: Callable[[Real], Section]) -> SectionSpread:
    """A section built anew for each draw, from the values (d,) of the inputs."""
    return SectionSpread(tuple(inputs), lambda v: Geometry.of([section(row) for row in v]))


@dataclass(frozen=True, eq=False)
class UncertainRun:
    """A run and what is not known of it.

    Parameters
    ----------
    run : with every input as it is most likely
    section : what varies of the cross-section
    length : of the run [m]
    supply : share of the supply's voltage [1]
    loads : by label, share of a load's impedance [1]
    screen : capacitance of the outside of the run's screen to earth [F/m]

    What is None or not named is known. Inputs are in this order: the section's, length, supply,
    loads, screen.
    """

    run: Run
    section: SectionSpread | None = None
    length: Distribution | None = None
    supply: Distribution | None = None
    loads: Mapping[str, Distribution] = field(default_factory=dict)
    screen: Distribution | None = None

    @property
    def inputs(self) -> tuple[Input, ...]:
        """Everything that varies."""
        return (*(self.section.inputs if self.section else ()), *self._plain())

    def _plain(self) -> Iterator[Input]:
        if self.length is not None:
            yield Input("length of the run", self.length)
        if self.supply is not None:
            yield Input("supply voltage", self.supply)
        for label, distribution in self.loads.items():
            yield Input(f"impedance of {label}", distribution)
        if self.screen is not None:
            yield Input("capacitance of the screen to earth", self.screen)

    def at(self, values: Real) -> RunBatch:
        """The runs for values of the inputs (B, d); further columns are not looked at."""
        columns = iter(values.T)
        cores = len(self.run.section.names)
        inner = self.run.matrix[None, :cores, :cores]
        length, supply = np.array([self.run.length]), np.ones(1)
        if self.section is not None:
            inner = self.section.matrices(
                np.column_stack([next(columns) for _ in self.section.inputs]))
        if self.length is not None:
            length = next(columns)
        if self.supply is not None:
            supply = next(columns)
        loads = {label: next(columns) for label in self.loads}
        matrix = self.run.screened(inner, next(columns) if self.screen else None)
        return RunBatch(self.run, matrix, length, supply, loads)

    def draws(self, count: int, *, seed: int = 1) -> RunBatch:
        """A batch of `count` (a power of 2) draws, for a curve; the run alone if all is known."""
        return self.at(quasi_random(self.inputs, count, seed=seed)) if self.inputs else RunBatch.of(
            self.run)

    def stretched(self, lengths: ArrayLike, count: int, *, seed: int = 1) -> RunBatch:
        """`count` draws for each of the lengths (k,) [m]: k × count cases, length by length."""
        along = np.asarray(lengths, dtype=float)
        drawn = self.draws(count, seed=seed)
        number = len(drawn)

        def repeated(values: Real) -> Real:
            whole = np.broadcast_to(values, (number, *values.shape[1:]))
            return np.tile(whole, (len(along), *(1,) * (values.ndim - 1)))

        return RunBatch(self.run, repeated(drawn.capacitance), np.repeat(along, number),
                        repeated(drawn.supply), {k: repeated(v) for k, v in drawn.load.items()})
