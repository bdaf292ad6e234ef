"""The terminal below Textual: keys cut apart, output counted, signals that leave it as it was.

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
from collections.abc import Callable
from contextlib import suppress
from typing import TYPE_CHECKING, Any

from polebook.tui.setting import console
from polebook.tui.typeahead import ESC, TypeAhead
from polebook.tui.writer import Writer, let_go, unsent, when_sent

if TYPE_CHECKING:
    from textual.driver import Driver
    from textual.message import Message

__all__ = ["driver_class", "fail", "let_go", "on_ending", "on_fault", "stayed", "unsent", "when_sent", "without_extras"]

_REST_S = 0.03  # within which the rest of a function key's sequence follows its Esc
_LOOK_S = 0.1  # between looks whether to end, or whether the shell has given the terminal back
ENDING = {name: getattr(signal, name) for name in ("SIGTERM", "SIGHUP", "SIGQUIT", "SIGINT") if hasattr(signal, name)}

# What Textual writes -> what goes out in its place: no reports of the mouse, the focus or the size are asked for, and
# of the newer keyboard protocol only that Esc is told from the beginning of a sequence.
_ANYWHERE = {"\x1b[?1004h": "", "\x1b[?1004l": "", "\x1b[?2048$p": "", "\x1b[>25u": "\x1b[>1u"}
_ON_A_CONSOLE = _ANYWHERE | {
    "\x1b[>25u": "", "\x1b[<u": "", "\x1b[?2026$p": "", "\x1b[?2004h": "", "\x1b[?2004l": "",
    "\x1b[?1049h": "\x1b[H\x1b[2J", "\x1b[?1049l": "\x1b[H\x1b[2J",  # no second screen: it is left clear
}
_POINTER = "\x1b]22;"  # the shape of the mouse's pointer
_AGAIN = ("\x1b[?25l", "\x1b[?7l", "\x1b[?2004h")  # what a shell may have set otherwise while the app was stopped


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


def without_extras(app: object) -> None:
    """Without the widgets for notices and hints that Textual lays over a screen: they have it painted twice more."""
    app.__dict__.update(_disable_tooltips=True, _disable_notifications=True)


def stayed(driver: object) -> bool:
    """Whether the last ctrl+z had no shell to go back to."""
    return bool(getattr(driver, "stayed", False))


def on_fault(app: Any, told: Callable[[Exception], None]) -> None:
    """Has an exception out of the app told, and the app end, in place of a traceback on the screen."""
    def handle(error: Exception) -> None:
        told(error)
        if app._exception is None:  # a test's pilot raises it again
            app._exception = error
            app._exception_event.set()
        app._close_messages_no_wait()

    app.__dict__["_handle_exception"] = handle


def fail(app: Any, error: Exception) -> None:
    """Ends the app for an exception that came up outside its messages."""
    app._handle_exception(error)


def _nothing() -> None:
    """What is told of output that has gone out, before the app listens."""


def _driver_class() -> type[Driver]:
    import termios  # deferred: POSIX has it

    from textual._xterm_parser import XTermParser
    from textual.drivers.linux_driver import LinuxDriver
    from textual.events import Key, Paste
    from textual.messages import TerminalSupportsSynchronizedOutput

    wanted = (Key, Paste, TerminalSupportsSynchronizedOutput)

    def messages(piece: str) -> list[Message]:
        """What a piece says. A sequence that nobody knows says nothing: its letters would be taken for commands.
        Neither does the mouse, nor a report that nobody asked for."""
        if piece == ESC:
            return [Key("escape", ESC)]
        try:
            found = list(XTermParser().feed(piece))
        except (ValueError, OverflowError):  # a key by the number of a character that there is not
            return []
        return [message for message in found if isinstance(message, wanted)]

    class TerminalDriver(LinuxDriver):
        """Textual's driver with the standard output in place of the standard error."""

        def __init__(self, app: Any, **options: Any) -> None:
            super().__init__(app, **options)
            self.told: Callable[[], None] = _nothing
            self.stayed = False
            self._away = True  # the terminal is the shell's
            self._woken = False
            self._words = _ON_A_CONSOLE if console() else _ANYWHERE
            out = sys.__stdout__
            if isinstance(out, io.TextIOWrapper):
                out.reconfigure(errors="replace")  # a glyph that the encoding lacks keeps its one cell
                self._file = out

        def write(self, data: str) -> None:
            data = self._words.get(data, data)
            if data and not data.startswith(_POINTER):
                super().write(data)

        def start_application_mode(self) -> None:
            with suppress(OSError):
                os.set_blocking(self.fileno, True)  # as another program may not have left it: writing would fail
            before = self._writer_thread
            start: Callable[[], None] = super().start_application_mode
            start()
            first, file = self._writer_thread, self._file
            if first is not before and first is not None and file is not None:  # else the shell has the terminal
                self._away = False
                first.stop()
                writer: Any = Writer(file, self._all_sent)
                writer.start()
                self._writer_thread = writer

        def stop_application_mode(self) -> None:
            if not self._away:  # else all of it has been done, and the shell has the terminal
                super().stop_application_mode()
                self._away = True

        def disable_input(self) -> None:
            if not self._away:  # else to flush the input would have the kernel stop the app for good
                super().disable_input()

        def _all_sent(self) -> None:
            self.told()  # whoever listens now

        def _sigtstp_application(self, *_: object) -> None:
            """Ctrl+Z: to sleep as a program does that knows nothing of it, so that the kernel lets it go on where
            nobody could wake it."""
            self._woken = False
            if not self._away:
                self.suspend_application_mode()
            signal.signal(signal.SIGTSTP, signal.SIG_DFL)
            os.kill(os.getpid(), signal.SIGTSTP)  # returns once it goes on
            signal.signal(signal.SIGTSTP, self._sigtstp_application)
            self.stayed = not self._woken
            if self.stayed:
                self._back()

        def _sigcont_application(self, *_: object) -> None:
            self._woken = True
            if self._mine():
                self._back()
            else:  # `bg`, or the shell ends its job: on to sleep, unless it is to end
                self._loop.call_soon_threadsafe(self._loop.call_later, _LOOK_S, self._sleep)

        def _back(self) -> None:
            """The terminal is the app's again: as the app needs it, and painted."""
            if self._away:
                self._must_signal_resume = True
                self.resume_application_mode()
                return
            with suppress(termios.error):  # stopped and woken by others: Textual would begin to read the keys twice
                self._raw()
            for mode in _AGAIN:
                self.write(mode)
            self.send_message(self.SignalResume())

        def _sleep(self) -> None:
            if getattr(self._app, "_exit", False):
                return
            if self._mine():
                self._back()
            else:
                os.kill(os.getpid(), signal.SIGSTOP)

        def _mine(self) -> bool:
            """Whether the terminal takes output and orders from the app, not from the shell that it came from."""
            try:
                return os.tcgetpgrp(self.fileno) == os.getpgrp()
            except OSError:
                return os.isatty(self.fileno)  # a terminal without jobs; or it has gone, and the app with it

        def _raw(self) -> None:
            """Keys one by one, as Textual sets it at the start."""
            now = termios.tcgetattr(self.fileno)
            now[0], now[3] = self._patch_iflag(now[0]), self._patch_lflag(now[3])
            now[6][termios.VMIN] = 1
            termios.tcsetattr(self.fileno, termios.TCSANOW, now)

        def run_input_thread(self) -> None:
            """Reads until the app ends, or the terminal does."""
            encoding = getattr(sys.__stdin__, "encoding", None) or "utf-8"
            decode = codecs.getincrementaldecoder(encoding)("replace").decode
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
