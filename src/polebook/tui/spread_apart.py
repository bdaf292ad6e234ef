"""Spreads in a process of their own: whatever they compute, no key waits for it, and giving one up ends it at once."""

from __future__ import annotations

import atexit
from collections.abc import Callable, Iterator
from contextlib import suppress
from queue import Empty, SimpleQueue
from typing import TYPE_CHECKING, Any, TypeVar

from polebook.chain.model import Chain
from polebook.plan.process import Process, portable
from polebook.problem import Problem, ProblemsFound

if TYPE_CHECKING:
    from polebook.tui.spread_work import Step

PROGRAM = "from polebook.tui.spread_work import serve; serve()"
WAIT_S = 0.004  # that a step waits for news: keys come between
BLOCK = 256  # builds at a time where there is no other process

T = TypeVar("T", bound="Apart")
_idle: list[Apart] = []  # one at the most: a program that is there answers half a second sooner
_living: set[Apart] = set()


class Apart(Process):
    """Such a process, with nothing to do yet. Raises OSError where there is no room for one."""

    def __init__(self, program: str = PROGRAM) -> None:
        self._news: SimpleQueue[tuple[str, Any]] = SimpleQueue()
        super().__init__(program)
        _living.add(self)

    def ask(self, chain: Chain, builds: int, seed: int) -> None:
        """Has it begin."""
        self.give((portable(chain), builds, seed))

    def heard(self, what: Any) -> None:
        self._news.put(what)

    def gone(self) -> None:
        self._news.put(("gone", None))

    def news(self) -> tuple[str, Any] | None:
        """What it says next: ("step", ...), ("end", None), ("problems", ...), ("fault", ...), ("gone", None)."""
        with suppress(Empty):
            return self._news.get(timeout=WAIT_S)
        return None

    @property
    def there(self) -> bool:
        """Whether it has not been ended."""
        return self in _living

    def end(self) -> None:
        """Ends the process, whatever it does."""
        _living.discard(self)
        super().end()


def spread(chain: Chain, builds: int, seed: int) -> Iterator[Step]:
    """As `spread_work.steps`, each step in some milliseconds; (done, total, None) also where nothing has come."""
    try:
        worker = _idle.pop() if _idle else Apart()
    except OSError:
        from polebook.tui.spread_work import steps  # deferred: here nothing else needs the engine

        yield from steps(chain, builds, seed, block=BLOCK)
        return
    yield from answered(worker, _idle, lambda: worker.ask(chain, builds, seed))


def answered(worker: T, idle: list[T], ask: Callable[[], None], meanwhile: Callable[[], None] = lambda: None,
             ) -> Iterator[tuple[int, int, Any]]:
    """The steps that a process answers what it is asked by, (done, total, None) where nothing has come.

    idle  where it waits for the next one;  meanwhile  is called between them
    """
    last: tuple[int, int, Any] = (0, 0, None)
    free = False
    try:
        ask()
        while not free:
            meanwhile()
            news = worker.news()
            if news is None:
                yield last
                continue
            kind, what = news
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
        if free and not idle:
            idle.append(worker)
        else:
            worker.end()


def end_all() -> None:
    """Ends every such process of this program."""
    _idle.clear()
    for worker in list(_living):
        worker.end()


atexit.register(end_all)
