"""Spreads in a process of their own: whatever they compute, no key waits for it, and giving one up ends it at once."""

from __future__ import annotations

import atexit
from collections.abc import Callable, Iterator
from contextlib import suppress
from queue import Empty, SimpleQueue
from typing import TYPE_CHECKING, Any, TypeVar

from polebook.chain.model import Chain
from polebook.plan.passed import passed
from polebook.plan.process import Process
from polebook.plan.wire import Message
from polebook.problem import Problem, ProblemsFound
from polebook.tui.news import News, news

if TYPE_CHECKING:
    from polebook.tui.spread_work import Step

PROGRAM = "from polebook.tui.spread_work import serve; serve()"
WAIT_S = 0.004  # that a step waits for news: keys come between
BLOCK = 256  # builds at a time where there is no other process

T = TypeVar("T", bound="Apart")
_idle: list[Apart] = []  # one at the most: a program that is there answers half a second sooner
_living: set[Apart] = set()


def _told(given: Any) -> Any:
    from polebook.tui.spread_passed import told  # deferred: it needs numpy, and there is no run at the start

    return told(given)


class Apart(Process):
    """Such a process, with nothing to do yet. Raises OSError where there is no room for one."""

    def __init__(self, program: str, piece: Callable[[Any], Any]) -> None:
        """`piece` takes what a step has come to, as `news.news` does."""
        self._news: SimpleQueue[News] = SimpleQueue()
        self._piece = piece
        super().__init__(program)
        _living.add(self)

    def heard(self, what: Message) -> None:
        self._news.put(news(what, self._piece))

    def gone(self, why: str) -> None:
        self._news.put(("gone", why))

    def news(self) -> News | None:
        """What it says next, None where that is not yet."""
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
    worker = None
    told = passed(chain)
    if told is not None:
        with suppress(OSError):
            worker = _idle.pop() if _idle else Apart(PROGRAM, _told)
    if worker is None or told is None:
        from polebook.tui.spread_work import steps  # deferred: here nothing else needs the engine

        yield from steps(chain, builds, seed, block=BLOCK)
        return
    asked = Message("run", {"chain": told, "builds": builds, "seed": seed})
    yield from answered(worker, _idle, lambda: worker.give(asked))


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
            heard = worker.news()
            if heard is None:
                yield last
                continue
            free = heard[0] in ("end", "problems")
            if heard[0] == "problems":
                raise ProblemsFound(heard[1])
            if heard[0] == "fault":
                raise RuntimeError(heard[1])
            if heard[0] == "gone":
                raise ProblemsFound([_gone(heard[1])])
            if heard[0] == "step":
                last = (*heard[1][:2], None)
                yield heard[1]
    finally:
        if free and not idle:
            idle.append(worker)
        else:
            worker.end()


def _gone(why: str) -> Problem:
    if why:
        return Problem(None, "the process that computes it says what is no answer", why,
                       "s begins again; if polebook was updated while it ran, leave it and open the file again")
    return Problem(None, "the process that computes it has gone", "something has ended it", "s begins again")


def end_all() -> None:
    """Ends every such process of this program."""
    _idle.clear()
    for worker in list(_living):
        worker.end()


atexit.register(end_all)
