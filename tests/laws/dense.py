"""The network of a layout as one dense pencil G + sC, built without any of the elimination's steps.

Every resistor and inductor has a current of its own, so that no value is ever inverted.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from polebook.circuit.elements import Branch
from polebook.circuit.views import Network

Entries = dict[tuple[int, int], float]


@dataclass
class Pencil:
    """(G + sC)·x = rhs; `output` is the place of the load's voltage in x."""

    g: NDArray[np.float64]
    c: NDArray[np.float64]
    rhs: NDArray[np.float64]
    output: int

    def transfer(self, hz: float) -> complex:
        matrix = self.g + 2j * np.pi * hz * self.c
        rows = 1.0 / np.abs(matrix).max(axis=1)
        columns = 1.0 / np.abs(matrix * rows[:, None]).max(axis=0)
        scaled = matrix * rows[:, None] * columns
        return complex((np.linalg.solve(scaled, self.rhs * rows) * columns)[self.output])


class _Builder:
    def __init__(self, net: Network) -> None:
        self.net, self.layout = net, net.layout
        self.nodes = len(self.layout.names)
        self.count = self.nodes
        self.g: Entries = {}
        self.c: Entries = {}

    def new(self) -> int:
        self.count += 1
        return self.count - 1

    def add(self, into: Entries, i: int, j: int, value: float) -> None:
        if i >= 0 and j >= 0:
            into[i, j] = into.get((i, j), 0.0) + value

    def balance(self, into: Entries, i: int, j: int, value: float) -> None:
        """An entry of node i's current balance; a driven node has none."""
        if i >= self.nodes or (i >= 0 and not self.layout.driven[i]):
            self.add(into, i, j, value)

    def branch(self, branch: Branch) -> None:
        nodes = [branch.i, *(self.new() for _ in branch.groups[1:]), branch.j]
        for group, a, b in zip(branch.groups, nodes, nodes[1:], strict=False):
            for index in group:
                self.part(self.layout.parts[index].type, float(self.net.values[index]), a, b)

    def part(self, kind: str, value: float, a: int, b: int) -> None:
        if kind == "C":
            for x, y in ((a, b), (b, a)):
                self.balance(self.c, x, x, value)
                self.balance(self.c, x, y, -value)
            return
        q = self.new()
        self.balance(self.g, a, q, 1.0)
        self.balance(self.g, b, q, -1.0)
        self.add(self.g, q, a, 1.0)
        self.add(self.g, q, b, -1.0)
        self.add(self.g if kind == "R" else self.c, q, q, -value)


def pencil(net: Network) -> Pencil:
    """The full network as a dense pencil."""
    build, layout = _Builder(net), net.layout
    _stamped(build, range(len(layout.segments)))
    if layout.emf >= 0:
        build.add(build.g, layout.emf, layout.emf, 1.0)
    rhs = np.zeros(build.count)
    rhs[layout.emf if layout.emf >= 0 else layout.after[0]] = 1.0
    return Pencil(*_matrices(build), rhs, layout.after[-1])


def impedance(net: Network, lines: range, node: int, hz: float) -> complex:
    """Ohms at a node of the network of some lines alone, in a row; a line of the source has no EMF."""
    build, layout = _Builder(net), net.layout
    _stamped(build, lines)
    if layout.emf >= 0 and 0 in lines:
        build.add(build.g, layout.emf, layout.emf, 1.0)
    rhs = np.zeros(build.count)
    rhs[node] = 1.0
    g, c = _matrices(build)
    for k in np.nonzero(~(g.any(axis=1) | c.any(axis=1)))[0]:
        g[k, k] = 1.0  # a node of a line that is not there
    return Pencil(g, c, rhs, node).transfer(hz)


def _stamped(build: _Builder, lines: range) -> None:
    """Every element of those lines."""
    net, layout = build.net, build.layout
    for index in lines:
        segment = layout.segments[index]
        for branch in segment.branches:
            build.branch(branch)
        for t in segment.transfers:
            for row, sign in ((t.output, 1.0), (t.lower, -1.0)):
                build.balance(build.g, row, t.plus, sign * net.values[t.part])
                build.balance(build.g, row, t.minus, -sign * net.values[t.part])
        for d in segment.drives:
            build.add(build.g, d.node, d.node, 1.0)
            build.add(build.g, d.node, d.plus, -net.values[d.gain])
            build.add(build.g, d.node, d.minus, net.values[d.gain])
        for storage in segment.storages:
            tau = net.values[storage.part]
            if layout.parts[storage.part].role == "high":
                build.add(build.c, storage.node, storage.node, tau)
            else:  # V + w = gain·V_in with s·tau·w = V
                w = build.new()
                build.add(build.g, storage.node, w, 1.0)
                build.add(build.g, w, storage.node, -1.0)
                build.add(build.c, w, w, tau)


def _matrices(build: _Builder) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    g, c = np.zeros((build.count, build.count)), np.zeros((build.count, build.count))
    for into, entries in ((g, build.g), (c, build.c)):
        for (i, j), value in entries.items():
            into[i, j] += value
    return g, c
