"""A second process that computes blocks of builds, and the end of the line in the first one.

Threads will not do: the operations on arrays are so short that two threads wait for each other most of the time. A
helper is started as a program of its own, not as a copy of this one, so that it does not matter what threads,
terminal or main module there are here. It reads what it is to do from its standard input and ends with that.
"""

from __future__ import annotations

import signal
import sys
from collections.abc import Callable
from dataclasses import dataclass
from queue import SimpleQueue
from typing import Any, TypeAlias

import numpy as np

from polebook.chain.model import Chain
from polebook.plan import wire
from polebook.plan.passed import passed, taken
from polebook.plan.process import Process
from polebook.plan.spread.block import Engine, Piece
from polebook.plan.spread.draws import Drawn, drawn
from polebook.plan.spread.figures import Figure, figures
from polebook.plan.spread.nominal import Nominal, nominal
from polebook.plan.spread.states import WORDS
from polebook.plan.wire import (
    Garbled,
    Message,
    by_name,
    made,
    many,
    maybe,
    number,
    of_names,
    plain,
    several,
    whole,
    word,
)

PROGRAM = "from polebook.plan.spread.helper import serve; serve()"
THERE, SETTING, TASK, DONE, GONE = "there", "setting", "task", "done", "gone"
_STATE = "state"  # the column that is no figure


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

    def message(self) -> Message | None:
        """For a helper; None where its chain can't be passed on."""
        chain = passed(self.chain)
        if chain is None:
            return None
        return Message(SETTING, {"chain": chain, "temperature": plain(self.temperature), "names": plain(self.names),
                                 "seed": self.seed, "size": self.size})


_TASK = made(Task, run=whole, first=whole, count=whole, tighter=maybe(several(word, number)))
_SETTING = made(Setting, chain=taken, temperature=maybe(several(number, number)), names=many(word), seed=whole,
                size=whole)
_ANSWER = of_names(task=_TASK, outside=by_name(whole), alone=whole)


def setting_of(said: Message) -> Setting:
    """What a helper is to set up. Raises Garbled, ProblemsFound."""
    setting = _SETTING(said.body)
    if not 1 <= setting.size <= wire.MOST_NUMBERS:
        raise Garbled(f"blocks of {setting.size} builds are asked for")
    return setting


def answer(task: Task, piece: Piece) -> Message:
    """A helper's answer."""
    return Message(DONE, {"task": plain(task), "outside": plain(piece.outside), "alone": piece.alone},
                   {**piece.columns, _STATE: piece.state})


def answered(said: Message) -> tuple[Task, Piece]:
    """What a helper's answer says. Raises Garbled."""
    task, outside, alone = _ANSWER(said.body)
    columns: dict[str, Any] = dict(said.columns)
    state = columns.pop(_STATE, None)
    if said.kind != DONE or state is None or state.dtype != np.int8 or not np.isin(state, list(WORDS)).all():
        raise Garbled("builds without their states came")
    if any(column.dtype != np.float64 for column in columns.values()) or \
            {column.size for column in (state, *columns.values())} != {task.count}:
        raise Garbled(f"other columns than of {task.count} builds came")
    return task, Piece(task.first, columns, state, outside, alone)


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
    wire.write(target, Message(THERE))
    while (given := wire.read(source)) is not None:
        if given.kind == SETTING:
            bench = Bench(setting_of(given))
        elif bench is not None:
            task = _TASK(given.body)
            wire.write(target, answer(task, bench.do(task)))


class Helper(Process):
    """A helper process. `answers` takes (helper, what, task, piece): it is "there", a task is "done", it has "gone"."""

    def __init__(self, answers: Answers) -> None:
        self.there = False
        self.tasks: list[Task] = []
        self._answers = answers
        super().__init__(PROGRAM)

    def do(self, task: Task) -> None:
        """Hands over a task of the setting that was given last."""
        self.tasks.append(task)
        self.give(Message(TASK, plain(task)))

    def heard(self, what: Message) -> None:
        """It is there, or a task is done."""
        self._answers.put((self, THERE, None, None) if what.kind == THERE else (self, DONE, *answered(what)))

    def gone(self, why: str) -> None:
        """Why does not matter: what it had to do is done here, or by the others."""
        self._answers.put((self, GONE, None, None))


Answers: TypeAlias = "SimpleQueue[tuple[Helper, str, Task | None, Piece | None]]"
