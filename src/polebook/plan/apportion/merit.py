"""What a plan is worth: shortfalls first, ease next, then the favoured margin, and few and small moves.

All in neper of the figures; a move is in neper of the part's size.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from polebook.plan.apportion.goals import FAR
from polebook.plan.apportion.task import CLIP, Array, Task, Trial

if TYPE_CHECKING:
    from numpy.typing import NDArray

SHORT = 100.0  # of a neper that a row is below 0
GUARD = 1000.0  # the same of a guard: no target is worth a device out of its region
CLIPPED, CLIPPED_AT_LAST = 10.0, 0.3  # the same where the largest signal clips: less than any target, for it is none
ONE_MORE = 5.0  # of a row that is below 0 at all, of a plan that is to be built: as much as another 5 % worse
EASE = 5.0  # of a neper that a row lacks of its ease
FAVOUR = 1.0  # of a neper of the favoured margin
MOVE = 0.05  # of a neper that a part moves, where nothing is favoured
MOVE_FOR_FAVOUR = 0.015  # the same where a figure is: a part doubled has to bring it 1 %
MOVE_AT_LAST = 0.05  # the same where targets can't all be met
MOVED = 0.2  # of MOVE, for every part that moves at all
A_HAIR = 0.003  # neper above 0 that a row is asked for where targets can't all be met
MISSED = 1e-12  # neper of shortfall that is rounding
NEARLY = 1e-3  # neper of shortfall that a plan may have before it is snapped, and still be one that meets all


@dataclass(frozen=True, slots=True)
class Merit:
    """The weights of a task's rows and moves.

    short, ease   of a neper below 0, and of one short of its ease, by row
    eases         how far above 0 each row should be
    favour        rows whose least is to grow
    hair          above 0 that counts as short all the same: so steps that end near by still meet what can be met
    """

    start: Array
    shy: Array
    short: Array
    ease: Array
    eases: Array
    favour: tuple[int, ...]
    move: float
    hair: float = 0.0

    def worth(self, rows: Array, x: Array) -> float:
        """The less, the better."""
        return float(self.of_rows(rows) + self.move * (self.shy @ np.abs(x - self.start)))

    def of_rows(self, rows: Array) -> Array:
        """(...) the part that rows (..., r) make."""
        below, lacking = np.maximum(self.hair - rows, 0.0), np.maximum(self.eases - rows, 0.0)
        total: Array = below @ self.short + lacking @ self.ease
        if self.favour:
            total = total - FAVOUR * rows[..., list(self.favour)].min(axis=-1)
        return total

    def settled(self, at: Trial) -> float:
        """The worth of a plan that is to be built: its rows, what misses at all, its moves, and what moves at all."""
        return float(self.of_rows(at.rows) + self.of_moves(at.x)) + ONE_MORE * self.missed(at.rows)

    def missed(self, rows: Array) -> int:
        """How many rows that count in full are below 0."""
        return int(np.count_nonzero((rows < -MISSED) & (self.short >= SHORT)))

    def of_moves(self, x: Array) -> float:
        """The part that the sizes make, and what every part that moves costs beside its way."""
        return float(self.of_part(x, np.arange(x.size)).sum())

    def of_part(self, x: Array, parts: NDArray[np.int_]) -> Array:
        """(m,) the same of single parts, by their numbers, at x."""
        way = np.abs(x - self.start[parts])
        total: Array = self.move * self.shy[parts] * (way + MOVED * (way > 1e-9))
        return total


def merit(task: Task, gives: str = "", much: float = 1.0) -> Merit:
    """The merit of the task's plans.

    gives  a goal that may be missed if the others are met, at a hundredth of their weight
    much   by how much more than each row asks for its ease is kept; 0: hardly any, for shortfalls alone count
    """
    last = bool(gives) or not much
    clipped = CLIPPED_AT_LAST if last else CLIPPED
    weights = (clipped if row.what == CLIP else SHORT if row.goal else GUARD for row in task.rows)
    short = np.array([weight * row.judged for weight, row in zip(weights, task.rows, strict=True)], dtype=float)
    ease = np.array([EASE * row.judged for row in task.rows], dtype=float)
    ease *= not last
    wanted = np.array([row.ease * much if np.isfinite(row.ease) else -FAR for row in task.rows], dtype=float)
    for k, row in enumerate(task.rows):
        if gives and row.goal == gives:
            short[k] = 0.01 * SHORT
    favour = tuple(k for k, row in enumerate(task.rows)
                   if row.goal == task.favour and task.favour and not last)
    move = MOVE_FOR_FAVOUR if favour else MOVE_AT_LAST if last else MOVE
    return Merit(task.start, task.shy, short, ease, wanted, favour, move, A_HAIR if last else 0.0)


def shortfall(task: Task, of: Trial) -> float:
    """Neper by which the targets and guards are missed, all together; infinite where the chain has no figures."""
    if not of.lives:
        return float("inf")
    judged = np.array([row.judged and row.what != CLIP for row in task.rows], dtype=bool)
    below = np.maximum(-of.rows[judged], 0.0)
    return float(below[below > MISSED].sum())
