"""The sources of the values that a case used."""

from __future__ import annotations

from ..reference.records import Source
from .investigation import Investigation
from .memo import Bullets, Paragraph, Part


def sources_part(investigation: Investigation) -> Part:
    """The sources of the values used, each once."""
    sources: tuple[Source, ...] = tuple(i.source for i in investigation.instruments)
    words = tuple(dict.fromkeys(str(s) for s in sources))
    return Part("Sources", (
        Paragraph("“From memory” marks a value recalled and still to be checked against its "
                  "source; “common practice” one of the trade, with no source."),
        Bullets(words),
    ))
