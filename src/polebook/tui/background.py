"""Work that may wait for a disk, done in turn by a thread of its own: no key waits for it, and leaving does not."""

from __future__ import annotations

import threading
from collections.abc import Callable
from contextlib import suppress
from queue import SimpleQueue
from typing import TYPE_CHECKING, TypeVar

if TYPE_CHECKING:  # a file that can't be read is told without it, 40 ms sooner
    import asyncio

T = TypeVar("T")


class Background:
    """A thread that begins with its first work, and ends with the program."""

    def __init__(self, name: str, failed: Callable[[Exception], None]) -> None:
        """`failed` is told, in the thread, of an exception: a fault of ours, for the disk's are values."""
        self._name, self._failed = name, failed
        self._queue: SimpleQueue[Callable[[], None]] = SimpleQueue()
        self._thread: threading.Thread | None = None

    def do(self, work: Callable[[], T], told: Callable[[T], None]) -> None:
        """Has `work` done, and `told` of what it came to, in the thread."""
        def whole() -> None:
            try:
                told(work())
            except Exception as error:
                self._failed(error)

        self._queue.put(whole)
        if self._thread is None:
            self._thread = threading.Thread(target=self._run, name=self._name, daemon=True)
            self._thread.start()

    def _run(self) -> None:
        while True:
            self._queue.get()()


class Ashore:
    """The way from threads to the loop of the app, once there is one."""

    def __init__(self) -> None:
        self.loop: asyncio.AbstractEventLoop | None = None
        self.over = False  # nothing is done any more of what is told
        self._failed: Callable[[Exception], None] = lambda error: None

    def begin(self, loop: asyncio.AbstractEventLoop, failed: Callable[[Exception], None]) -> None:
        """`failed` is told, in the loop, of faults of ours."""
        self.loop, self._failed = loop, failed

    def tell(self, work: Callable[[], None]) -> None:
        """From a thread: has `work` done in the loop."""
        if self.loop is not None:
            with suppress(RuntimeError):  # the loop has ended
                self.loop.call_soon_threadsafe(self._sound, work)

    def broken(self, error: Exception) -> None:
        """From a thread: has a fault of ours told in the loop."""
        def work() -> None:
            raise error

        self.tell(work)

    def _sound(self, work: Callable[[], None]) -> None:
        if self.over:
            return
        try:
            work()
        except Exception as error:
            self._failed(error)
