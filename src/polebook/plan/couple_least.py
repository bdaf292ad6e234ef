"""The least total capacitance that keeps a lower edge.

At the least, with λ the multiplier of the edge, 1 = -λ·∂f_L/∂C for every part that is free to move: λ·f_L·owned/C with
owned = -d ln f_L/d ln C. So owned/C is the same for all of them, and each owns of the edge what it has of the
capacitance. Solved in ln C, with the response at the wanted edge in place of the edge: |H(f)| = |gain|/√2 there says
the same, and has a value everywhere.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from math import log

import numpy as np

from polebook.formula import Formula
from polebook.plan.couple_end import Array, LowEnd, Mark
from polebook.solve.root import bracketed_root

FORMULAS = (
    Formula("couple.least", "owned_i/C_i equal for all i, owned = -d ln f_L/d ln C",
            "Lagrange condition of the least sum of C at a given f_L"),
    Formula("couple.each", "C = n/(2·pi·f·R): each corner at f/n, so that the sum of the corners is f",
            "sum of short-circuit time constants"),
    Formula("couple.like", "C = 1/(2·pi·R·f·sqrt(2^(1/n) - 1))", "n like corners"),
)
WIDEST = 1e6  # times the value whose own corner is at the wanted edge: a part beyond that changes nothing
_ACCURACY, _MOST = 1e-13, 300
_MISS = 1e-7  # neper by which a solution may miss a mark before it is scaled to the edge


def each_corner(low: LowEnd) -> Array:
    """Every corner at the n-th part of the wanted edge."""
    return low.least * len(low.ohms)


def like_corners(low: LowEnd) -> Array:
    """Every corner where n like ones, each behind a buffer, make the wanted edge."""
    found: Array = low.least / np.sqrt(2.0 ** (1.0 / len(low.ohms)) - 1.0)
    return found


def reachable(low: LowEnd, marks: Sequence[Mark]) -> bool:
    """Whether large capacitors keep the edge."""
    return low.held(low.least * WIDEST, marks)


def least(low: LowEnd, marks: Sequence[Mark]) -> Array | None:
    """The values of the least sum that keep every mark, no part's own corner above the wanted edge; None for none.

    The first of `marks` is the edge itself.
    """
    found = [end for start in _starts(low) if (end := _solved(low, marks, start)) is not None]
    return min(found, key=lambda farads: float(farads.sum()), default=None)


def _starts(low: LowEnd) -> Iterator[Array]:
    """Where the sum of the corners is least; today's; each of the three largest parts as the one that makes the edge.

    All lead to the same least on every demo chain; they are there for chains with more than one.
    """
    floor = low.least
    root = np.sqrt(floor)
    yield root * root.sum()  # of a sum of corners a_i/C_i that is f, the least sum of C has C_i as the root of a_i
    yield np.clip(low.now, floor, floor * WIDEST)
    for one in np.argsort(floor)[-3:]:
        start = 10.0 * floor
        start[one] = floor[one]
        yield start


def _solved(low: LowEnd, marks: Sequence[Mark], start: Array) -> Array | None:
    from scipy.optimize import minimize  # deferred: 0.3 s that a faulty command line need not wait for

    floor = low.least
    bounds = [(log(one), log(one * WIDEST)) for one in floor]

    def total(x: Array) -> tuple[float, Array]:
        farads = np.exp(x)
        return log(farads.sum()), farads / farads.sum()

    def spare(x: Array) -> Array:
        return np.array([mark.spare(low.loss(np.exp(x), mark.hz)) for mark in marks])

    def slopes(x: Array) -> Array:
        return np.array([low.slopes(np.exp(x), mark.hz) * (1 if mark.floor else -1) for mark in marks])

    with np.errstate(all="ignore"):
        done = minimize(total, np.log(start), jac=True, method="SLSQP", bounds=bounds,
                        constraints=[{"type": "ineq", "fun": spare, "jac": slopes}],
                        options={"maxiter": _MOST, "ftol": _ACCURACY})
    if not np.isfinite(done.x).all() or spare(done.x).min() < -_MISS:
        return None
    return _onto_edge(low, marks, np.exp(done.x))


def _onto_edge(low: LowEnd, marks: Sequence[Mark], farads: Array) -> Array:
    """All values times the one factor, next to 1, that puts the edge exactly where it is wanted."""
    edge = marks[0]

    def off(x: float) -> float:
        return low.loss(farads * np.exp(x), edge.hz) - edge.bound

    ends = (off(-1e-4), off(1e-4))
    if ends[0] * ends[1] >= 0:  # the edge is not what binds
        return farads
    scaled: Array = farads * np.exp(bracketed_root(off, -1e-4, 1e-4, *ends))
    return scaled
