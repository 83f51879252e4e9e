"""Where the words beside points go, so that none covers another, a leader or the curve."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass
from itertools import product

# Of a picture 160 mm wide with words of 8 points; a live figure has about the same proportions.
LETTER = 0.0100  # width of a letter, as a fraction of the x axis
ROW = 0.066  # height of a row of words, as a fraction of the y axis
GAP = 0.008
SAME = 0.006  # poles nearer than this are drawn as one
ROWS = 13


@dataclass(frozen=True)
class Flag:
    """Words on a vertical pole that stands on a point, all in fractions of the axes.

    (x, y) is the point, `height` the middle of the words; they start at the pole, or end there.
    """

    x: float
    y: float
    height: float
    width: float
    leftward: bool

    @property
    def box(self) -> tuple[float, float, float, float]:
        """Left, right, bottom, top of the words."""
        left = self.x - self.width if self.leftward else self.x
        return left, left + self.width, self.height - ROW / 2, self.height + ROW / 2

    def clashes(self, other: Flag) -> bool:
        """Whether words meet words, or a pole runs through words, either way."""
        a, b = self.box, other.box
        words = a[0] < b[1] + GAP and b[0] < a[1] + GAP and a[2] < b[3] and b[2] < a[3]
        return words or self._spears(other) or other._spears(self)

    def _spears(self, other: Flag) -> bool:
        box = other.box
        if abs(self.x - other.x) < SAME:
            return False  # one pole: where one runs, the other's words begin
        low, high = sorted((self.y, self.height))
        beside = box[0] - GAP < self.x < box[1] + GAP
        return beside and low < box[3] and box[2] < high


def flags(
    points: Sequence[tuple[float, float]],
    texts: Sequence[str],
    curve: Callable[[float], float] | None = None,
) -> list[Flag]:
    """A flag for each point, in the order given, clear of each other and of the curve.

    `points` and what `curve` returns for x are fractions of the axes. Where a picture is too
    full for that, a flag gives up the curve first, then the others; it never leaves the axes.

    >>> [f.height > 0.2 for f in flags([(0.1, 0.2), (0.12, 0.2)], ["one", "two"])]
    [True, True]
    """
    placed: dict[int, Flag] = {}

    def best(tried: list[Flag]) -> Flag:
        within = [f for f in tried if _inside(f)] or tried
        apart = [f for f in within if not any(map(f.clashes, placed.values()))] or within
        return next((f for f in apart if _clear(f, curve, points)), apart[0])

    # Poles must not cross words already there, so the flags nearest the curve come first.
    for i in sorted(range(len(points)), key=lambda i: (points[i][1] < 0.5, -points[i][0])):
        width = LETTER * len(texts[i]) + GAP
        placed[i] = best(list(_candidates(points[i], width)))
    return [placed[i] for i in range(len(points))]


def _candidates(point: tuple[float, float], width: float) -> Iterator[Flag]:
    x, y = point
    first = 1 if y < 0.5 else -1
    for way, leftward, row in product((first, -first), (False, True), range(1, ROWS + 1)):
        yield Flag(x, y, y + way * (row + 0.2) * ROW, width, leftward)


def _inside(flag: Flag) -> bool:
    left, right, bottom, top = flag.box
    return left >= 0.005 and right <= 0.995 and bottom >= 0.005 and top <= 0.995


def _clear(
    flag: Flag,
    curve: Callable[[float], float] | None,
    points: Sequence[tuple[float, float]],
) -> bool:
    left, right, bottom, top = flag.box
    if any(left - GAP < x < right + GAP and bottom - GAP < y < top + GAP for x, y in points):
        return False
    if curve is None:
        return True
    steps = (left + (right - left) * i / 8 for i in range(9))
    return all(not bottom - GAP < curve(x) < top + GAP for x in steps)
