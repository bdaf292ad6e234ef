"""A second process of this program that answers what it is asked, each thing as a whole; `send` is its side's too."""

from __future__ import annotations

import os
import pickle
import subprocess
import sys
from contextlib import suppress
from dataclasses import fields, replace
from threading import Thread
from types import MappingProxyType
from typing import IO, Any

from polebook.chain.model import Chain


class Process:
    """Runs `program` (Python) as a program of its own, not as a copy of this one, and hears it in a thread of its own.

    Raises OSError where there is no room for one. Its maker says what becomes of what it says (`heard`, called in that
    thread) and of its end (`gone`, likewise).
    """

    def __init__(self, program: str) -> None:
        path = os.pathsep.join(part or os.getcwd() for part in sys.path)
        self._process = subprocess.Popen([sys.executable, "-c", program], stdin=subprocess.PIPE, stdout=subprocess.PIPE,
                                         stderr=subprocess.DEVNULL, env={**os.environ, "PYTHONPATH": path})
        self._listener = Thread(target=self._listen, daemon=True)
        self._listener.start()

    def heard(self, what: Any) -> None:
        """Something that it said."""
        raise NotImplementedError

    def gone(self) -> None:
        """It has ended, or says what nobody understands."""
        raise NotImplementedError

    def give(self, what: object) -> None:
        """Hands something over."""
        assert self._process.stdin is not None
        with suppress(OSError):  # it has gone: its listener says so
            send(self._process.stdin, what)

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
        try:
            while True:
                self.heard(pickle.load(self._process.stdout))
        except (EOFError, OSError, ValueError, pickle.UnpicklingError):
            self.gone()


def send(target: IO[bytes], what: object) -> None:
    """Writes something for the other side to load."""
    pickle.dump(what, target, pickle.HIGHEST_PROTOCOL)
    target.flush()


def portable(chain: Chain) -> Chain:
    """The same with plain dicts, which can be sent."""
    views: dict[str, Any] = {one.name: getattr(chain, one.name) for one in fields(chain)}
    plain: dict[str, Any] = {key: dict(view) for key, view in views.items() if isinstance(view, MappingProxyType)}
    return replace(chain, **plain)
