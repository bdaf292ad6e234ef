"""Where targets can't all be met: which gives, by how much it would have to, and what holds the plan back."""

from __future__ import annotations

from collections.abc import Generator, Iterator
from dataclasses import dataclass

import numpy as np

from polebook.book.ledger import Ledger
from polebook.plan.apportion.descend import descend, slopes_at
from polebook.plan.apportion.merit import MISSED, merit
from polebook.plan.apportion.task import Array, Task, Trial
from polebook.plan.proposal import Proposal

ROUNDS = 20
TIGHT = 0.05  # neper from its limit up to which a target may be what keeps others from being met
AT_BOUND = 0.06  # neper from its bound within which a part is held by it: preferred values stop short of it
MATTERS = 0.02  # neper that a target moves where the part moves by one
MOST = 4  # levers that are told
_FIGURES = {"gain": "gain", "lower": "lower_edge", "upper": "upper_edge", "noise": "noise"}


@dataclass(frozen=True, slots=True)
class Gives:
    """With every other target met, `target` comes to `got`, in its own unit, and no further."""

    target: str
    want: float
    got: float


@dataclass(frozen=True, slots=True)
class Held:
    """A part that would help `target` beyond its bound: 1 % more of it (less, where it is at the lower one) moves the
    target by `leverage` per cent to the better."""

    path: str
    value: float
    upper: bool
    target: str
    leverage: float


@dataclass(frozen=True, slots=True)
class Lever:
    """A key that was not free: 1 % more of it moves `target` by `leverage` per cent (less than 0: down)."""

    path: str
    target: str
    leverage: float


def gives(task: Task, at: Trial, snapped: Trial) -> Generator[Trial, None, tuple[Gives, ...]]:
    """Each target that alone would have to give for the others to be met, the one that gives least first.

    A target that is far from its limit at `at`, the nearest plan, takes nothing from the others and is not asked.
    """
    found: list[tuple[float, Gives]] = []
    for goal in task.goals:
        rows = task.numbers(goal.name)
        if not goal.judged or at.rows[rows].min() > TIGHT:
            continue
        reached = yield from descend(task, merit(task, gives=goal.name), at, ROUNDS)
        plans = [one for one in (reached.trial, snapped) if _meets_others(task, one, goal.name)]
        short, best = min(((_short(one, rows), one) for one in plans), key=lambda pair: pair[0], default=(0.0, None))
        got = best.targets[goal.name].got if best is not None else None
        if got is not None and short > MISSED:
            found.append((short, Gives(goal.name, goal.want, got)))
    return tuple(one for _, one in sorted(found, key=lambda pair: pair[0]))


def _meets_others(task: Task, plan: Trial, name: str) -> bool:
    return all(plan.rows[k] >= -MISSED for k, row in enumerate(task.rows)
               if row.judged and row.goal and row.goal != name)


def _short(plan: Trial, rows: list[int]) -> float:
    return float(np.maximum(-plan.rows[rows], 0.0).sum())


def held(task: Task, at: Trial) -> Generator[Trial, None, tuple[Held, ...]]:
    """The parts at a bound that would help a missed target beyond it, those that help most first."""
    slope = (yield from slopes_at(task, at)).by
    low, high = task.bounds
    found = []
    for k, handle in enumerate(task.handles):
        for upper, bound in ((False, low[k]), (True, high[k])):
            if abs(at.x[k] - bound) > AT_BOUND:
                continue
            for name, gain in _helped(task, at, slope[:, k] if upper else -slope[:, k]):
                found.append(Held(handle.path, at.values[k], upper, name, gain))
    return tuple(sorted(found, key=lambda one: -one.leverage)[:MOST])


def _helped(task: Task, at: Trial, slope: Array) -> list[tuple[str, float]]:
    """The missed targets that a slope makes better, and by how much."""
    return [(row.goal, float(slope[k])) for k, row in enumerate(task.rows)
            if row.goal and row.judged and at.rows[k] < -MISSED and slope[k] > MATTERS]


def levers(task: Task, proposal: Proposal) -> tuple[Lever, ...]:
    """The keys that were not free and would move a missed target most."""
    may = {handle.path for handle in task.handles}
    found = []
    for target in proposal.targets:
        figure = _FIGURES.get(target.name)
        if figure is None or target.after.met is not False:
            continue
        known = [(path, by) for path, row in _rows(proposal.after) if path not in may and (by := row[figure])]
        known.sort(key=lambda one: -abs(one[1]))
        found += [Lever(path, target.name, by) for path, by in known[:MOST]]
    return tuple(found)


def _rows(of: Ledger) -> Iterator[tuple[str, dict[str, float | None]]]:
    lever = of.leverage
    for (owner, name), row in lever.parts.items():
        yield f"{owner}.{name}", row
    for (owner, name), (_, row) in lever.currents.items():
        yield f"{owner}.{name}", row
    for (card, key), (_, row) in lever.cards.items():
        yield f"device.{card}.{key}", row
