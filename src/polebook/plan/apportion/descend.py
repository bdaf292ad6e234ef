"""From one start to the best plan near it, step by step within a box that grows and shrinks with what steps keep."""

from __future__ import annotations

from collections.abc import Generator
from dataclasses import dataclass

import numpy as np

from polebook.plan.apportion.merit import Merit
from polebook.plan.apportion.slopes import Slopes, slopes
from polebook.plan.apportion.step import Bend, Step, step
from polebook.plan.apportion.task import Array, Task, Trial, trial

FIRST_BOX, WIDEST, NARROWEST = 0.7, 1.5, 0.003  # neper
ROUNDS = 30
WORTHWHILE = 1e-4  # merit that a step must promise
BROKEN = 0.3  # of what a row was to move, by which it comes out worse where it is bent
NEAR = 0.7  # neper up to which a bend is heeded
BENDS = 12  # that are kept


@dataclass(frozen=True, slots=True)
class Reached:
    """The best trial, its merit, and the slopes there; None of a search that was cut short."""

    trial: Trial
    worth: float
    slopes: Slopes | None = None


def descend(task: Task, of: Merit, start: Trial, rounds: int = ROUNDS, box: float = FIRST_BOX,
            bounds: tuple[Array, Array] | None = None, old: Slopes | None = None) -> Generator[Trial, None, Reached]:
    """The best plan that steps from `start`, which must have figures, come to; yields the best so far at every turn.

    bounds  ln of the sizes, the task's where they are not narrower;  old  slopes near by
    """
    here, bounds = start, bounds or task.bounds
    worth = of.worth(here.rows, here.x)
    slope = yield from slopes_at(task, here, old)
    bends: list[Bend] = []
    for left in range(rounds - 1, -1, -1):
        asked = step(of, here.rows, slope.by, here.x, bounds, box, bends)
        if asked is None or worth - asked.worth < WORTHWHILE:
            if not bends:
                break
            bends, box = [], 0.35 * box  # they are of no use here: a bend may itself be curved
            continue
        there = trial(task, asked.x)
        yield here
        gained = worth - of.worth(there.rows, there.x) if there.lives else -np.inf
        kept = gained / (worth - asked.worth)
        if kept > 0.05:
            here, worth = there, worth - gained
            slope = yield from slopes_at(task, here, slope)
            bends = [bend for bend in bends if np.abs(bend.x - here.x).max() < NEAR]
            if kept > 0.7:
                box = min(box * 1.8, WIDEST)
            elif kept < 0.3:
                box *= 0.5
        elif not left:
            break
        elif slope.age:
            slope = yield from slopes_at(task, here)
        else:
            found = (yield from _bent(task, of, asked, here, there, slope)) if there.lives else []
            bends = [*bends, *found][-BENDS:]
            box = (0.6 if found else 0.35) * min(box, float(np.abs(asked.x - here.x).max()))
        if box < NARROWEST:
            break
    return Reached(here, worth, slope)


def _bent(task: Task, of: Merit, asked: Step, here: Trial, there: Trial,
          slope: Slopes) -> Generator[Trial, None, list[Bend]]:
    """What the rows do that came out worse than their slopes promised, seen from where the step led."""
    counts = (of.short > 0.0) | (of.ease > 0.0)
    worse = asked.rows - there.rows > BROKEN * np.abs(asked.rows - here.rows) + 1e-3
    rows = np.nonzero(worse & counts & (there.rows < of.eases + 1e-3))[0].tolist()
    if not rows:
        return []
    beyond = yield from slopes_at(task, there, slope)
    return [Bend(row, float(there.rows[row]), beyond.by[row], there.x) for row in rows]


def slopes_at(task: Task, here: Trial, old: Slopes | None = None) -> Generator[Trial, None, Slopes]:
    """The slopes at a trial; yields it between the pieces of the work."""
    work = slopes(task, here, old)
    while True:
        try:
            next(work)
        except StopIteration as done:
            result: Slopes = done.value
            return result
        yield here
