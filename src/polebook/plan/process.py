"""A second process of this program that answers what it is asked, each thing as a whole message (`wire`)."""

from __future__ import annotations

import os
import subprocess
import sys
from contextlib import suppress
from threading import Thread

from polebook.plan import wire
from polebook.plan.wire import Garbled, Message


class Process:
    """Runs `program` (Python, fixed text) as a program of its own, not as a copy of this one, and hears it in a thread.

    Raises OSError where there is no room for one. Its maker says what becomes of what it says (`heard`, called in that
    thread) and of its end (`gone`, likewise).
    """

    def __init__(self, program: str) -> None:
        path = os.pathsep.join(part or os.getcwd() for part in sys.path)
        # -P: or it would take a module that lies in the current folder for one of Python's own
        self._process = subprocess.Popen([sys.executable, "-P", "-c", program], stdin=subprocess.PIPE,
                                         stdout=subprocess.PIPE, stderr=subprocess.DEVNULL,
                                         env={**os.environ, "PYTHONPATH": path})
        self._listener = Thread(target=self._listen, daemon=True)
        self._listener.start()

    def heard(self, what: Message) -> None:
        """Something that it said. Raises Garbled for what it may not say."""
        raise NotImplementedError

    def gone(self, why: str) -> None:
        """It has ended (""), or says what nobody understands."""
        raise NotImplementedError

    def give(self, what: Message) -> None:
        """Hands something over."""
        assert self._process.stdin is not None
        with suppress(OSError):  # it has gone: its listener says so
            wire.write(self._process.stdin, what)

    def end(self) -> None:
        """Ends the process, whatever it does."""
        self._process.kill()
        self._process.wait()
        self._listener.join()
        for pipe in (self._process.stdin, self._process.stdout):
            if pipe is not None:
                with suppress(OSError):
                    pipe.close()

    def _listen(self) -> None:
        assert self._process.stdout is not None
        why = ""
        try:
            while (what := wire.read(self._process.stdout)) is not None:
                self.heard(what)
        except Garbled as error:
            why = str(error)
        except OSError:
            pass
        self.gone(why)
