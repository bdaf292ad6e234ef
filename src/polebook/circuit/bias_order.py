"""In which order the rows of a group are eliminated: worked out once, at the file's own values.

The order then serves floats, arrays and complex numbers alike, with no branch on a value. A resistor between two
free nodes goes first, as a conductance; but where it is small, end after end of the trees of such resistors goes,
node by its resistor's row and resistor by its node's balance: it then stands in series with what lies behind it,
and a large conductance never swallows a small one.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

from polebook.circuit.bias_group import RHS, Columns, Group, Row

AMPERE_WEIGHT = 1e-3  # a milliampere weighs as much as a volt where pivots are compared
NEGLIGIBLE = 1e-12
SMALL_OHM = 100.0


@dataclass(frozen=True, slots=True)
class Pivot:
    """Row and column of one step, and the rows from which the column is cleared."""

    row: int
    column: int
    targets: tuple[int, ...]


def clear(rows: list[Row], pivot: Pivot) -> None:
    """One step of the elimination, in place."""
    source = rows[pivot.row]
    scale = source[pivot.column]
    for target in pivot.targets:
        row = rows[target]
        factor = row.pop(pivot.column) / scale
        for column, value in source.items():
            if column != pivot.column:
                row[column] = row[column] - factor * value if column in row else -(factor * value)


@dataclass(frozen=True, slots=True)
class Order:
    """linear: steps for every unknown that is no drive nor its current; drives: steps for these, one a row left."""

    linear: tuple[Pivot, ...]
    drives: tuple[Pivot, ...]
    stuck: frozenset[int]  # drives for which no row is left: their current is settled without their law


def order(rows: list[Row], places: tuple[int, ...], cols: Columns, group: Group) -> Order:
    """Plans the elimination of `rows` (plain numbers; used up). `places`: place of each in `assemble`, pins after."""
    drives = [u for u in cols.drive if u >= 0]
    nonlinear = {*drives, *(i for i, u in zip(cols.current, cols.drive, strict=True) if u >= 0)}
    active = set(range(len(rows)))
    linear = []
    row_of = {place: k for k, place in enumerate(places)}
    branch_rows = [row_of[len(group.nodes) + k] for k in range(len(group.branches))]
    small = [abs(rows[row][column]) < SMALL_OHM for row, column in zip(branch_rows, cols.branch, strict=True)]
    large = [(row, column) for row, column, s in zip(branch_rows, cols.branch, small, strict=True) if not s]
    for row, column in [*large, *_tree_ends(row_of, small, cols, group)]:
        linear.append(_step(rows, active, active, row, column))
    done = {pivot.column for pivot in linear}
    for column in (k for k in range(cols.count) if k not in nonlinear and k not in done):
        linear.append(_step(rows, active, active, _best(rows, active, column, cols), column))
    left, steps, stuck = sorted(active), [], set()
    for column in drives:
        row = max(active, key=lambda k: _weight(rows[k], column, cols), default=-1)
        if row < 0 or _weight(rows[row], column, cols) < NEGLIGIBLE:
            stuck.add(column)
        else:
            steps.append(_step(rows, active, left, row, column))
    return Order(tuple(linear), tuple(steps), frozenset(stuck))


def _step(rows: list[Row], active: set[int], among: Iterable[int], row: int, column: int) -> Pivot:
    pivot = Pivot(row, column, tuple(k for k in sorted(among) if k != row and column in rows[k]))
    clear(rows, pivot)
    active.remove(row)
    return pivot


def _weight(row: Row, column: int, cols: Columns) -> float:
    """Size of an entry against the largest of its row; 0 where there is none."""
    sizes = {k: abs(value) * _unit(k, cols) for k, value in row.items() if k != RHS}
    return float(sizes[column] / max(sizes.values())) if sizes.get(column) else 0.0


def _unit(column: int, cols: Columns) -> float:
    return 1.0 if column < len(cols.voltage) or column in cols.drive else AMPERE_WEIGHT


def _best(rows: list[Row], active: set[int], column: int, cols: Columns) -> int:
    """The row with the fewest entries among those in which the column weighs enough. Raises OverflowError."""
    weights = {k: _weight(rows[k], column, cols) for k in sorted(active)}
    enough = 0.1 * max(weights.values())
    known = [k for k, weight in weights.items() if weight >= enough > 0.0]
    if not known:
        raise OverflowError("entries that are beyond all numbers have no order")
    return min(known, key=lambda k: len(rows[k]))


def _tree_ends(row_of: dict[int, int], small: list[bool], cols: Columns, group: Group) -> list[tuple[int, int]]:
    """(row, column) pairs that take the ends of trees of small resistors inward, node and resistor by turns."""
    first_branch = len(group.nodes)
    open_ways: dict[int, list[int]] = {node: [] for node in group.nodes}
    for k, branch in ((k, branch) for k, branch in enumerate(group.branches) if small[k]):
        open_ways[branch.a].append(k)
        open_ways[branch.b].append(k)
    pairs = []
    ends = [node for node, ways in open_ways.items() if len(ways) == 1]
    while ends:
        node = ends.pop(0)
        balance = row_of.get(cols.voltage[node])
        if len(open_ways[node]) != 1 or balance is None:
            continue
        k = open_ways[node].pop()
        branch = group.branches[k]
        pairs += [(row_of[first_branch + k], cols.voltage[node]), (balance, cols.branch[k])]
        other = branch.b if branch.a == node else branch.a
        open_ways[other].remove(k)
        if len(open_ways[other]) == 1:
            ends.append(other)
    return pairs
