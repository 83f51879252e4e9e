"""The one exception family: a refusal says where, which rule, what was given, and a hint.

Also how a sentence lists words, for refusals and for what is reported.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from difflib import get_close_matches


@dataclass(frozen=True)
class Mistake:
    """One thing that is wrong with what the user gave."""

    place: str
    rule: str
    given: str = ""
    hint: str = ""

    def __str__(self) -> str:
        given = f"; given {_short(self.given)}" if self.given else ""
        hint = f" ({self.hint})" if self.hint else ""
        return f"{self.place}: {self.rule}{given}.{hint}"


class Refused(ValueError):
    """What was asked cannot be done as given; `mistakes` lists every reason found.

    >>> raise Refused("length", "must be above 0 m", given="-3 m")
    Traceback (most recent call last):
    ...
    unlanded.errors.Refused: length: must be above 0 m; given -3 m.
    """

    def __init__(self, place: str, rule: str, *, given: object = "", hint: str = "") -> None:
        self.mistakes: tuple[Mistake, ...] = (Mistake(place, rule, str(given), hint),)
        super().__init__(str(self.mistakes[0]))

    @classmethod
    def all_of(cls, mistakes: Iterable[Mistake]) -> Refused:
        """One refusal for several mistakes, in the order given; at least one."""
        found = tuple(mistakes)
        first = found[0]
        refusal = cls(first.place, first.rule, given=first.given, hint=first.hint)
        refusal.mistakes = found
        refusal.args = ("\n".join(str(m) for m in found),)
        return refusal

    def _render_traceback_(self) -> list[str]:
        # What a notebook shows in the place of a traceback.
        return [str(m) for m in self.mistakes]

    def at(self, place: str) -> Refused:
        """The same refusal, told from further out: `place` is put before each place."""
        return Refused.all_of(
            Mistake(f"{place}, {m.place}" if m.place else place, m.rule, m.given, m.hint)
            for m in self.mistakes
        )


def nearest(word: str, known: Iterable[str]) -> str:
    """A hint that names the nearest known word, or lists those there are; nothing without any.

    >>> nearest("lenght", ["length", "supply"])
    'did you mean "length"?'
    """
    known = [k for k in known if k]
    near = get_close_matches(word.lower(), [k.lower() for k in known], n=1, cutoff=0.6)
    if near:
        return f'did you mean "{next(k for k in known if k.lower() == near[0])}"?'
    if not known:
        return ""
    if len(known) > 12:
        return f"known: {', '.join(known[:12])} and {len(known) - 12} more"
    return f"known: {', '.join(known)}"


def listed(words: Sequence[str], last: str = "and") -> str:
    """Words joined as a sentence lists them, with `last` before the last of them.

    >>> listed(["a", "b", "c"]), listed(["a"]), listed(["a", "b"], "or")
    ('a, b and c', 'a', 'a or b')
    """
    *before, end = words or ("",)
    return f"{', '.join(before)} {last} {end}" if before else end


def _short(text: str, limit: int = 60) -> str:
    text = " ".join(text.split())
    return text if len(text) <= limit else f"{text[: limit - 1]}…"
