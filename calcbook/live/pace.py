"""Doing something as often as is useful: at once when it is quiet, else paced, never forgotten."""

from __future__ import annotations

import asyncio
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from collections.abc import Callable


def loop() -> asyncio.AbstractEventLoop | None:
    """Return the loop of the kernel that is running, or None in plain Python."""
    try:
        return asyncio.get_running_loop()
    except RuntimeError:
        return None


class Paced:
    """An act that is asked for more often than it need be done.

    Where no loop runs it is done each time it is asked for.

    Parameters
    ----------
    act
        What is done.
    seconds
        The least time between the end of one and the beginning of the next.
    first
        Seconds until the first one of a quiet time; None: before ``__call__`` returns.
    """

    def __init__(
        self, act: Callable[[], None], seconds: float, *, first: float | None = None
    ) -> None:
        self._act, self._seconds, self._first = act, seconds, first
        self._loop: asyncio.AbstractEventLoop | None = None
        self._later: asyncio.TimerHandle | None = None
        self._free = 0.0

    @property
    def waiting(self) -> bool:
        """Whether it was asked for and is not done yet."""
        return self._later is not None

    def __call__(self) -> None:
        """Ask for it."""
        running = loop()
        if running is not self._loop:  # one that stopped does nothing any more
            self._loop, self._later, self._free = running, None, 0.0
        if running is None:
            self._act()
        elif self._later is None:
            wait = self._free - running.time()
            if wait <= 0 and self._first is None:
                self.now()
            else:
                self._later = running.call_later(max(wait, self._first or 0.0), self.now)

    def now(self) -> None:
        """Do it, whether it was asked for or not; nothing is left waiting."""
        self.drop()
        try:
            self._act()
        finally:
            if self._loop is not None:
                self._free = self._loop.time() + self._seconds

    def drop(self) -> None:
        """Do not do what was asked for."""
        if self._later is not None:
            self._later.cancel()
            self._later = None
