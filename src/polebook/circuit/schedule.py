"""In which order the network is eliminated, and between which entries: worked out once for a topology.

A node k is eliminated plainly, or through one series branch z that ties it to its parent b. The second way
never forms 1/z, so that a microhm beside a gigohm costs no digits. With A the matrix of current balances,

    plain    w = 1/A_kk             p = 0      t_j = -w·A_kj
    series   w = z/(1 + z·A_kk)     p = 1/(1 + z·A_kk)      t_j = -w·A_kj, and p more for j = b

V_k = sum of t_j·V_j, every other row takes A_ij += A_ik·t_j, and the parent's row the current of the branch,
A_bj += p·A_kj for all j, k's own diagonal going to b's. All of it follows from V_k = V_b + z·q with q the
branch's current. A driven parent takes no current: its row is an equation of its own.
"""

from __future__ import annotations

from dataclasses import dataclass, field

from polebook.stages.stamper import GROUND


@dataclass(frozen=True, slots=True)
class Step:
    """The elimination of one node; slots are numbers of matrix entries, -1 where there is none.

    branch       index of the series branch to the parent, -1 for a plain step
    takes        the parent's own row takes the branch's current
    near         neighbours at that moment
    cols, col_slots        columns j with the slot of (k, j); the parent's is the last of them where there is one
    rows, row_slots        rows i with the slot of (i, k); numbers behind the nodes' are rows that only sum currents
    targets                for each row i the slots of (i, j), j by `cols`
    parent_slots           slots of (b's row of currents, j), j by `cols`; empty where nobody sums them
    """

    node: int
    diag: int
    branch: int
    parent: int
    takes: bool
    near: tuple[int, ...]
    cols: tuple[int, ...]
    col_slots: tuple[int, ...]
    rows: tuple[int, ...]
    row_slots: tuple[int, ...]
    targets: tuple[tuple[int, ...], ...]
    parent_slots: tuple[int, ...]


@dataclass(slots=True)
class Graph:
    """The entries that stand at the present moment of the elimination."""

    balance: list[int]  # row of each node's currents, from placing.balance_rows
    slots: dict[tuple[int, int], int] = field(default_factory=dict)
    columns: dict[int, set[int]] = field(default_factory=dict)  # row -> its columns
    rows: dict[int, set[int]] = field(default_factory=dict)  # column -> its rows
    near: dict[int, set[int]] = field(default_factory=dict)
    ties: dict[int, list[tuple[int, int]]] = field(default_factory=dict)  # node -> (branch, other end), unused yet

    def enter(self, i: int, j: int) -> int:
        """Slot of the entry (i, j), which stands from now on."""
        self.columns.setdefault(i, set()).add(j)
        self.rows.setdefault(j, set()).add(i)
        if i != j and i < len(self.balance):
            self.near.setdefault(i, set()).add(j)
            self.near.setdefault(j, set()).add(i)
        return self.slot(i, j)

    def slot(self, i: int, j: int) -> int:
        """Slot of the entry (i, j), whether it stands or not."""
        return self.slots.setdefault((i, j), len(self.slots))

    def forget_row(self, k: int) -> None:
        """The row of a node whose voltage is taken as known."""
        for j in self.columns.pop(k, set()):
            self.rows[j].discard(k)

    def tie(self, branch: int, i: int, j: int) -> None:
        """A series branch between two nodes (either may be ground)."""
        for a, b in ((i, j), (j, i)):
            if a != GROUND:
                self.ties.setdefault(a, []).append((branch, b))
                if b != GROUND:
                    self.near.setdefault(a, set()).add(b)

    def eliminate(self, k: int) -> Step:
        """Takes node k out, books the fill, and returns the step."""
        branch, parent = self._use_tie(k)
        diag = self.enter(k, k)
        cols = sorted(self.columns.pop(k) - {k, parent})
        rows = tuple(sorted(self.rows.pop(k) - {k}))
        col_slots = [self.slots[k, j] for j in cols]
        if parent != GROUND:
            cols.append(parent)
            col_slots.append(self.slots.get((k, parent), -1))
        row_slots = tuple(self.slots[i, k] for i in rows)
        for j in cols:
            self.rows.get(j, set()).discard(k)
        for i in rows:
            self.columns[i].discard(k)
        targets = tuple(tuple(self.enter(i, j) for j in cols) for i in rows)
        sums = self.balance[parent] if parent != GROUND else -1
        parent_slots = tuple(self.enter(sums, j) for j in cols) if sums >= 0 else ()
        takes = parent != GROUND and sums == parent
        return Step(k, diag, branch, parent, takes, self._close_ranks(k), tuple(cols), tuple(col_slots), rows,
                    row_slots, targets, parent_slots)

    def _use_tie(self, k: int) -> tuple[int, int]:
        ties = self.ties.pop(k, [])
        if not ties:
            return -1, GROUND
        branch, parent = ties[0]
        if parent != GROUND:
            self.ties[parent] = [tie for tie in self.ties[parent] if tie[0] != branch]
        return branch, parent

    def _close_ranks(self, k: int) -> tuple[int, ...]:
        """Makes k's neighbours each other's: the entries of the inverse among them are needed to find k's."""
        near = self.near.pop(k, set())
        for i in near:
            self.near[i] |= near
            self.near[i] -= {i, k}
        return tuple(sorted(near))


def leaves_first(nodes: list[int], ties: list[tuple[int, int]], last: int, driven: list[bool],
                 storing: frozenset[int]) -> list[int]:
    """An order in which every node has at most one unused series branch when its turn comes, a driven one none.

    nodes are those to eliminate, ties the ends of the series branches (to other nodes or ground as well). As late as
    the branches allow come `last`, then driven nodes, then those that store: the pivot of an op-amp's dominant pole
    is then 1 plus its whole loop gain, which no difference of two large numbers could tell.
    """
    ends: dict[int, list[int]] = {k: [] for k in nodes}
    for i, j in ties:
        for a, b in ((i, j), (j, i)):
            if a in ends:
                ends[a].append(b)
    result: list[int] = []
    while ends:
        free = (k for k, others in ends.items() if len(others) <= (0 if driven[k] else 1))
        k = min(free, key=lambda n: ((n == last) + 2 * driven[n] + (n in storing), -n))
        for other in ends.pop(k):
            if other in ends:
                ends[other].remove(k)
        result.append(k)
    return result
