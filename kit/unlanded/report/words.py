"""Plain words for the points and pairs of a run, as titles, tables and captions say them."""

from __future__ import annotations

import re
import textwrap
import unicodedata

from ..physics.network import EARTH
from ..study.ends import SCREEN
from ..study.run import Run


def point_words(point: str) -> str:
    """What a reader calls a point of a run.

    >>> point_words("spare@near"), point_words("earth"), point_words("N")
    ('spare, near end', 'earth', 'N')
    """
    conductor, _, end = point.rpartition("@")
    return f"{conductor}, {end} end" if conductor else point


def pair_words(a: str, b: str, *, end: bool = True) -> str:
    """What a reader calls a pair; the end is said once when both points are there.

    >>> pair_words("spare@near", "earth"), pair_words("red@far", "spare@far", end=False)
    ('spare to earth, near end', 'red to spare')
    """
    ends = [point.rpartition("@")[2] for point in (a, b) if "@" in point]
    if len(set(ends)) > 1:
        return f"{point_words(a)} to {point_words(b)}"
    names = " to ".join(p.rpartition("@")[0] if "@" in p else point_words(p) for p in (a, b))
    return f"{names}, {ends[0]} end" if ends and end else names


def screen_words(run: Run) -> str:
    """How the screen of a run is earthed, to follow "the screen is"; "" for a run without one."""
    if run.screen is None:
        return ""
    ends = [end for end in ("near", "far") if run.node(f"{SCREEN}@{end}") == EARTH]
    return ("earthed at no end" if not ends else "earthed at both ends" if len(ends) == 2 else
            f"earthed at the {ends[0]} end alone")


def tool_words(name: str) -> str:
    """An instrument's name as a sentence takes it, which has commas of its own.

    >>> tool_words("digital meter, 10 MΩ"), tool_words("coil tester")
    ('digital meter (10 MΩ)', 'coil tester')
    """
    kind, _, more = name.partition(", ")
    return f"{kind} ({more})" if more else name


def percent(share: float) -> str:
    """A share as a reader has it.

    >>> percent(0.95), percent(-0.136)
    ('95 %', '−14 %')
    """
    return f"{100 * share:.0f} %".replace("-", "−")


def capital(text: str) -> str:
    """`text` as it begins a sentence.

    >>> capital("relay coil")
    'Relay coil'
    """
    return f"{text[:1].upper()}{text[1:]}"


def cut(text: str, length: int) -> str:
    """`text`, no longer than `length`; what is cut off is marked.

    >>> cut("evaporator fan", 8)
    'evapora…'
    """
    return text if len(text) <= length else f"{text[: length - 1].rstrip()}…"


def printable(text: str) -> str:
    """`text` with a mark for each control, format or broken character, but for tab and new line.

    A name from a case file must not steer a terminal or break a document.

    >>> printable("spare\x1b[2J")
    'spare�[2J'
    """
    bad = ("Cc", "Cf", "Cs", "Co", "Cn")
    return "".join(
        "�" if unicodedata.category(c) in bad and c not in "\n\t" else c for c in text
    )


_QUANTITY = re.compile(
    r"(?<=[0-9∞]) (?=[fpnµmkMGT]?(?:VA|Hz|in|ft|mm²|AWG|[VAΩFHWSmsC%])(?:/(?:k?m|ft))?(?!\w))"
)


def bound(text: str) -> str:
    """`text` with each number bound to its unit, so that no line ends between them.

    >>> bound("at 10 MΩ in 2 days") == "at 10\N{NO-BREAK SPACE}MΩ in 2 days"
    True
    """
    return _QUANTITY.sub("\N{NO-BREAK SPACE}", text)


def filled(text: str, width: int, *, first: str = "", then: str = "") -> str:
    """`text` for a terminal, in lines of at most `width`; `first` and `then` indent them.

    >>> print(filled("a meter of 3 kΩ", 12))
    a meter of
    3 kΩ
    """
    return textwrap.fill(bound(printable(text)), width, initial_indent=first,
                         subsequent_indent=then).replace("\N{NO-BREAK SPACE}", " ")
