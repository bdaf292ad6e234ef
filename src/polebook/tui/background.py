"""Work that may wait for a disk, done in turn by a thread of its own: no key waits for it, and leaving does not."""

from __future__ import annotations

import threading
from collections.abc import Callable
from queue import SimpleQueue
from typing import TypeVar

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
