"""Standing current: what stands behind a device leaks, as phasors by harmonic, with its spread.

A leak is known by its size, by the angle at which it leads its line's voltage, by its line, and
by how often it is on. What is not known of these is drawn: the size triangular between its limits,
the angle anywhere from resistive to capacitive, the line any of them, the number on binomial.
What is alike in all pieces of a leak (size, angle) is drawn once for all of them.
"""

from __future__ import annotations

import cmath
import math
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from ..errors import Mistake, Refused
from ..physics.arguments import checked
from .ends import Driven, Open
from .run import Run
from .supply import Supply

Real = NDArray[np.float64]
Complex = NDArray[np.complex128]
CAPACITIVE = math.pi / 2


@dataclass(frozen=True)
class Leak:
    """One kind of thing that leaks behind the device.

    Parameters
    ----------
    name : as the memo calls it
    phasors : by order, of one piece on a line whose voltage is at angle 0; RMS [A]
    line : of the supply, "spread" (pieces shared out over the lines), "balanced" (each piece on
        all lines alike), or "unknown"; "as computed" for phasors that hold their line already
    low, high : limits of its size against `phasors` [1], 0 ≤ low ≤ 1 ≤ high
    angle_known : whether the phasors' angle is; else it leads by 0 to 90°, and theirs must be 0
    count : of pieces, at least 0
    use : share of the time that each is on, each by itself [1], 0 to 1
    fast : of one piece at frequencies that are not the supply's, RMS [A]
    band : those frequencies, lowest and highest [Hz]
    """

    name: str
    phasors: Mapping[int, complex]
    line: str = "unknown"
    low: float = 1.0
    high: float = 1.0
    angle_known: bool = True
    count: int = 1
    use: float = 1.0
    fast: float = 0.0
    band: tuple[float, float] = (0.0, 0.0)

    def __post_init__(self) -> None:
        mistakes = []
        if not 0 <= self.low <= 1 <= self.high < math.inf:
            mistakes.append(Mistake("size", "must rise from low to likely to high",
                                    f"{self.low:g}, 1, {self.high:g}"))
        if self.count < 0:
            mistakes.append(Mistake("count", "must be at least 0", str(self.count)))
        if not 0 <= self.use <= 1:
            mistakes.append(Mistake("use", "must be 0 to 1", f"{self.use:g}"))
        if not all(cmath.isfinite(i) for i in (*self.phasors.values(), self.fast)):
            mistakes.append(Mistake("current", "must be a finite number of amperes"))
        if mistakes:
            raise Refused.all_of(mistakes).at(f'"{self.name}"')

    def all_on(self) -> Leak:
        """The same with every piece on."""
        return replace(self, use=1.0)


def capacitive_leak(name: str, capacitance: float, supply: Supply, **more: object) -> Leak:
    """A filter, or a cable's line to earth: a capacitance [F] to earth, at every order.

    >>> leak = capacitive_leak("cable", 1245.6 * 100e-12, Supply(230.0, 50.0))
    >>> round(abs(leak.phasors[1]) * 1e3, 3)
    9.0
    """
    omega = 2 * math.pi * supply.frequency
    return Leak(name, {n: 1j * n * omega * capacitance * v for n, v in _voltages(supply)}, **more)  # type: ignore[arg-type]


def resistive_leak(name: str, resistance: float, supply: Supply, **more: object) -> Leak:
    """A heater's or a damp insulation's resistance to earth [ohm], above 0, at every order.

    >>> round(abs(resistive_leak("damp", 3e3, Supply(230.0, 50.0)).phasors[1]) * 1e3, 1)
    76.7
    """
    if not resistance > 0:
        raise Refused(f'"{name}"', "resistance must be above 0 Ω", given=f"{resistance:g} Ω")
    return Leak(name, {n: complex(v / resistance) for n, v in _voltages(supply)}, **more)  # type: ignore[arg-type]


def equipment_leak(name: str, current: float, lead: float | None, **more: object) -> Leak:
    """A piece known by its current at the supply's frequency [A] and, at best, its lead [rad]."""
    return Leak(name, {1: current * cmath.exp(1j * (lead or 0.0))}, angle_known=lead is not None,
                **more)  # type: ignore[arg-type]


def run_leak(name: str, run: Run, low: Run | None = None, high: Run | None = None) -> Leak:
    """The run's own residual current, from its capacitance matrix and its ends."""
    orders = [n for n, _ in _voltages(run.supply)]
    phasors = {n: (run if n == run.order else run.at_order(n)).residual for n in orders}
    size = abs(phasors[1]) or 1.0
    ends = [abs(r.residual) / size for r in (low or run, high or run)]
    return Leak(name, phasors, "as computed", min(1.0, *ends), max(1.0, *ends))


def without_line(run: Run, line: str) -> Run:
    """The run when a line is lost: its ends on that line are open, and follow what is near them."""
    if line not in run.supply.lines:
        raise Refused("line", "is not one of the supply", given=line)
    near, far = ({n: Open() if t == Driven(line) else t for n, t in end.items()}
                 for end in (run.near, run.far))
    return replace(run, capacitance=run.matrix, near=near, far=far)


def capacitive_residual(
    *, capacitances: Sequence[float], voltages: Sequence[complex], frequency: float
) -> complex:
    """What lines leak to earth through capacitances (n,) [F] at their voltages (n,) [V]; [A].

    >>> a = cmath.exp(2j * math.pi / 3)
    >>> lines = [230, 230 / a, 230 * a]
    >>> abs(capacitive_residual(capacitances=[1e-7] * 3, voltages=lines, frequency=50.0)) < 1e-15
    True
    """
    checked(capacitances=capacitances, frequency=frequency)
    total = sum(c * v for c, v in zip(capacitances, voltages, strict=True))
    return complex(2j * math.pi * frequency * total)


def _voltages(supply: Supply) -> Iterator[tuple[int, float]]:
    yield 1, supply.voltage
    yield from ((n, supply.voltage * share) for n, share in sorted(supply.harmonics.items()))


@dataclass(frozen=True, eq=False)
class Bank:
    """Leaks as arrays over rows, for drawing all at once; a leak on several lines has a row each.

    Parameters
    ----------
    orders : (k,) of the supply's frequency
    phasors : of one piece (k, rows) [A], turned to its line where that is known
    fast : of one piece (rows,) [A], at frequencies that are not the supply's
    low, high : limits of the size (rows,)
    free_angle, free_line : (rows,) what is to be drawn
    count, use : (rows,)
    columns : of the points, for size, angle, line and number (rows, 4)
    lines : how many the supply has
    owner : number of the leak that each row is of (rows,)
    """

    orders: tuple[int, ...]
    phasors: Complex
    fast: Real
    low: Real
    high: Real
    free_angle: NDArray[np.bool_]
    free_line: NDArray[np.bool_]
    count: NDArray[np.int64]
    use: Real
    columns: NDArray[np.int64]
    lines: int
    owner: NDArray[np.int64]

    @property
    def dimensions(self) -> int:
        """Columns that the points need."""
        return int(self.columns.max(initial=0)) + 1

    @property
    def arithmetic(self) -> Real:
        """Every piece of each row on, RMS over the frequencies (rows,) [A]."""
        return np.asarray(self.count * np.sqrt((abs(self.phasors) ** 2).sum(axis=0)
                                               + self.fast**2))


def bank(leaks: Sequence[Leak], supply: Supply) -> Bank:
    """The leaks as arrays; refused where a line is not the supply's."""
    orders = tuple(sorted({1, *(n for leak in leaks for n in leak.phasors)}))
    rows = [row for i, leak in enumerate(leaks) for row in _rows(i, leak, supply)]
    phasors = np.array([[leak.phasors.get(n, 0) * cmath.exp(-2j * math.pi * n * turn)
                         for _, leak, turn, _, _ in rows] for n in orders], dtype=complex)
    kept = [leak for _, leak, *_ in rows]
    return Bank(
        orders, phasors.reshape(len(orders), len(rows)),
        # A balanced piece has a row on every line, but is one source of fast current.
        np.array([k.fast / (supply.phases if k.line == "balanced" else 1) for k in kept]),
        np.array([leak.low for leak in kept]), np.array([leak.high for leak in kept]),
        np.array([not leak.angle_known for leak in kept], dtype=bool),
        np.array([leak.line == "unknown" for leak in kept], dtype=bool) & (supply.phases > 1),
        np.array([count for *_, count, _ in rows], dtype=np.int64),
        np.array([leak.use for leak in kept]),
        np.array([columns for *_, columns in rows], dtype=np.int64).reshape(len(rows), 4),
        supply.phases, np.array([i for i, *_ in rows], dtype=np.int64))


def _rows(
    owner: int, leak: Leak, supply: Supply
) -> Iterator[tuple[int, Leak, float, int, tuple[int, int, int, int]]]:
    """Owner, leak, turn of its line, pieces there, and columns of the points, for each row.

    Each leak has a block of columns: angle and line, then size and number by line. Pieces shared
    out are alike in size; balanced ones are on together, and each line has its own tolerance.
    """
    at = 8 * owner
    several = leak.line in ("spread", "balanced")
    for k, line in enumerate(supply.lines if several else (leak.line,)):
        turn = 0.0
        if line in supply.lines:
            turn = supply.lines.index(line) / supply.phases
        elif line not in ("unknown", "as computed"):
            raise Refused(f'"{leak.name}"', "its line is not one of the supply", given=line,
                          hint=f"known: {', '.join(supply.lines)}, spread, balanced, unknown")
        shared = leak.line == "spread"
        count = (leak.count + supply.phases - 1 - k) // supply.phases if shared else leak.count
        size, number = (0, k) if shared else (k, 0)
        yield owner, leak, turn, count, (at + 2 + size, at, at + 1, at + 5 + number)


def drawn(rows: Bank, points: Real) -> tuple[Complex, Real]:
    """Phasors (k, n, rows) [A] of every row, and sizes × number on (n, rows), at n points.

    Parameters
    ----------
    points : (n, dimensions), each from 0 to below 1
    """
    u = points[:, rows.columns]
    pieces = _triangular(u[..., 0], rows.low, rows.high) * _number(rows, u[..., 3])
    free = np.flatnonzero(rows.free_angle | rows.free_line)
    lead = CAPACITIVE * np.where(rows.free_angle, u[..., 1], 0.0)[:, free]
    line = np.where(rows.free_line, np.floor(u[..., 2] * rows.lines) / rows.lines, 0.0)[:, free]
    made = rows.phasors[:, None, :] * pieces
    for number, order in enumerate(rows.orders):
        made[number][:, free] *= np.exp(1j * (lead - 2 * np.pi * order * line))
    return made, pieces


def _triangular(u: Real, low: Real, high: Real) -> Real:
    """Quantile of the triangular distribution from low over 1 to high."""
    span = np.maximum(high - low, 1e-300)
    rising = low + np.sqrt(u * span * (1 - low))
    falling = high - np.sqrt((1 - u) * span * (high - 1))
    return np.where(u * span < 1 - low, rising, falling)


def _number(rows: Bank, u: Real) -> Real:
    """How many of each row's pieces are on: the binomial quantile (n, rows)."""
    on = np.empty_like(u)
    kinds, of = np.unique(np.stack([rows.count, rows.use]), axis=1, return_inverse=True)
    for i, (count, use) in enumerate(kinds.T):
        here = of.reshape(-1) == i
        if use in (0.0, 1.0) or count == 0:
            on[:, here] = count * use
        elif count == 1:
            on[:, here] = u[:, here] >= 1 - use
        else:
            from scipy.stats import binom

            steps = binom.cdf(np.arange(int(count)), int(count), use)
            on[:, here] = np.searchsorted(steps, u[:, here], side="right")
    return on
