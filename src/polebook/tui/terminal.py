"""The terminal below Textual: what it can show, keys cut apart, output counted, signals that leave it as it was.

The one file that uses names which Textual keeps to itself (8.2): its driver for POSIX, parser and writer thread.
"""

from __future__ import annotations

import asyncio
import codecs
import io
import os
import select
import signal
import sys
import threading
from collections.abc import Callable, Mapping
from contextlib import suppress
from queue import SimpleQueue
from typing import IO, TYPE_CHECKING, Any

from polebook.tui.typeahead import ESC, TypeAhead

if TYPE_CHECKING:
    from textual.driver import Driver
    from textual.message import Message

_REST_S = 0.03  # within which the rest of a function key's sequence follows its Esc
_LOOK_S = 0.1  # between looks whether to end
_DRAIN_S = 2.0  # how long leaving waits for a terminal that takes no output
_GLYPHS = "─●◂█▏Ωµ–…"
ENDING = {name: getattr(signal, name) for name in ("SIGTERM", "SIGHUP", "SIGQUIT") if hasattr(signal, name)}


def ascii_only(environ: Mapping[str, str] = os.environ) -> bool:
    """Whether the terminal has no glyphs but those of ASCII: a console, a locale that says so, another encoding."""
    if environ.get("TERM") == "linux" or environ.get("LC_ALL") in ("C", "POSIX"):
        return True
    encoding = getattr(sys.__stdout__, "encoding", None) or "ascii"
    try:
        _GLYPHS.encode(encoding)
    except UnicodeEncodeError:
        return True
    return False


def on_ending(loop: asyncio.AbstractEventLoop, leave: Callable[[int], None]) -> None:
    """Calls `leave` with the exit code for a signal that ends the program, in place of dying with the terminal raw."""
    for number in ENDING.values():
        with suppress(NotImplementedError, RuntimeError, ValueError):  # no POSIX loop, or not the main thread
            loop.add_signal_handler(number, leave, 128 + number)


def driver_class() -> type[Driver] | None:
    """The driver for this system; None for Textual's own choice."""
    if os.name != "posix":
        return None
    return _driver_class()


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
    out = sys.__stdout__
    if out is None:
        return
    try:
        out.flush()
    except OSError:
        with suppress(OSError, ValueError):
            nowhere = os.open(os.devnull, os.O_WRONLY)
            os.dup2(nowhere, out.fileno())
            os.close(nowhere)


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


def _nothing() -> None:
    """What is told of output that has gone out, before the app listens."""


def _driver_class() -> type[Driver]:
    from textual._xterm_parser import XTermParser
    from textual.drivers.linux_driver import LinuxDriver
    from textual.events import Key

    def messages(piece: str) -> list[Message]:
        """What a piece says. A sequence that nobody knows says nothing: its letters would be taken for commands."""
        if piece == ESC:
            return [Key("escape", ESC)]
        return list(XTermParser().feed(piece))

    class TerminalDriver(LinuxDriver):
        """Textual's driver with the standard output in place of the standard error."""

        def __init__(self, app: Any, **options: Any) -> None:
            super().__init__(app, **options)
            self.told: Callable[[], None] = _nothing
            out = sys.__stdout__
            if isinstance(out, io.TextIOWrapper):
                out.reconfigure(errors="replace")  # a glyph that the encoding lacks keeps its one cell
                self._file = out

        def start_application_mode(self) -> None:
            start: Callable[[], None] = super().start_application_mode
            start()
            first, file = self._writer_thread, self._file
            if first is not None and file is not None:
                first.stop()
                writer: Any = Writer(file, self._all_sent)
                writer.start()
                self._writer_thread = writer

        def _all_sent(self) -> None:
            self.told()  # whoever listens now

        def run_input_thread(self) -> None:
            """Reads until the app ends, or the terminal does."""
            decode = codecs.getincrementaldecoder("utf-8")("replace").decode
            cut = TypeAhead()
            while not self.exit_event.is_set():
                ready, _, _ = select.select([self.fileno], [], [], _REST_S if cut.waits else _LOOK_S)
                if ready:
                    data = self._bytes()
                    if not data:
                        self._app.call_later(self._app.exit, return_code=128 + ENDING.get("SIGHUP", 1))
                        return
                    pieces = cut.feed(decode(data))
                else:
                    pieces = cut.timeout()
                for piece in pieces:
                    for message in messages(piece):
                        self.process_message(message)

        def _bytes(self) -> bytes:
            """What there is to read; none where the terminal has gone."""
            try:
                return os.read(self.fileno, 4096)
            except OSError:
                return b""

    return TerminalDriver
