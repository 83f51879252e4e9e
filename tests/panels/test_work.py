"""Long work: told, stopped, followed by a later one, refused; at once where no loop runs."""

from __future__ import annotations

import asyncio
import time
from collections.abc import Callable

import pytest

from unlanded.errors import Refused
from unlanded.panels.work import Work
from unlanded.study.causes import Progress


class Told:
    """What the work told, made, and said."""

    def __init__(self) -> None:
        self.shares: list[float | None] = []
        self.made: list[object] = []
        self.said: list[str] = []
        self.work = Work(self.shares.append)

    def start(self, job: Callable[[Progress], object], after: float = 0.0) -> None:
        self.work.start(job, self.made.append, self.said.append, after=after)


@pytest.fixture
def told() -> Told:
    return Told()


def slow(result: object, steps: int = 30) -> Callable[[Progress], object]:
    def job(progress: Progress) -> object:
        for step in range(steps):
            progress(step / steps)
            time.sleep(0.01)
        return result
    return job


def refused(_: Progress) -> object:
    raise Refused("length", "must be above 0 m")


def test_at_once_where_no_loop_runs(told: Told) -> None:
    told.start(slow(7, 2))
    assert (told.made, told.said, told.shares) == ([7], [], [None])
    told.start(refused)
    assert told.said == ["length: must be above 0 m."]


def test_progress_then_result(told: Told) -> None:
    async def main() -> None:
        told.start(slow("done"))
        await asyncio.sleep(0.15)
        assert told.made == []
        await asyncio.sleep(1.5)
    asyncio.run(main())
    assert told.made == ["done"]
    assert told.shares[-1] is None
    shares = [s for s in told.shares if s is not None]
    assert shares == sorted(shares)
    assert max(shares) > 0


def test_stopped_work_makes_nothing(told: Told) -> None:
    async def main() -> None:
        told.start(slow("never", 1000))
        await asyncio.sleep(0.2)
        told.work.stop()
        await asyncio.sleep(0.3)
    begun = time.monotonic()
    asyncio.run(main())
    assert time.monotonic() - begun < 5
    assert (told.made, told.said) == ([], [])


def test_the_last_of_several_is_done(told: Told) -> None:
    async def main() -> None:
        for number in range(5):
            told.start(slow(number, 3), after=0.1)
            await asyncio.sleep(0.02)
        await asyncio.sleep(1.0)
    asyncio.run(main())
    assert told.made == [4]


def test_refused_in_the_thread(told: Told) -> None:
    async def main() -> None:
        told.start(refused)
        await asyncio.sleep(0.5)
    asyncio.run(main())
    assert (told.made, told.said) == ([], ["length: must be above 0 m."])
