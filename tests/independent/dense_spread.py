"""Built chains solved densely: the nodal matrix of each build stamped part by part and given to LAPACK.

No elimination order, no grid, no shared bracket: the matrix is that of the textbooks (an admittance between every two
nodes, a row for every driven one), and an edge is where the response crosses the half-power line, bracketed from its
nominal place outward.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from math import log, pi
from typing import Any

import numpy as np
from numpy.typing import NDArray

from polebook.circuit.layout import Layout

Numbers = NDArray[np.float64]
HALF_POWER = -0.5 * log(2.0)


@dataclass
class Matrices:
    """(builds, nodes, nodes) each: what stands by itself, what goes with s, what goes with 1/s; without a node for the
    source's EMF, whose column stands on the right (builds, nodes)."""

    real: Numbers
    rising: Numbers
    falling: Numbers
    right: tuple[Numbers, Numbers, Numbers]
    output: int

    def transfer(self, hz: Numbers) -> NDArray[np.complex128]:
        """(builds,) V(load)/EMF or V(load)/I, each build at its own frequency."""
        s = 2j * pi * hz[:, None]
        right = self.right[0] + s * self.right[1] + self.right[2] / s
        s = s[:, :, None]
        matrix = self.real + s * self.rising
        if self.falling.any():
            matrix += self.falling / s
        return np.linalg.solve(matrix, right[:, :, None])[:, self.output, 0]


def matrices(layout: Layout, values: Sequence[Any], builds: int) -> Matrices:
    """Stamps every part of the network: floats, or arrays of builds."""
    count = len(layout.names)
    full = np.zeros((3, builds, count + 1, count + 1))  # the last row and column are ground's
    for branch in layout.branches:
        if len(branch.groups) > 1:
            raise NotImplementedError("parts in series across two nodes")
        for index in branch.groups[0]:
            kind, value = layout.parts[index].type, values[index]
            admittance = value if kind == "C" else 1.0 / value
            table = full[{"R": 0, "C": 1, "L": 2}[kind]]
            for i, j, sign in ((branch.i, branch.i, 1), (branch.j, branch.j, 1), (branch.i, branch.j, -1),
                               (branch.j, branch.i, -1)):
                if i < 0 or not layout.driven[i]:
                    table[:, i, j] += sign * admittance
    for segment in layout.segments:
        for t in segment.transfers:
            for row, column, sign in ((t.output, t.plus, 1), (t.output, t.minus, -1), (t.lower, t.plus, -1),
                                      (t.lower, t.minus, 1)):
                full[0][:, row, column] += sign * values[t.part]
        if segment.drives or segment.storages:
            raise NotImplementedError("a driven node")
    known = layout.emf
    kept = [k for k in range(count) if k != known]
    right = np.zeros((3, builds, len(kept)))
    if known >= 0:
        right = -full[:, :, kept, known]
    else:
        right[0, :, kept.index(layout.after[0])] = 1.0
    tables = full[:, :, kept][:, :, :, kept]
    return Matrices(tables[0], tables[1], tables[2], (right[0], right[1], right[2]), kept.index(layout.after[-1]))


def edge(loss: Callable[[Numbers], Numbers], start: Numbers, outward: float) -> Numbers:
    """ln f at which each build's loss (neper over the half-power line) crosses 0 near `start`, to about 1e-12.

    A bracket is widened to both sides of the start, then narrowed by the Illinois rule, all builds together.
    """
    reach = 0.05
    inner, outer = start - outward * reach, start + outward * reach
    f_inner, f_outer = loss(inner), loss(outer)
    while (f_inner <= 0).any() or (f_outer >= 0).any():
        reach *= 2
        inner = np.where(f_inner <= 0, inner - outward * reach, inner)
        outer = np.where(f_outer >= 0, outer + outward * reach, outer)
        f_inner, f_outer = loss(inner), loss(outer)
    last = np.zeros(start.shape)
    for _ in range(100):
        new = inner - f_inner * (outer - inner) / (f_outer - f_inner)
        value = loss(new)
        if np.abs(value).max() < 1e-11:
            return new
        side = np.where(value > 0, 1.0, -1.0)
        again = side == last
        f_outer = np.where(side > 0, np.where(again, 0.5 * f_outer, f_outer), value)
        f_inner = np.where(side > 0, value, np.where(again, 0.5 * f_inner, f_inner))
        outer, inner, last = np.where(side > 0, outer, new), np.where(side > 0, new, inner), side
    raise AssertionError("no edge found")
