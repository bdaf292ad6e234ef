"""Spreads in a process of their own: whatever they compute, no key waits for it, and giving one up ends it at once."""

from __future__ import annotations

import atexit
import os
import pickle
import subprocess
import sys
from collections.abc import Iterator
from contextlib import suppress
from dataclasses import fields, replace
from queue import Empty, SimpleQueue
from threading import Thread
from types import MappingProxyType
from typing import TYPE_CHECKING, Any

from polebook.chain.model import Chain
from polebook.problem import Problem, ProblemsFound

if TYPE_CHECKING:
    from polebook.tui.spread_work import Step

PROGRAM = "from polebook.tui.spread_work import serve; serve()"
WAIT_S = 0.004  # that a step waits for news: keys come between
BLOCK = 256  # builds at a time where there is no other process

_idle: list[Apart] = []  # one at the most: a program that is there answers half a second sooner
_living: set[Apart] = set()


class Apart:
    """Such a process, with nothing to do yet. Raises OSError where there is no room for one."""

    def __init__(self) -> None:
        path = os.pathsep.join(part or os.getcwd() for part in sys.path)
        self._heard: SimpleQueue[tuple[str, Any]] = SimpleQueue()
        self._process = subprocess.Popen([sys.executable, "-c", PROGRAM], stdin=subprocess.PIPE, stdout=subprocess.PIPE,
                                         stderr=subprocess.DEVNULL, env={**os.environ, "PYTHONPATH": path})
        self._listener = Thread(target=self._listen, name="spread", daemon=True)
        self._listener.start()
        _living.add(self)

    def ask(self, chain: Chain, builds: int, seed: int) -> None:
        """Has it begin."""
        assert self._process.stdin is not None
        with suppress(OSError):  # it has gone: its listener says so
            pickle.dump((_portable(chain), builds, seed), self._process.stdin, pickle.HIGHEST_PROTOCOL)
            self._process.stdin.flush()

    def heard(self) -> tuple[str, Any] | None:
        """What it says next: ("step", ...), ("end", None), ("problems", ...), ("fault", ...), ("gone", None)."""
        with suppress(Empty):
            return self._heard.get(timeout=WAIT_S)
        return None

    def end(self) -> None:
        """Ends the process, whatever it does."""
        _living.discard(self)
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
                self._heard.put(pickle.load(self._process.stdout))
        except (EOFError, OSError, ValueError, pickle.UnpicklingError):
            self._heard.put(("gone", None))


def spread(chain: Chain, builds: int, seed: int) -> Iterator[Step]:
    """As `spread_work.steps`, each step in some milliseconds; (done, total, None) also where nothing has come."""
    try:
        worker = _idle.pop() if _idle else Apart()
    except OSError:
        from polebook.tui.spread_work import steps  # deferred: here nothing else needs the engine

        yield from steps(chain, builds, seed, block=BLOCK)
        return
    last: Step = (0, 0, None)
    free = False
    try:
        worker.ask(chain, builds, seed)
        while not free:
            heard = worker.heard()
            if heard is None:
                yield last
                continue
            kind, what = heard
            free = kind in ("end", "problems")
            if kind == "problems":
                raise ProblemsFound(what)
            if kind == "fault":
                raise RuntimeError(what)
            if kind == "gone":
                raise ProblemsFound([Problem(None, "the process that computes it has gone", "something has ended it",
                                             "s begins again")])
            if kind == "step":
                last = (what[0], what[1], None)
                yield what
    finally:
        if free and not _idle:
            _idle.append(worker)
        else:
            worker.end()


def end_all() -> None:
    """Ends every such process of this program."""
    _idle.clear()
    for worker in list(_living):
        worker.end()


atexit.register(end_all)


def _portable(chain: Chain) -> Chain:
    """The same with plain dicts, which can be sent."""
    views: dict[str, Any] = {one.name: getattr(chain, one.name) for one in fields(chain)}
    plain: dict[str, Any] = {key: dict(view) for key, view in views.items() if isinstance(view, MappingProxyType)}
    return replace(chain, **plain)
