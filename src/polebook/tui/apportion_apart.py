"""Plans sought in a process of their own: whatever they compute, no key waits for it."""

from __future__ import annotations

from collections.abc import Iterator
from threading import Event

from polebook.plan.wire import Message
from polebook.problem import Problem, ProblemsFound
from polebook.tui.apportion_passed import STOP, piece
from polebook.tui.apportion_work import Step, question, steps
from polebook.tui.apportions import Asked
from polebook.tui.spread_apart import Apart, answered

PROGRAM = "from polebook.tui.apportion_work import serve; serve()"

_idle: list[Apart] = []  # one at the most, as of spreads


def sought(asked: Asked, text: str, file: str, halt: Event) -> Iterator[Step]:
    """As `apportion_work.steps`, each step in some milliseconds; (done, total, None) also where nothing has come.

    Once `halt` is set it comes to its end with what there is. Raises ProblemsFound where what is asked is at fault.
    """
    what = question(asked, text, file)
    _idle[:] = [worker for worker in _idle if worker.there]
    try:
        worker = _idle.pop() if _idle else Apart(PROGRAM, piece)
    except OSError:
        work = steps(what, halt.is_set)
    else:
        work = answered(worker, _idle, lambda: worker.give(Message("run", what)), _Passed(worker, halt).on)
    problems: list[Problem] = []
    for done, total, came in work:
        if came is not None and "problems" in came:  # the last piece: once it has ended the process is free again
            problems = [Problem(None, *one) for one in came["problems"]]
        else:
            yield done, total, came
    if problems:
        raise ProblemsFound(problems)


class _Passed:
    """Says once to a process that it is to stop."""

    def __init__(self, worker: Apart, halt: Event) -> None:
        self._worker, self._halt, self._said = worker, halt, False

    def on(self) -> None:
        if self._halt.is_set() and not self._said:
            self._said = True
            self._worker.give(Message(STOP))
