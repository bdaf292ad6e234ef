"""A state space for python-control, from G and C: x' = A·x + B·u, y = c·x + d·u."""

from __future__ import annotations

from typing import Any

import numpy as np

from tests.independent.linear import mp
from tests.independent.solved import Solved


def state_space(chain: Solved, rate: float) -> tuple[np.ndarray, np.ndarray, np.ndarray, np.ndarray]:
    """A, B, C, D of the full network with time counted in 1/rate seconds.

    The capacitance matrix is brought to [1 0; 0 0] by elimination with full pivoting; the rows without a
    derivative then give the other unknowns. Raises ZeroDivisionError where they do not (a capacitance across an
    ideal source).
    """
    system = chain.full
    unknowns = system.unknowns
    n = len(unknowns)
    place = {k: i for i, k in enumerate(unknowns)}
    G, C = mp.zeros(n), mp.zeros(n)
    for (r, c), value in system.G.items():
        G[place[r], place[c]] = value
    for (r, c), value in system.C.items():
        C[place[r], place[c]] = value * rate
    b, pick = mp.zeros(n, 1), mp.zeros(1, n)
    for row, value in chain.drive_full().items():
        b[place[row], 0] = value
    pick[0, place[chain.load]] = mp.mpf(1)
    rank = 0
    largest = max(abs(C[i, j]) for i in range(n) for j in range(n))
    while rank < n:
        size, i, j = max((abs(C[i, j]), i, j) for i in range(rank, n) for j in range(rank, n))
        if size <= largest * mp.mpf(10) ** -40:
            break
        for m in (C, G, b):
            _swap_rows(m, rank, i)
        for m in (C, G, pick):
            _swap_columns(m, rank, j)
        _clear(C, G, b, pick, rank)
        rank += 1
    G11, G12 = G[:rank, :rank], G[:rank, rank:]
    G21, G22 = G[rank:, :rank], G[rank:, rank:]
    A, B, c, d = -G11, b[:rank, :], pick[:, :rank], mp.zeros(1, 1)
    if rank < n:
        inverse = mp.inverse(G22)
        A = A + G12 * inverse * G21
        B = B - G12 * inverse * b[rank:, :]
        c = c - pick[:, rank:] * inverse * G21
        d = pick[:, rank:] * inverse * b[rank:, :]
    return _floats(A), _floats(B), _floats(c), _floats(d)


def _swap_rows(m: Any, i: int, j: int) -> None:
    for k in range(m.cols):
        m[i, k], m[j, k] = m[j, k], m[i, k]


def _swap_columns(m: Any, i: int, j: int) -> None:
    for k in range(m.rows):
        m[k, i], m[k, j] = m[k, j], m[k, i]


def _clear(C: Any, G: Any, b: Any, pick: Any, k: int) -> None:
    """Row k and column k of C to a single 1; G, b and the output row follow."""
    pivot = C[k, k]
    for m in (C, G, b):
        for j in range(m.cols):
            m[k, j] = m[k, j] / pivot
    for i in range(C.rows):
        if i != k and C[i, k] != 0:
            factor = C[i, k]
            for m in (C, G, b):
                for j in range(m.cols):
                    m[i, j] = m[i, j] - factor * m[k, j]
    for j in range(C.cols):
        if j != k and C[k, j] != 0:
            factor = C[k, j]
            for m in (C, G, pick):
                for i in range(m.rows):
                    m[i, j] = m[i, j] - factor * m[i, k]


def _floats(m: Any) -> np.ndarray:
    return np.array([[float(m[i, j]) for j in range(m.cols)] for i in range(m.rows)]).reshape(m.rows, m.cols)
