"""Output to the terminal in the background, counted: whether all of it has gone, and what to do once it has."""

from __future__ import annotations

import os
import sys
import threading
from collections.abc import Callable
from contextlib import suppress
from queue import SimpleQueue
from typing import IO

_DRAIN_S = 2.0  # how long leaving waits for a terminal that takes no output


class Writer(threading.Thread):
    """Writes in the background, never holds up who writes, and knows whether all of it has gone out."""

    def __init__(self, file: IO[str], told: Callable[[], None]) -> None:
        super().__init__(daemon=True, name="polebook-output")
        self._file, self._told = file, told
        self._queue: SimpleQueue[str | None] = SimpleQueue()
        self._lock = threading.Lock()
        self._open = 0

    @property
    def waiting(self) -> bool:
        return self._open > 0

    def write(self, text: str) -> None:
        with self._lock:
            self._open += 1
        self._queue.put(text)

    def flush(self) -> None:
        """Nothing to do: the thread flushes whenever it has written."""

    def isatty(self) -> bool:
        return True

    def fileno(self) -> int:
        return self._file.fileno()

    def run(self) -> None:
        lost = False  # the terminal has gone: what is left is taken and dropped, and the reader tells of the end
        while (text := self._queue.get()) is not None:
            if not lost:
                try:
                    self._file.write(text)
                    if self._queue.empty():
                        self._file.flush()
                except (OSError, ValueError):
                    lost = True
            with self._lock:
                self._open -= 1
            if not self._open:
                self._told()
        with suppress(OSError, ValueError):  # the last text may have gone in with the end already behind it
            self._file.flush()

    def stop(self) -> None:
        self._queue.put(None)
        self.join(_DRAIN_S)


def unsent(driver: object) -> bool:
    """Whether output still waits to be taken by the terminal."""
    writer = getattr(driver, "_writer_thread", None)
    return isinstance(writer, Writer) and writer.waiting


def when_sent(driver: object, told: Callable[[], None]) -> None:
    """Has `told` called, in the writer's thread, whenever all output has been taken."""
    if driver is not None:
        driver.__dict__["told"] = told


def let_go() -> None:
    """Ends the output to a terminal that has gone, so that leaving does not stumble over what it can't flush."""
    for out in (sys.__stdout__, sys.__stderr__):
        if out is None:
            continue
        try:
            out.flush()
        except OSError:
            with suppress(OSError, ValueError):
                nowhere = os.open(os.devnull, os.O_WRONLY)
                os.dup2(nowhere, out.fileno())
                os.close(nowhere)
