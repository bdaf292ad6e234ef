"""One step: the linear program of a task's rows and their slopes within a box.

The merit is piecewise linear in the rows and in the moves, so that what a step may gain by the slopes is a linear
program: shortfalls and moves are variables of their own. Sequential linear programming with an exact penalty:
R. Fletcher and E. Sainz de la Maza, Nonlinear programming and nonsmooth optimization by successive linear programming,
Mathematical Programming 43, 1989 (from memory). What a row does past a bend, such as the peaking of a response that is
flat so far, is kept from steps that went too far, as in bundle methods.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from polebook.plan.apportion.merit import FAVOUR, Merit
from polebook.plan.apportion.task import Array

if TYPE_CHECKING:
    from numpy.typing import NDArray


@dataclass(frozen=True, slots=True)
class Bend:
    """What the row `row` does beyond a bend: `value` and slopes `by` at x."""

    row: int
    value: float
    by: Array
    x: Array


@dataclass(frozen=True, slots=True)
class Step:
    """x after the step, the rows that the slopes promise there, and their merit."""

    x: Array
    rows: Array
    worth: float


@dataclass(frozen=True, slots=True)
class _Pieces:
    """Each row as the least of its pieces: the row's number, its value at x and its slopes."""

    rows: NDArray[np.intp]
    values: Array
    slopes: Array


def step(of: Merit, rows: Array, slopes: Array, x: Array, bounds: tuple[Array, Array], box: float,
         bends: Sequence[Bend] = ()) -> Step | None:
    """The best step within `box` neper of x and within the bounds; None where the program has no answer."""
    from scipy.optimize import linprog  # deferred: 0.2 s that only a plan pays

    low, high = np.maximum(bounds[0], x - box), np.minimum(bounds[1], x + box)
    pieces = _Pieces(np.array([*range(rows.size), *(bend.row for bend in bends)]),
                     np.array([*rows, *(max(bend.value + bend.by @ (x - bend.x), rows[bend.row]) for bend in bends)]),
                     np.vstack([slopes, *(bend.by for bend in bends)]))
    count, favour = x.size, bool(of.favour)
    short, eased = (list(dict.fromkeys(pieces.rows[_near(pieces, limits, low - x, high - x, weights)].tolist()))
                    for limits, weights in ((np.full(rows.size, of.hair), of.short), (of.eases, of.ease)))
    total = 2 * count + len(short) + len(eased) + favour
    cost = np.concatenate([np.zeros(count), of.move * of.shy, of.short[short], of.ease[eased], [-FAVOUR] * favour])
    blocks, limits = [], []
    for sign in (1.0, -1.0):  # the way of every part from where it is today
        block = np.zeros((count, total))
        block[:, :count], block[:, count:2 * count] = sign * np.eye(count), -np.eye(count)
        blocks.append(block)
        limits.append(sign * (of.start - x))
    held = [(2 * count, short, np.full(rows.size, of.hair)), (2 * count + len(short), eased, of.eases)]
    for block, limit in (*_lacking(pieces, held, count, total), *_favoured(of, pieces, count, total)):
        blocks.append(block)
        limits.append(limit)
    ends = [*zip(low - x, high - x, strict=True), *[(0.0, None)] * (total - count - favour), *[(None, None)] * favour]
    found = linprog(cost, np.vstack(blocks), np.concatenate(limits), bounds=ends, method="highs")
    if found.x is None:
        return None
    moved = np.clip(x + found.x[:count], low, high)
    moved = np.where(np.abs(moved - of.start) < 1e-9, of.start, moved)
    promised = np.full(rows.size, np.inf)
    np.minimum.at(promised, pieces.rows, pieces.values + pieces.slopes @ (moved - x))
    return Step(moved, promised, of.worth(promised, moved))


def _near(of: _Pieces, limits: Array, down: Array, up: Array, weights: Array) -> NDArray[np.intp]:
    """The pieces that a step within the box may take below their limit."""
    reach = np.abs(of.slopes) @ np.maximum(up, -down)
    return np.nonzero((of.values - reach < limits[of.rows]) & (weights[of.rows] > 0.0))[0]


def _lacking(of: _Pieces, held: list[tuple[int, list[int], Array]], count: int,
             total: int) -> Iterator[tuple[Array, Array]]:
    """What each row lacks of its limit, a variable from `first` on, is no less than any of its pieces lacks."""
    for first, chosen, limits in held:
        column = {row: first + at for at, row in enumerate(chosen)}
        own = [k for k, row in enumerate(of.rows.tolist()) if row in column]
        block = np.zeros((len(own), total))
        block[:, :count] = -of.slopes[own]
        block[np.arange(len(own)), [column[row] for row in of.rows[own].tolist()]] = -1.0
        yield block, of.values[own] - limits[of.rows[own]]


def _favoured(of: Merit, pieces: _Pieces, count: int, total: int) -> Iterator[tuple[Array, Array]]:
    """The favoured margin, the last variable, is no more than any of its pieces."""
    own = [k for k, row in enumerate(pieces.rows.tolist()) if row in of.favour]
    if own:
        block = np.zeros((len(own), total))
        block[:, :count], block[:, -1] = -pieces.slopes[own], 1.0
        yield block, pieces.values[own]
