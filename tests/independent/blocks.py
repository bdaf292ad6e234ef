"""The diagonal blocks of a sparse square matrix that can be put into block-triangular form: its determinant is their
product. What no signal joins both ways comes apart here, so that like stages behind buffers keep apart their like
poles."""

from __future__ import annotations

from collections.abc import Hashable, Iterable, Sequence

from scipy.sparse import csr_array
from scipy.sparse.csgraph import connected_components, maximum_bipartite_matching

Block = tuple[list[Hashable], list[Hashable]]


def blocks(
    entries: Iterable[tuple[Hashable, Hashable]], rows: Sequence[Hashable], columns: Sequence[Hashable]
) -> list[Block] | None:
    """(rows, columns) of every block; None where the matrix is singular by its pattern alone."""
    if not rows:
        return []
    at, place = {r: i for i, r in enumerate(rows)}, {c: i for i, c in enumerate(columns)}
    pairs = [(at[r], place[c]) for r, c in entries if r in at and c in place]
    n = len(rows)
    pattern = csr_array(([1] * len(pairs), ([i for i, _ in pairs], [j for _, j in pairs])), shape=(n, n))
    row_of = maximum_bipartite_matching(pattern, perm_type="row")  # column -> its row
    if (row_of < 0).any():
        return None
    links = ([1] * len(pairs), ([i for i, _ in pairs], [row_of[j] for _, j in pairs]))
    count, label = connected_components(csr_array(links, shape=(n, n)), directed=True, connection="strong")
    out: list[Block] = [([], []) for _ in range(count)]
    for i, r in enumerate(rows):
        out[label[i]][0].append(r)
    for j, c in enumerate(columns):
        out[label[row_of[j]]][1].append(c)
    return out
