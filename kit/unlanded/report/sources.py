"""The sources of the values that a case used."""

from __future__ import annotations

from collections.abc import Iterator

from ..errors import listed
from ..reference.records import Source
from .causes import causes_sources
from .circuit import circuit_sources
from .cores import core_sources
from .investigation import Investigation
from .margin import margin_sources
from .memo import Bullets, Paragraph, Part
from .operation import operation_sources
from .sizing import sizing_sources
from .touch import touch_sources
from .words import capital

METHODS = (
    ("capacitances, by multipoles round each covered conductor",
     Source("Clements, Paul and Adams, IEEE Transactions on Electromagnetic Compatibility",
            "from memory", year=1975)),
    ("ranges, by propagation of distributions", Source("JCGM 101", "from memory", year=2008)),
    ("shares of the variance", Source("Saltelli and others, Computer Physics Communications",
                                      "from memory", "181, 259", 2010)),
    ("return by earth, first term of the series", Source("Carson", "from memory", year=1926)),
)


def sources_part(investigation: Investigation) -> Part:
    """The sources of the values and methods used, each once, with what came from it."""
    said: dict[str, dict[str, None]] = {}
    for what, source in _used(investigation):
        said.setdefault(str(source), {})[what] = None
    lines = tuple(f"{capital(listed(list(what)))}: {source}." for source, what in said.items())
    return Part("Sources", (
        Paragraph("“From memory” marks a value recalled and still to be checked against its "
                  "source; “common practice” one of the trade, with no source. What is not listed "
                  "came from the case itself."),
        Bullets(lines),
    ))


def _used(investigation: Investigation) -> Iterator[tuple[str, Source]]:
    yield from core_sources(investigation.case.content.run.cable)
    yield from circuit_sources(investigation)
    for tool in investigation.instruments:
        yield tool.name, tool.source
    yield from margin_sources(investigation)
    yield from causes_sources(investigation)
    yield from operation_sources(investigation)
    yield from sizing_sources(investigation)
    yield from touch_sources(investigation)
    yield from METHODS
