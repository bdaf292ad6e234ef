"""One elimination order for a sparse pattern, run on numbers of any kind: remainders of a prime, long reals, complex.

The pivots are chosen once, where the entries are remainders at a value of s that nothing knows of; an entry that is
not zero there is none by structure.
"""

from __future__ import annotations

from collections.abc import Hashable, Mapping, Sequence
from dataclasses import dataclass, field
from typing import Any

# a zero by chance has one chance in some 10^28; no 2^k - 1, which divides binary fractions such as that of 1/537
PRIME = 271828182845904523536028747271

Place = tuple[Hashable, Hashable]


@dataclass
class Step:
    """One pivot: its row and column, the rest of its row, and what it is taken from."""

    row: Hashable
    column: Hashable
    rest: list[Hashable]  # columns of the pivot's row that are not finished
    below: list[Hashable]  # rows that have an entry in the pivot's column


@dataclass
class Plan:
    """The steps for a pattern; `singular` where the determinant is zero whatever s is."""

    steps: list[Step] = field(default_factory=list)
    singular: bool = False


def plan(entries: Mapping[Place, int], rows: Sequence[Hashable], columns: Sequence[Hashable]) -> Plan:
    """Pivots in an order of few new entries, from entries that are remainders of PRIME."""
    table = {r: {} for r in rows}
    for (r, c), value in entries.items():
        if value % PRIME:
            table[r][c] = value % PRIME
    members = {c: {r for r in rows if c in table[r]} for c in columns}
    live = set(rows)
    out = Plan()
    while live:
        best = None
        for r in sorted(live, key=lambda r: (len(table[r]), str(r))):
            if best is not None and best[0] <= len(table[r]) - 1:
                break
            for c in table[r]:
                cost = (len(table[r]) - 1) * (len(members[c]) - 1)
                if best is None or cost < best[0]:
                    best = (cost, r, c)
        if best is None or not table[best[1]]:
            out.singular = True
            return out
        _, r, c = best
        row = table[r]
        inverse = pow(row[c], -1, PRIME)
        step = Step(r, c, [k for k in row if k != c], [i for i in members[c] if i != r])
        out.steps.append(step)
        live.discard(r)
        for k in row:
            members[k].discard(r)
        for i in step.below:
            factor = table[i].pop(c) * inverse % PRIME
            for k in step.rest:
                new = (table[i].get(k, 0) - factor * row[k]) % PRIME
                if new:
                    table[i][k] = new
                    members[k].add(i)
                else:
                    table[i].pop(k, None)
                    members[k].discard(i)
        del members[c]
    return out


def eliminate(steps: Plan, entries: Mapping[Place, Any], modulus: int | None = None) -> dict[Place, Any]:
    """The factors: pivots and the rest of their rows (upper), and what a row was taken times (lower)."""
    table = dict(entries)
    for step in steps.steps:
        r, c = step.row, step.column
        pivot = table[r, c]
        inverse = pow(pivot, -1, modulus) if modulus else 1 / pivot
        for i in step.below:
            factor = table[i, c] * inverse
            if modulus:
                factor %= modulus
            table[i, c] = factor
            for k in step.rest:
                new = factor * table[r, k]
                old = table.get((i, k))
                new = -new if old is None else old - new
                table[i, k] = new % modulus if modulus else new
    return table


def determinant(steps: Plan, entries: Mapping[Place, Any], modulus: int | None = None) -> Any:
    """The determinant but for its sign, which is the same for all values of one plan. 0 where a pivot is 0."""
    try:
        table = eliminate(steps, entries, modulus)
    except (ZeroDivisionError, ValueError):
        return 0
    total = 1
    for step in steps.steps:
        total = total * table[step.row, step.column]
        if modulus:
            total %= modulus
    return total


def right(steps: Plan, table: Mapping[Place, Any], b: Mapping[Hashable, Any]) -> dict[Hashable, Any]:
    """x of A·x = b from the factors of A."""
    b = dict(b)
    for step in steps.steps:
        for i in step.below:
            b[i] = b[i] - table[i, step.column] * b[step.row]
    x: dict[Hashable, Any] = {}
    for step in reversed(steps.steps):
        total = b[step.row]
        for k in step.rest:
            total = total - table[step.row, k] * x[k]
        x[step.column] = total / table[step.row, step.column]
    return x


def left(steps: Plan, table: Mapping[Place, Any], b: Mapping[Hashable, Any]) -> dict[Hashable, Any]:
    """y of yᵀ·A = bᵀ from the factors of A."""
    b = dict(b)
    y: dict[Hashable, Any] = {}
    for step in steps.steps:
        y[step.row] = b[step.column] / table[step.row, step.column]
        for k in step.rest:
            b[k] = b[k] - table[step.row, k] * y[step.row]
    for step in reversed(steps.steps):
        for i in step.below:
            y[step.row] = y[step.row] - table[i, step.column] * y[i]
    return y
