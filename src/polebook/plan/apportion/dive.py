"""Snapping one part after the other, the others still free to make up for what its rounding costs."""

from __future__ import annotations

from collections.abc import Generator

import numpy as np

from polebook.plan.apportion.descend import Reached, descend, slopes_at
from polebook.plan.apportion.handles import STILL, Handle
from polebook.plan.apportion.merit import Merit
from polebook.plan.apportion.step import step
from polebook.plan.apportion.task import Array, Task, Trial, trial

BOX = 1.0  # neper; the neighbours of E3 lie less apart
ROUNDS, ROUNDS_AT_LAST = 1, 3  # steps after each part; where targets can't all be met


def dive(task: Task, of: Merit, reached: Reached) -> Generator[Trial, None, Trial]:
    """The plan of preferred values that snapping the parts in turn comes to, the one that its rounding hurts most
    first. Parts that did not move stay as the file has them."""
    here, start = reached.trial, task.start
    low, high = (bound.copy() for bound in task.bounds)
    moved = [k for k in range(start.size) if abs(here.x[k] - start[k]) >= STILL]
    for k in set(range(start.size)) - set(moved):
        low[k] = high[k] = start[k]
    values = [handle.now for handle in task.handles]
    slope = reached.slopes if reached.slopes is not None else (yield from slopes_at(task, here))
    left = list(moved)
    while left:
        k = max(left, key=lambda one: _hurt(of, task.handles[one], here, slope.by[:, one], one))
        left.remove(k)
        sizes = _around(task.handles[k], float(np.exp(here.x[k])))
        best = np.inf, sizes[0], here.x
        for size in sizes:
            ends = low.copy(), high.copy()
            ends[0][k] = ends[1][k] = np.log(size)
            asked = step(of, here.rows, slope.by, here.x, ends, BOX)
            if asked is not None and asked.worth < best[0]:
                best = asked.worth, size, asked.x
        low[k] = high[k] = np.log(best[1])
        values[k] = float(np.copysign(best[1], task.handles[k].now))
        there = trial(task, best[2])
        yield here
        if there.lives:
            here = there
        here = _at(task, here, k, low[k])
        rounds = ROUNDS_AT_LAST if of.hair else ROUNDS
        best_near = yield from descend(task, of, here, rounds, BOX, (low, high), slope)
        here, slope = best_near.trial, best_near.slopes or slope
    return trial(task, np.log(np.abs(values)), values)


def _at(task: Task, here: Trial, k: int, x: float) -> Trial:
    """The trial with one handle where it was put, where it is not there yet."""
    if here.x[k] == x:
        return here
    moved = here.x.copy()
    moved[k] = x
    there = trial(task, moved)
    return there if there.lives else here


def _around(handle: Handle, size: float) -> list[float]:
    """The sizes that can be bought next to `size` on either side, within the bounds."""
    near = handle.nearest(size)
    both = {near, handle.up(near) if near < size else handle.down(near)}
    kept = [one for one in sorted(both) if handle.low <= one <= handle.high]
    return kept or [near]


def _hurt(of: Merit, handle: Handle, here: Trial, slope: Array, k: int) -> float:
    """What half a step of a part's series may do to the rows that are near their limits."""
    size = float(np.exp(here.x[k]))
    close = here.rows < np.maximum(of.eases, of.hair) + 0.05
    return float(np.log(handle.up(size) / handle.down(size)) * (np.abs(slope) * (of.short + of.ease))[close].sum())
