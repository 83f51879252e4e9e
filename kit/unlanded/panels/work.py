"""Long work beside the kernel's loop, told in shares and stopped on request. No widget is here."""

from __future__ import annotations

import asyncio
from collections.abc import Callable
from typing import Any, TypeVar

from ..errors import Refused
from ..study.causes import Progress

SETTLED = 0.25  # seconds after a step from which a handle counts as at rest
LOOK = 0.1  # seconds between two looks at how far it is
Made = TypeVar("Made")


class Stopped(Exception):
    """The work was stopped before its end."""


class Work:
    """One long piece of work at a time: a new one stops the one before.

    Parameters
    ----------
    tell : called with the share that is done, from 0 to 1, and with None at the end
    """

    def __init__(self, tell: Callable[[float | None], None]) -> None:
        self._tell = tell
        self._number = 0

    def start(
        self, job: Callable[[Progress], Made], then: Callable[[Made], None],
        otherwise: Callable[[str], None], *, after: float = 0.0,
    ) -> None:
        """Do `job` in a thread, and `then` with its result in the loop; at once where none runs.

        `otherwise` is called with a sentence where it is refused or stopped. It begins `after` so
        many seconds, unless another has been asked for by then.
        """
        self._number += 1
        try:
            loop = asyncio.get_running_loop()
        except RuntimeError:
            self._finish(lambda: job(lambda _: None), then, otherwise)
            return
        self._task = loop.create_task(self._beside(job, then, otherwise, after))

    def stop(self) -> None:
        """Stop what is being done at its next report."""
        self._number += 1

    async def _beside(self, job: Callable[[Progress], Any], then: Callable[[Any], None],
                      otherwise: Callable[[str], None], after: float) -> None:
        done, number = [0.0], self._number
        await asyncio.sleep(after)
        if number != self._number:
            return

        def progress(share: float) -> None:
            if number != self._number:
                raise Stopped
            done[0] = share

        future = asyncio.get_running_loop().run_in_executor(None, job, progress)
        while not future.done():
            if number == self._number:
                self._tell(done[0])
            await asyncio.wait([future], timeout=LOOK)
        self._finish(future.result, then, otherwise, current=number == self._number)

    def _finish(self, result: Callable[[], Any], then: Callable[[Any], None],
                otherwise: Callable[[str], None], *, current: bool = True) -> None:
        try:
            made = result()
        except Refused as refusal:
            said = str(refusal)
        except Stopped:
            said = "Stopped."
        else:
            said = ""
        if current:
            self._tell(None)
            if said:
                otherwise(said)
            else:
                then(made)
