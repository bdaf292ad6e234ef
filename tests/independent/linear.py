"""Linear equations in 50-digit arithmetic: plain elimination on sparse rows, fewest fill-ins first."""

from __future__ import annotations

from collections.abc import Hashable
from typing import Any

import mpmath

mp = mpmath.mp.clone()
mp.dps = 50
NOTHING = mp.mpf(10) ** -36  # an entry this far below its row's greatest is rounding, not a value

Rows = dict[Hashable, dict[Hashable, Any]]


class Singular(ArithmeticError):
    """The equations do not hold some unknown."""


def _pivot(rows: Rows, count: dict[Hashable, set[Hashable]], live: set[Hashable]) -> tuple[Hashable, Hashable]:
    """The entry of the unfinished rows whose elimination makes the fewest new entries."""
    best = None
    for r in live:
        row = rows[r]
        inside = [c for c in row if c in count]
        for c in inside:
            cost = (len(inside) - 1) * (len(count[c]) - 1)
            if best is None or cost < best[0]:
                best = (cost, r, c)
                if cost == 0:
                    return r, c
    if best is None:
        raise Singular
    return best[1], best[2]


def solve(matrix: Rows, rights: list[dict[Hashable, Any]]) -> list[dict[Hashable, Any]]:
    """x of matrix·x = right for each right-hand side (sparse: row -> value). Raises Singular."""
    unknowns = {c for row in matrix.values() for c in row}
    if len(unknowns) != len(matrix):
        raise Singular
    rows: Rows = {r: dict(row) for r, row in matrix.items()}
    for i, right in enumerate(rights):
        for r, value in right.items():
            rows[r][("right", i)] = value
    scale = {r: max((abs(v) for v in row.values()), default=mp.mpf(0)) for r, row in matrix.items()}
    count: dict[Hashable, set[Hashable]] = {c: set() for c in unknowns}
    for r, row in matrix.items():
        for c in row:
            count[c].add(r)
    live = set(rows)
    order: list[tuple[Hashable, Hashable]] = []
    while live:
        r, c = _pivot(rows, count, live)
        row = rows[r]
        pivot = row[c]
        order.append((r, c))
        live.discard(r)
        for k in row:
            if k in count:
                count[k].discard(r)
        for other in list(count[c]):
            target = rows[other]
            factor = target.pop(c) / pivot
            for k, value in row.items():
                if k == c:
                    continue
                if k in target:
                    new = target[k] - factor * value
                else:
                    new = -factor * value
                    if k in count:
                        count[k].add(other)
                if k in count and abs(new) <= NOTHING * scale[other]:
                    target.pop(k, None)
                    count[k].discard(other)
                else:
                    target[k] = new
        del count[c]
    answers: list[dict[Hashable, Any]] = []
    for i in range(len(rights)):
        x: dict[Hashable, Any] = {}
        for r, c in reversed(order):
            row = rows[r]
            total = row.get(("right", i), mp.mpf(0))
            for k, value in row.items():
                if k != c and k in x:
                    total = total - value * x[k]
            x[c] = total / row[c]
        answers.append(x)
    return answers
