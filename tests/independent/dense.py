"""A drawn network in double precision, many frequencies at once: quick enough to judge thousands of chains by.

Rows and columns are brought to size before every solution. Where it and the program part, 50 digits decide.
"""

from __future__ import annotations

from collections.abc import Hashable, Mapping
from typing import Any

import numpy as np

from tests.independent.network import Element, System

CIRCLE = 48  # points about a crowd of poles


class Dense:
    """G + sC of a system with a drive and an output, and what the parts do to the output."""

    def __init__(self, system: System, drive: Mapping[Hashable, Any], output: Hashable) -> None:
        self.G, self.C, self.unknowns = system.dense()
        self.place = {key: at for at, key in enumerate(self.unknowns)}
        self.b = np.zeros(len(self.unknowns))
        for key, value in drive.items():
            self.b[self.place[key]] = float(value)
        self.out = self.place[output]

    def _scaled(self, s: np.ndarray) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
        """(matrices of entries about 1, what their rows and their columns were divided by)."""
        A = self.G + np.asarray(s)[:, None, None] * self.C
        size = np.abs(A)
        rows, columns = np.ones(A.shape[:2]), np.ones(A.shape[:2])
        for _ in range(2):  # by square roots, so that neither side takes all of it
            grown = np.sqrt(size.max(axis=2))
            grown[grown == 0] = 1
            size = size / grown[:, :, None]
            rows *= grown
            grown = np.sqrt(size.max(axis=1))
            grown[grown == 0] = 1
            size = size / grown[:, None, :]
            columns *= grown
        return A / rows[:, :, None] / columns[:, None, :], rows, columns

    def solve(self, s: np.ndarray) -> np.ndarray:
        """All unknowns (f, n) for the drive at every s."""
        A, rows, columns = self._scaled(s)
        return np.linalg.solve(A, (self.b / rows)[:, :, None])[:, :, 0] / columns

    def adjoint(self, s: np.ndarray) -> np.ndarray:
        """What one unit in each row of the equations does at the output (f, n)."""
        A, rows, columns = self._scaled(s)
        right = np.zeros((*A.shape[:2], 1))
        right[:, self.out, 0] = 1 / columns[:, self.out]
        return np.linalg.solve(np.swapaxes(A, 1, 2), right)[:, :, 0] / rows

    def h(self, s: np.ndarray) -> np.ndarray:
        return self.solve(s)[:, self.out]

    def trace(self, s: np.ndarray) -> np.ndarray:
        """tr((G + sC)⁻¹·C) at every s: the sum of 1/(s - p) over all finite poles."""
        A, rows, columns = self._scaled(s)
        right = self.C / rows[:, :, None]
        return np.trace(np.linalg.solve(A, right) / columns[:, :, None], axis1=1, axis2=2)

    def slopes(self, elements: list[Element], s: complex) -> dict[tuple[int, str], complex]:
        """d ln H/d ln X at one s of every C, L and storage, by one solution either way."""
        at = np.array([s])
        x, y = self.solve(at)[0], self.adjoint(at)[0]
        found: dict[tuple[int, str], complex] = {}
        for i, e in enumerate(elements):
            if not e.reactive:
                continue
            if e.kind == "L":
                k = self.place["branch", i]
                change = s * float(e.value) * y[k] * x[k]
            else:
                across = [sum(sign * v[self.place[end]] for sign, end in ((1, e.a), (-1, e.b)) if end in self.place)
                          for v in (y, x)]
                change = -s * float(e.value) * across[0] * across[1]
            found[e.key] = found.get(e.key, 0j) + change / x[self.out]
        return found


class Steps:
    """1 + e(t), the step response over its final value, from its poles by Cauchy's integral about each crowd of them.

    miss  how far the sum of the terms lies from the response beside the axis, as a share of the final value
    """

    def __init__(self, net: Dense, gain: float, poles: np.ndarray) -> None:
        def response(s: np.ndarray) -> np.ndarray:
            return (net.h(s) / gain - 1) / s  # of e(t); 0 is no pole of it

        exponents, weights = [], []
        for crowd in crowds(poles):
            others = np.array([p for p in poles if p not in crowd] or [0j])
            centre = np.mean(crowd)
            reach = np.abs(np.append(others, 0) - centre).min()
            spread = np.abs(np.array(crowd) - centre).max()
            radius = np.sqrt(reach * spread) if spread > reach / 9 else reach / 3
            turn = np.exp(2j * np.pi * (np.arange(CIRCLE) + 0.5) / CIRCLE)
            s = centre + radius * turn
            values = response(s) * radius * turn / CIRCLE
            if len(crowd) == 1:
                exponents.append(crowd)
                weights.append([values.sum()])
            else:
                exponents.append(list(s))
                weights.append(list(values))
        self.s = np.array([x for some in exponents for x in some], dtype=complex)
        self.a = np.array([x for some in weights for x in some], dtype=complex)
        size = np.abs(poles) if poles.size else np.ones(1)
        at = np.concatenate([size * np.exp(1j * angle) for angle in (0.3, 1.2)])
        told = (self.a / (at[:, None] - self.s)).sum(axis=1) if poles.size else 0 * at
        self.miss = float(np.max(np.abs(at * (told - response(at)))))

    def at(self, t: np.ndarray) -> np.ndarray:
        t = np.atleast_1d(t)
        with np.errstate(under="ignore"):
            return 1 + (self.a * np.exp(self.s * t[:, None])).real.sum(axis=1)


def crowds(poles: np.ndarray, near: float = 0.02) -> list[list[complex]]:
    """Poles that lie within a share of their size together."""
    found: list[list[complex]] = []
    for p in poles.tolist():
        joined = [crowd for crowd in found if any(abs(p - q) <= near * abs(p) for q in crowd)]
        found = [crowd for crowd in found if crowd not in joined] + [[p, *(q for crowd in joined for q in crowd)]]
    return found
