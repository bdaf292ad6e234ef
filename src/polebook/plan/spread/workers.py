"""Blocks of builds, handed back in their order: computed here, and by helpers where the work is worth them."""


from __future__ import annotations

import os
import sys
from collections import deque
from collections.abc import Callable, Iterator
from queue import Empty, SimpleQueue

from polebook.plan.spread.block import Piece, Stopped
from polebook.plan.spread.helper import THERE, Answers, Bench, Helper, Setting, Task

LONG = 120_000  # builds times segments from which a helper, which takes 0.3 s to start, is worth it
AHEAD = 2  # tasks that a helper has at a time
WAIT_S = 0.05  # between two looks at `stop`


def cores() -> int:
    """How many cores this process may use."""
    return len(os.sched_getaffinity(0)) if hasattr(os, "sched_getaffinity") else os.cpu_count() or 1


def block_size(builds: int, most: int, workers: int) -> int:
    """Builds a block: none above `most`, and as many blocks for each worker."""
    blocks = -(-builds // most)
    blocks = -(-blocks // workers) * workers
    return -(-builds // blocks)


class Crew:
    """Helpers of this process. One that is kept from spread to spread has them at hand; to be closed."""

    def __init__(self) -> None:
        self.answers: Answers = SimpleQueue()
        self.helpers: list[Helper] = []
        self.runs = 0

    def grow(self, count: int) -> None:
        """Has `count` helpers, as far as there is room for them."""
        while len(self.helpers) < count and sys.executable:
            try:
                self.helpers.append(Helper(self.answers))
            except OSError:
                return

    def lose(self, helper: Helper) -> None:
        """Takes leave of one that has gone."""
        helper.end()
        self.helpers.remove(helper)

    def close(self) -> None:
        """Ends them all."""
        while self.helpers:
            self.helpers.pop().end()

    def __enter__(self) -> Crew:
        return self

    def __exit__(self, *_: object) -> None:
        self.close()


class Workers:
    """This process and `count` helpers of a crew, at one setting. Raises ProblemsFound for a chain without ledger."""

    def __init__(self, setting: Setting, crew: Crew, count: int) -> None:
        self._crew = crew
        self._todo: deque[Task] = deque()
        self._ready: dict[int, Piece] = {}
        crew.runs += 1
        crew.grow(count)
        self._given = setting.message() if count else None
        self._mine = crew.helpers[:count] if self._given else []
        for helper in self._mine:
            helper.tasks.clear()
            self._set(helper)
        self.bench = Bench(setting)  # while the helpers set up theirs
        self._names = {figure.name for figure in self.bench.figures}

    def pieces(self, tighter: tuple[str, float] | None, builds: int, stop: Callable[[], bool]) -> Iterator[Piece]:
        """Blocks from build 0 on until `builds` are there, in order; ends early once `stop` says so.

        tighter  as in `Task`
        """
        size = self.bench.setting.size
        starts = range(0, builds, size)
        self._todo = deque(Task(self._crew.runs, first, min(size, builds - first), tighter) for first in starts)
        self._ready = {}
        for first in starts:
            while first not in self._ready:
                if stop():
                    return
                self._hear(wait=not self._todo)
                if first not in self._ready and self._todo:
                    task = self._todo.popleft()
                    try:
                        self._ready[task.first] = self.bench.do(task, stop)
                    except Stopped:
                        return
            yield self._ready.pop(first)

    def _hear(self, wait: bool) -> None:
        """Takes what the helpers have answered and gives them more to do; with `wait` there is nothing else to do."""
        self._hand_out()
        while True:
            try:
                heard = self._crew.answers.get(timeout=WAIT_S) if wait else self._crew.answers.get_nowait()
            except Empty:
                return
            wait = False
            helper, what, task, piece = heard
            if what == THERE:
                helper.there = True
                if helper in self._mine:
                    self._set(helper)
            elif task is None or piece is None or (task in helper.tasks and piece.columns.keys() != self._names):
                self._lose(helper)
            elif task in helper.tasks:  # else it is of a spread called off
                helper.tasks.remove(task)
                self._ready[task.first] = piece
            self._hand_out()

    def _set(self, helper: Helper) -> None:
        if helper.there and self._given is not None:
            helper.give(self._given)

    def _lose(self, helper: Helper) -> None:
        """What it had to do is done by others; of one that has gone, or answers what it was not asked."""
        self._todo.extendleft(reversed(helper.tasks))
        helper.tasks.clear()
        self._mine = [one for one in self._mine if one is not helper]
        if helper in self._crew.helpers:  # else it says that it has gone after it was let go
            self._crew.lose(helper)

    def _hand_out(self) -> None:
        for helper in self._mine:
            while helper.there and self._todo and len(helper.tasks) < AHEAD:
                helper.do(self._todo.popleft())
