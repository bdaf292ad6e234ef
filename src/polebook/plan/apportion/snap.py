"""From the best sizes to such as can be bought: a search among the neighbours of every part that moved.

The slopes at hand tell what each neighbour, and each pair of them, would be worth; the likeliest are tried in full,
and the first that is better is taken, until none is. Parts that did not move stay as the file has them.
"""

from __future__ import annotations

from collections.abc import Generator

import numpy as np

from polebook.plan.apportion.descend import Reached, slopes_at
from polebook.plan.apportion.dive import dive
from polebook.plan.apportion.handles import STILL, Handle
from polebook.plan.apportion.merit import MISSED, ONE_MORE, Merit, shortfall
from polebook.plan.apportion.starts import SEED
from polebook.plan.apportion.task import Array, Task, Trial, trial

TURNS = 40  # moves at the most
SHAKES = 200  # the same at random
TRIED, TRIED_AT_LAST = 6, 15  # neighbours that are tried in full at each turn; where targets can't all be met
BETTER = 1e-6  # merit
LOST = 0.05  # neper of the favoured margin that the nearest values may cost before more is done to find better ones
SMALL = 0.5  # a part that may be absent is tried without where it is to be less than this of what it is today


def snap(task: Task, of: Merit, reached: Reached) -> Generator[Trial, None, Trial]:
    """The best plan of preferred values near `reached`; yields the best so far at every turn."""
    here = trial(task, *nearest(task, reached.trial))
    yield here
    found = []
    if here.lives:
        found.append((yield from _settled(task, of, here)))
    if not found or _lost(task, of, reached, found[0]):
        dived = yield from dive(task, of, reached)
        if dived.lives:
            found.append((yield from _settled(task, of, dived)))
    best = min(found, key=of.settled, default=here)
    return (yield from _shaken(task, of, best)) if of.hair and best.lives else best


def _shaken(task: Task, of: Merit, here: Trial) -> Generator[Trial, None, Trial]:
    """The best of what two to four parts at once, stepped at random, lead to: where bends mislead the slopes."""
    random = np.random.default_rng(SEED)
    moved = [k for k, handle in enumerate(task.handles) if here.values[k] not in (handle.now, 0.0)]
    worth = of.settled(here)
    for _ in range(SHAKES if len(moved) > 1 else 0):
        x, values = here.x.copy(), list(here.values)
        for k in random.choice(moved, min(int(random.integers(2, 5)), len(moved)), replace=False).tolist():
            if near := _neighbours(task.handles[k], values[k]):
                values[k] = near[int(random.integers(len(near)))]
                x[k] = np.log(abs(values[k]))
        there = trial(task, x, values)
        yield here
        if there.lives and of.settled(there) < worth - BETTER:
            here, worth = there, of.settled(there)
    return here


def _lost(task: Task, of: Merit, reached: Reached, snapped: Trial) -> bool:
    """Whether rounding has cost a target that was met, some more of one that is not, or of the favoured margin."""
    short = shortfall(task, snapped) - shortfall(task, reached.trial)
    return short > MISSED or (bool(of.favour) and of.settled(snapped) > reached.worth + LOST)


def _settled(task: Task, of: Merit, here: Trial) -> Generator[Trial, None, Trial]:
    """The best that neighbours and taking parts out lead to."""
    here = yield from _without(task, of, here)
    here = yield from _searched(task, of, here)
    without = yield from _without(task, of, here)
    return without if without is here else (yield from _searched(task, of, without))


def _searched(task: Task, of: Merit, here: Trial) -> Generator[Trial, None, Trial]:
    """The best plan that moves of one part or two lead to from `here`."""
    moved = [k for k, handle in enumerate(task.handles) if here.values[k] not in (handle.now, 0.0)]
    worth = of.settled(here)
    slope = yield from slopes_at(task, here)
    for _ in range(TURNS):
        better = None
        for x, values in _likeliest(task, of, here, slope.by, moved):
            there = trial(task, x, values)
            yield here
            if there.lives and of.settled(there) < worth - BETTER:
                better = there
                break
        if better is None:
            break
        here, worth = better, of.settled(better)
        slope = yield from slopes_at(task, here, slope)
    return here


def nearest(task: Task, at: Trial) -> tuple[Array, list[float]]:
    """(ln of the sizes, values) of the preferred values nearest to a trial's."""
    values = [handle.now if abs(x - start) < STILL else float(np.copysign(_within(handle, np.exp(x)), handle.now))
              for handle, x, start in zip(task.handles, at.x.tolist(), task.start.tolist(), strict=True)]
    return np.log(np.abs(values)), values


def _within(handle: Handle, size: float) -> float:
    """The preferred size nearest to `size` that keeps to the bounds."""
    found = handle.nearest(size)
    if found > handle.high:
        found = handle.down(found)
    return handle.up(found) if found < handle.low else found


def _likeliest(task: Task, of: Merit, here: Trial, slope: Array, moved: list[int]) -> list[tuple[Array, list[float]]]:
    """The moves of one part or two that the slopes promise most of, best first; none where they promise nothing."""
    moves = [(k, value) for k in moved for value in _neighbours(task.handles[k], here.values[k])]
    if not moves:
        return []
    parts = np.array([k for k, _ in moves])
    x = np.log(np.abs([value for _, value in moves]))
    rows = (x - here.x[parts])[:, None] * slope[:, parts].T
    costs = of.of_part(x, parts) - of.of_part(here.x[parts], parts)
    first, second = np.triu_indices(len(moves), 1)
    apart = parts[first] != parts[second]
    first, second = first[apart], second[apart]
    promised = np.concatenate([of.of_rows(here.rows + rows) + costs,
                               of.of_rows(here.rows + rows[first] + rows[second]) + costs[first] + costs[second]])
    now = float(of.of_rows(here.rows)) + ONE_MORE * of.missed(here.rows)
    found = []
    for number in np.argsort(promised, kind="stable")[:TRIED_AT_LAST if of.hair else TRIED].tolist():
        if promised[number] >= now - BETTER:
            break
        pair = number - len(moves)
        chosen = [moves[number]] if pair < 0 else [moves[int(first[pair])], moves[int(second[pair])]]
        there, values = here.x.copy(), list(here.values)
        for k, value in chosen:
            there[k], values[k] = np.log(abs(value)), value
        found.append((there, values))
    return found


def _neighbours(handle: Handle, value: float) -> list[float]:
    """The next values up and down that keep to the bounds, and today's."""
    size, today = abs(value), abs(handle.now)
    near = {handle.up(size), handle.down(size), today} - {size}
    return [float(np.copysign(one, handle.now)) for one in sorted(near) if handle.low <= one <= handle.high]


def _without(task: Task, of: Merit, here: Trial) -> Generator[Trial, None, Trial]:
    """The plan without those parts that it makes small, where nothing is the worse for it."""
    for k, handle in enumerate(task.handles):
        if not handle.optional or abs(here.values[k]) >= SMALL * abs(handle.now):
            continue
        values = [0.0 if at == k else value for at, value in enumerate(here.values)]
        there = trial(task, here.x, values)
        yield here
        if there.lives and shortfall(task, there) <= shortfall(task, here) \
                and of.of_rows(there.rows) <= of.of_rows(here.rows) + BETTER:
            here = there
    return here
