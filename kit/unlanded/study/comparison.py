"""Would another switching arrangement let go of the load? The same cable, length and load in each.

The cores keep their parts as far as they go; a part that the case's own arrangement does not have
is taken by the next spare core. Cores that an arrangement does not need are open at both ends.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, replace

from ..physics.burden import Burden
from .arrangements import NEEDS, WITH_NEUTRAL, Arrangement, Cores, Word, arranged
from .operation import Operation, Watched, operation
from .run import Run
from .uncertain import UncertainRun

NOTES: dict[Word, str] = {
    "remote contact": "the load stands at the supply's end",
    "contact at supply": "nothing alternating goes out while it is open",
    "switched neutral": "the load and its wires stay live while it is off; many codes forbid it",
}


@dataclass(frozen=True)
class Switched:
    """A load as a case has it switched; `load` is its impedance."""

    word: Word
    cores: Cores
    load: Burden
    line: str = "L"
    name: str = "load"

    @property
    def arrangement(self) -> Arrangement:
        """Its ends of the run, with the contacts open; raises `Refused`."""
        return arranged(self.word, self.cores, load=self.load, line=self.line, name=self.name)


@dataclass(frozen=True, eq=False)
class Compared:
    """One arrangement of the same cable.

    Parameters
    ----------
    switched : the arrangement and its cores
    as_built : whether it is the case's own
    found : what the load then does, without cures
    """

    switched: Switched
    as_built: bool
    found: Operation

    @property
    def words(self) -> str:
        """Such as "two-way, 2 live"."""
        live = f", {self.switched.cores.live} live" if self.switched.word == "two-way" else ""
        return f"{self.switched.word}{live}"


def compare(
    uncertain: UncertainRun, watched: Watched, built: Switched
) -> tuple[Compared, ...]:
    """The load in every arrangement that the cable has cores for, the case's own first."""
    return tuple(
        Compared(one, one == built, operation(
            replace(uncertain, run=rearranged(uncertain.run, built, one)),
            replace(watched, pair=one.arrangement.load), cured=False))
        for one in alternatives(uncertain.run, built))


def alternatives(run: Run, built: Switched) -> Iterator[Switched]:
    """The case's own arrangement, then the others that the cable has cores for."""
    yield built
    spares = iter(run.spares)
    switched = built.cores.switched or next(spares, None)
    neutral = built.cores.neutral or next(spares, None)
    own = replace(built.cores, switched=switched, neutral=neutral)
    for kind in NEEDS:
        for cores in _parts(kind, own, built):
            other = replace(built, word=kind, cores=cores)
            if other != built:
                yield other


def _parts(kind: Word, own: Cores, built: Switched) -> Iterator[Cores]:
    """Who has which part in an arrangement; nothing where the cable has too few cores."""
    neutral = kind in WITH_NEUTRAL or kind == "contact at supply"
    cores = Cores(own.live, None if kind == "contact at supply" else own.switched,
                  own.neutral if neutral else None)
    elsewhere = built.word in WITH_NEUTRAL and built.cores.neutral is None
    if kind in WITH_NEUTRAL and elsewhere:
        cores = replace(cores, neutral=None)
    lacking = neutral and cores.neutral is None and not elsewhere
    if lacking or any(getattr(cores, part) is None for part in NEEDS[kind]):
        return
    yield cores
    if kind == "two-way" and cores.switched is not None:
        yield replace(cores, live=cores.switched, switched=cores.live)


def rearranged(run: Run, built: Switched, other: Switched) -> Run:
    """The run with another arrangement in the place of the one that it has."""
    kept = [{n: t for n, t in end.items() if n not in built.cores.names}
            for end in (run.near, run.far)]
    new = other.arrangement
    return replace(run, capacitance=run.matrix, near={**kept[0], **new.near},
                   far={**kept[1], **new.far})
