"""The end of the app however it comes: the terminal as it was, and what its user is told of unsaved work."""

from __future__ import annotations

import os
import signal
import sys
import traceback
from collections.abc import Iterator
from contextlib import contextmanager, suppress

from polebook.problem import printable
from polebook.tui.guardian import Guardian

FAULT = 70  # the exit code after a fault of ours
_SHUT = "\x1b[<u\x1b[?2004l\x1b[?7h\x1b[?1049l\x1b[?25h"  # keyboard, paste, line wrap, second screen, cursor


@contextmanager
def as_it_was() -> Iterator[None]:
    """Leaves the terminal in the mode that it had, should the driver not have got to it."""
    if os.name != "posix" or sys.__stdin__ is None:
        yield
        return
    import termios  # there is none on other systems

    number = sys.__stdin__.fileno()
    before = None
    with suppress(termios.error, OSError):
        before = termios.tcgetattr(number)
    try:
        yield
    finally:
        with suppress(termios.error, OSError):  # it has gone
            # in the background it is the shell's, in a mode of its own
            if before is not None and os.tcgetpgrp(number) == os.getpgrp() and termios.tcgetattr(number) != before:
                os.write(number, _SHUT.encode("ascii"))
                termios.tcsetattr(number, termios.TCSANOW, before)


def report(error: BaseException) -> str:
    """What is kept of a fault: where it came from, without any text of the file."""
    return "".join(traceback.format_exception(error))


def tell(name: str, guardian: Guardian, code: int, crash: str | None = None) -> None:
    """Says on the standard error, where anybody is left to read it, what became of unsaved work.

    name  of the chain file;  code  the exit code;  crash  where what happened is kept, "" nowhere; None: no crash
    """
    lines = []
    if crash is not None:
        lines.append("polebook: a fault of its own ended it, not one of your file")
    elif code > 128:
        lines.append(f"polebook: ended by {signal.Signals(code - 128).name}")
    else:
        lines.append("polebook:")
    if guardian.unkept and guardian.kept:
        lines.append(f"{name}: what was not written can't be offered at the next opening ({guardian.unkept})")
        lines.append(f"it is in {guardian.kept}, a chain file itself")
    elif guardian.unkept:
        lines.append(f"{name}: what was not written could not be kept ({guardian.unkept}), and is lost")
    elif guardian.kept:
        lines.append(f"{name}: what was not written is kept; opening the file again offers it")
        lines.append(f"it is in {guardian.kept}")
    elif crash is not None:
        lines.append(f"{name}: nothing was unsaved")
    if crash:
        lines.append(f"what happened is written down in {crash}")
    if len(lines) > 1:
        with suppress(OSError, ValueError):
            print("\n  ".join(map(printable, lines)), file=sys.__stderr__, flush=True)
