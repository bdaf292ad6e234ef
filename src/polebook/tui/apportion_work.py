"""The work behind the apportion page, in plain values: a run told piece by piece, here or in a process of its own."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping
from dataclasses import replace
from os.path import basename
from queue import SimpleQueue
from time import perf_counter
from typing import IO, Any

from polebook.plan.apportion import Best, Request, Result, apportion
from polebook.plan.wire import Message
from polebook.problem import ProblemsFound
from polebook.text.edit import Edit, Splice
from polebook.tui.apportion_passed import STOP
from polebook.tui.apportion_passed import asked as asked_of
from polebook.tui.apportions import Asked, Reached, Run
from polebook.tui.spread_work import attend, tell

Step = tuple[int, int, Any]
OFTEN_S = 0.1  # the best so far is told anew after so long


def steps(asked: Mapping[str, Any], stop: Callable[[], bool] = lambda: False) -> Iterator[Step]:
    """(done, total, piece) of what is asked, as `question` has it: text, names and numbers alone.

    A piece is the targets of the best plan so far, None where they were told a moment ago; the last one is the plan,
    or the problems with what is asked.
    """
    request = Request(asked["text"], asked["file"], tuple(asked["free"]), asked["favour"], asked["seed"])
    work, next_s = apportion(request, stop), 0.0
    while True:
        try:
            done, total, best = next(work)
        except StopIteration as end:
            yield 1, 1, _plan(request, end.value)
            return
        except ProblemsFound as found:
            yield 1, 1, {"problems": [[one.what, one.why, one.fix] for one in found.problems]}
            return
        now = perf_counter()
        yield done, total, _reached(best) if now >= next_s else None
        if now >= next_s:
            next_s = now + OFTEN_S


def question(asked: Asked, text: str, file: str) -> dict[str, Any]:
    """What a run is asked, as `steps` takes it."""
    return {"text": text, "file": file, "free": list(asked.free), "favour": asked.favour, "seed": asked.seed}


def _reached(best: Best) -> dict[str, Any]:
    return {"reached": [[one.name, one.got, one.met] for one in best.targets.values()]}


def _plan(request: Request, result: Result) -> dict[str, Any]:
    edit = result.proposal.edit
    return {"told": {"file": basename(request.file), **result.document(), "written": False},
            "label": edit.label, "splices": [[one.start, one.removed, one.inserted] for one in edit.splices]}


def reached_of(piece: Mapping[str, Any]) -> tuple[Reached, ...]:
    """The targets of the best plan so far, from a piece."""
    return tuple(Reached(*one) for one in piece["reached"])


def run_of(piece: Mapping[str, Any], asked: Asked, text: str) -> Run:
    """The plan, from the last piece, of what was asked about a text."""
    edit = replace(Edit.of(Splice(*one) for one in piece["splices"]), label=piece["label"])
    return Run(asked, text, edit.apply(text), edit, piece["told"])


def serve() -> None:
    """Plans, as they are asked for."""
    attend(_answer)


def _answer(target: IO[bytes], asked: SimpleQueue[Message]) -> None:
    what = asked.get()
    if what.kind != STOP:  # else it came when all was done
        tell(target, _asked(what, asked))


def _asked(what: Message, more: SimpleQueue[Message]) -> Iterator[Step]:
    yield from steps(asked_of(what), stop=lambda: not more.empty())
