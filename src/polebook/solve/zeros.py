"""The zeros of a chain are the zeros of its stages, each found alone: well conditioned, and attributed for free.

A stage's zeros are the roots of its forward cofactor: the determinant of its own equations without the row of its
input node and the column of its output node. No neighbour changes them.
"""

from __future__ import annotations

from dataclasses import dataclass
from math import log, pi, sqrt
from typing import TYPE_CHECKING

import numpy as np

from polebook.circuit.elements import Branch, Segment
from polebook.circuit.views import Network
from polebook.solve.aberth import aberth

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from polebook.solve.aberth import Complex, Ints

    Floats = NDArray[np.float64]

Entries = dict[tuple[int, int], float]


@dataclass(slots=True)
class Zeros:
    """roots in rad/s of one stage, those at 0 included; None where their count came out no whole number."""

    stage: str
    roots: Complex | None


@dataclass(slots=True)
class Cofactor:
    """det(g + s·c) of one stage, rows and columns scaled."""

    g: Floats
    c: Floats

    def ratio(self, p: Complex, q: Complex) -> Complex:
        """det at q over det at p."""
        both = self.g + np.concatenate([p, q])[:, None, None] * self.c
        sign, size = np.linalg.slogdet(both)
        n = p.size
        result: Complex = sign[n:] / sign[:n] * np.exp(size[n:] - size[:n])
        return result


def zeros(net: Network, low: float, high: float) -> list[Zeros]:
    """Zeros of every stage; low and high (Hz) span all corners. Coupled source and load have one at 0 each."""
    result = []
    with np.errstate(all="ignore"):
        for segment in net.layout.segments:
            if not segment.branches and not segment.drives:
                continue  # a wire
            if segment.kind in ("voltage", "current", "load"):
                coupled = any(net.layout.parts[index].name == "couple" for branch in segment.branches
                              for group in branch.groups for index in group)
                found: Complex | None = np.zeros(int(coupled), dtype=complex)
            else:
                found = _of(_cofactor(net, segment, 2 * pi * sqrt(low * high)), low, high)
            result.append(Zeros(segment.name, found))
    return result


def _of(cofactor: Cofactor, low: float, high: float) -> Complex | None:
    below, low = _growth(cofactor, low, 0.01)
    above, high = _growth(cofactor, high, 100.0)
    if below is None or above is None:
        return None
    none: Complex = np.zeros(below, dtype=complex)
    if above <= below:
        return none
    start = _eigenvalues(cofactor, 2 * pi * sqrt(low * high))
    start = start[np.argsort(np.abs(start))][below:above]
    if start.size < above - below:
        return None

    def ratio(p: Complex, q: Complex, _: Ints) -> Complex:
        return cofactor.ratio(p, q) * (q / p) ** -below

    roots, _ = aberth(ratio, start, np.zeros(start.size, dtype=np.int64), (low / 1e3, high * 1e6))
    return np.concatenate([none, np.where(np.abs(roots.imag) < 1e-10 * np.abs(roots), roots.real + 0j, roots)])


def _growth(cofactor: Cofactor, hz: float, outward: float) -> tuple[int | None, float]:
    """Power of s by which the cofactor goes at an end, and how far out (Hz) it is a whole number and stays one.

    A stage may have a zero far beyond every corner of the chain (a nulling resistor that all but cancels it).
    """
    points = (2j * pi * hz * outward ** np.arange(7.0)).astype(np.complex128)
    slopes = np.log(np.abs(cofactor.ratio(points, 1.1 * points))) / log(1.1)
    whole = np.abs(slopes - np.round(slopes)) < 1e-3
    for k in range(points.size - 1):
        if whole[k] and whole[k + 1] and np.round(slopes[k]) == np.round(slopes[k + 1]):
            return round(float(slopes[k])), float(hz * outward ** k)
    return None, hz


def _eigenvalues(cofactor: Cofactor, s0: float) -> Complex:
    """Finite eigenvalues of (g, -c) by inversion about s0: good enough to start from."""
    mu = np.linalg.eigvals(np.linalg.solve(cofactor.g + s0 * cofactor.c, cofactor.c)).astype(complex)
    mu = mu[np.abs(mu) > 1e-13 * np.abs(mu).max(initial=0.0)]
    start: Complex = s0 - 1.0 / mu
    return np.where(start == 0, s0 * 1e-12, start)


class _Equations:
    """One stage's own equations, every resistor and coil with its current, so that no value is inverted."""

    def __init__(self, net: Network, segment: Segment) -> None:
        self.net, self.segment = net, segment
        self.driven = net.layout.driven
        self.places = {node: k for k, node in enumerate([segment.before, *segment.nodes])}
        self.count = len(self.places)
        self.own = set(segment.nodes)
        self.g: Entries = {}
        self.c: Entries = {}

    def fresh(self) -> int:
        self.count += 1
        return self.count - 1

    def add(self, into: Entries, row: int | None, column: int | None, value: float) -> None:
        if row is not None and column is not None:
            into[row, column] = into.get((row, column), 0.0) + value

    def at(self, node: int) -> int | None:
        return self.places.get(node)

    def row(self, node: int) -> int | None:
        """Row of a node's current balance; none at a driven node."""
        return None if node in self.places and self.driven[node] else self.places.get(node)

    def branch(self, branch: Branch) -> None:
        inner = [self.fresh() for _ in branch.groups[1:]]
        ends = [(self.row(branch.i), self.at(branch.i)), *((k, k) for k in inner),
                (self.row(branch.j), self.at(branch.j))]
        for group, a, b in zip(branch.groups, ends, ends[1:], strict=False):
            for index in group:
                self.part(self.net.layout.parts[index].type, float(self.net.values[index]), a, b)

    def part(self, kind: str, value: float, a: tuple[int | None, int | None], b: tuple[int | None, int | None]) -> None:
        if kind == "C":
            for (row, own), (_, other) in ((a, b), (b, a)):
                self.add(self.c, row, own, value)
                self.add(self.c, row, other, -value)
            return
        q = self.fresh()
        self.add(self.g, a[0], q, 1.0)
        self.add(self.g, b[0], q, -1.0)
        self.add(self.g, q, a[1], 1.0)
        self.add(self.g, q, b[1], -1.0)
        self.add(self.g if kind == "R" else self.c, q, q, -value)

    def amplifiers(self) -> None:
        values = self.net.values
        for t in self.segment.transfers:
            for node, sign in ((t.output, 1.0), (t.lower, -1.0)):
                self.add(self.g, self.row(node), self.at(t.plus), sign * values[t.part])
                self.add(self.g, self.row(node), self.at(t.minus), -sign * values[t.part])
        for d in self.segment.drives:
            row = self.at(d.node)
            self.add(self.g, row, row, 1.0)
            self.add(self.g, row, self.at(d.plus), -values[d.gain])
            self.add(self.g, row, self.at(d.minus), values[d.gain])
        for storage in self.segment.storages:
            row, tau = self.at(storage.node), values[storage.part]
            if self.net.layout.parts[storage.part].role == "high":
                self.add(self.c, row, row, tau)
            else:  # V + w = gain·V_in with s·tau·w = V
                w = self.fresh()
                self.add(self.g, row, w, 1.0)
                self.add(self.g, w, row, -1.0)
                self.add(self.c, w, w, tau)


def _cofactor(net: Network, segment: Segment, s0: float) -> Cofactor:
    """A stage's equations without the input's row and the output's column, scaled at s0 (rad/s)."""
    equations = _Equations(net, segment)
    for branch in segment.branches:
        equations.branch(branch)
    equations.amplifiers()
    size = equations.count
    g, c = np.zeros((size, size)), np.zeros((size, size))
    for into, entries in ((g, equations.g), (c, equations.c)):
        for (i, j), value in entries.items():
            into[i, j] += value
    rows = [k for k in range(size) if k != equations.places[segment.before]]
    columns = [k for k in range(size) if k != equations.places[segment.after]]
    g, c = g[np.ix_(rows, columns)], c[np.ix_(rows, columns)]
    if not rows:
        return Cofactor(np.ones((1, 1)), np.zeros((1, 1)))
    for _ in range(3):
        for axis in (1, 0):
            largest = (np.abs(g) + s0 * np.abs(c)).max(axis=axis, keepdims=True)
            scale = np.where(largest > 0, 1.0 / np.where(largest > 0, largest, 1.0), 1.0)
            g, c = g * scale, c * scale
    return Cofactor(g, c)
