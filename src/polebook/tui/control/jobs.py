"""Work in the background, a piece at a time between the keys: begun, carried on, stopped.

The shell gives it the time that keys and painting leave (`advance`). A job belongs to no text: what it was begun with
it goes on with, and whoever takes its pieces says whether they still hold.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

from polebook.problem import ProblemsFound
from polebook.tui.control.base import at, reason
from polebook.tui.view import Job, State


def begin(state: State, job: Job) -> State:
    """The state with that job; one that was running is stopped."""
    return replace(stopped(state), job=job)


def advance(state: State, enough: Callable[[], bool]) -> State:
    """The state after pieces of its job, one at least, until `enough`; without the job where it has ended.

    None for a piece says that there is none yet, of work done elsewhere: then it is enough.
    A piece with a fault ends it: the fault is told, and what was done before it stays.
    """
    while (job := state.job) is not None:
        try:
            done, total, piece = next(job.work)
        except StopIteration:
            return _ended(state, job, whole=True)
        except ProblemsFound as found:
            return at(_ended(state, job, whole=False), message=f"{job.name}: {reason(found)}", bad=True)
        state = job.takes.piece(replace(state, job=replace(job, done=done, total=total)), piece)
        if piece is None or enough():
            break
    return state


def stopped(state: State) -> State:
    """The state with its job given up; what has been done so far stays."""
    return state if state.job is None else _ended(state, state.job, whole=False)


def halted(state: State) -> State:
    """The state with its job asked to come to its end, where that can be; else, and when asked again, given up."""
    job = state.job
    if job is None or job.halt is None or job.halting:
        return stopped(state)
    job.halt()
    return replace(state, job=replace(job, halting=True))


def watched(state: State) -> Job | None:
    """The job whose page is in sight: the one that Esc stops."""
    return state.job if state.job is not None and state.job.page == state.view.page else None


def _ended(state: State, job: Job, whole: bool) -> State:
    return job.takes.ended(replace(state, job=None), whole)
