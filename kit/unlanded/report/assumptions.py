"""What the memo takes for granted, said so that a reader can disagree with it."""

from __future__ import annotations

from .investigation import Investigation
from .memo import Bullets, Part


def assumptions_part(investigation: Investigation) -> Part:
    """What was taken for granted, one sentence a line."""
    return Part("Assumptions", (Bullets(("x",)),))
