"""A second process that computes blocks of builds, and the end of the line in the first one.

Threads will not do: the operations on arrays are so short that two threads wait for each other most of the time. A
helper is started as a program of its own, not as a copy of this one, so that it does not matter what threads,
terminal or main module there are here. It reads what it is to do from its standard input and ends with that.
"""

from __future__ import annotations

import pickle
import signal
import sys
from collections.abc import Callable
from dataclasses import dataclass, replace
from queue import SimpleQueue
from typing import Any, TypeAlias

from polebook.chain.model import Chain
from polebook.plan.process import Process, portable, send
from polebook.plan.spread.block import Engine, Piece
from polebook.plan.spread.draws import Drawn, drawn
from polebook.plan.spread.figures import Figure, figures
from polebook.plan.spread.nominal import Nominal, nominal

PROGRAM = "from polebook.plan.spread.helper import serve; serve()"


@dataclass(frozen=True, slots=True)
class Task:
    """`count` builds from `first` on in the spread number `run`; `tighter` is a draw whose reach is multiplied."""

    run: int
    first: int
    count: int
    tighter: tuple[str, float] | None = None


@dataclass(frozen=True, slots=True)
class Setting:
    """What all tasks of a spread share."""

    chain: Chain
    temperature: tuple[float, float] | None
    names: tuple[str, ...]
    seed: int
    size: int

    def portable(self) -> Setting:
        """The same with plain dicts, which can be sent."""
        return replace(self, chain=portable(self.chain))


class Bench:
    """Where tasks of one setting are done. Raises ProblemsFound where the chain has no ledger."""

    def __init__(self, setting: Setting) -> None:
        self.setting = setting
        self.figures: tuple[Figure, ...] = figures(setting.chain, setting.names)
        self.nominal: Nominal = nominal(drawn(setting.chain, setting.temperature))
        self.drawn: Drawn = self.nominal.drawn
        self.engine = Engine(self.nominal, setting.size)

    def do(self, task: Task, stop: Callable[[], bool] = lambda: False) -> Piece:
        """The builds of a task. Raises Stopped."""
        draws = self.drawn if task.tighter is None else self.drawn.tighter(*task.tighter)
        return self.engine.run(draws, self.setting.seed, task.first, task.count, self.figures, stop)


def serve() -> None:
    """Says that it is there, then takes settings and tasks from standard input, and answers each task."""
    signal.signal(signal.SIGINT, signal.SIG_IGN)  # ctrl-c is for the one who asked
    source, target = sys.stdin.buffer, sys.stdout.buffer
    sys.stdout = sys.stderr
    bench: Bench | None = None
    send(target, "there")
    while True:
        try:
            given = pickle.load(source)
        except EOFError:
            return
        if isinstance(given, Setting):
            bench = Bench(given)
        elif bench is not None:
            send(target, (given, bench.do(given)))


class Helper(Process):
    """A helper process. `answers` takes (helper, what, task, piece): it is "there", a task is "done", it has "gone"."""

    def __init__(self, answers: Answers) -> None:
        self.there = False
        self.tasks: list[Task] = []
        self._answers = answers
        super().__init__(PROGRAM)

    def set(self, setting: Setting) -> None:
        """What the tasks from now on are of."""
        self.give(setting.portable())

    def do(self, task: Task) -> None:
        """Hands over a task."""
        self.tasks.append(task)
        self.give(task)

    def heard(self, what: Any) -> None:
        """It is there, or a task is done."""
        self._answers.put((self, what, None, None) if isinstance(what, str) else (self, "done", *what))

    def gone(self) -> None:
        self._answers.put((self, "gone", None, None))


Answers: TypeAlias = "SimpleQueue[tuple[Helper, str, Task | None, Piece | None]]"
