"""What loads the output of a stage at midband where its own device is taken out: the slope of its a.c. load line."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass

from polebook.book.solution import Solution
from polebook.circuit.elements import Branch, Segment
from polebook.circuit.views import impedance
from polebook.stages.stamper import GROUND


@dataclass(frozen=True, slots=True)
class Seen:
    """A resistance in Ω (None: open), and what 1 V at the node drives into each branch there, in A."""

    ohm: float | None
    into: tuple[tuple[Branch, float], ...]
    onward: float  # into what follows


def without_device(of: Solution, index: int) -> Seen:
    """Midband resistance at the node behind a stage whose output device is taken out whole.

    What is ahead counts by its output resistance, what follows by its input resistance. Nodes are eliminated as
    stars into meshes of conductances, which takes no differences: no resistor is too small or too large for it.
    """
    layout = of.circuit.layout
    segment = layout.segments[index]
    branches = [(branch, z) for branch, z in _standing(of, segment)]
    root = _joined(branches)
    node, mesh = root(segment.after), dict[int, dict[int, float]]()

    def add(i: int, j: int, siemens: float) -> None:
        if i != j:
            for a, b in ((i, j), (j, i)):
                mesh.setdefault(a, {})[b] = mesh.get(a, {}).get(b, 0.0) + siemens

    for branch, z in branches:
        if z:
            add(root(branch.i), root(branch.j), 1.0 / z)
    onward = float(of.midband.inputs[index + 1] or 0.0)
    add(node, GROUND, onward)
    ahead = of.open_lines[index - 1].output_ohm
    if ahead:
        add(root(segment.before), GROUND, 1.0 / ahead)
    if node == root(GROUND):
        return Seen(0.0, (), 0.0)
    grounded = {GROUND, root(GROUND)} | ({root(segment.before)} if ahead == 0.0 else set())
    taken = _stars(mesh, [k for k in mesh if k != node and k not in grounded])
    total = sum(siemens for other, siemens in mesh.get(node, {}).items() if other in grounded)
    volts = {node: 1.0, **dict.fromkeys(grounded, 0.0)}
    for star, arms in reversed(taken):
        if arms:
            volts[star] = sum(s * volts.get(other, 0.0) for other, s in arms.items()) / sum(arms.values())
    into = tuple((branch, (1.0 - volts.get(root(branch.j if root(branch.i) == node else branch.i), 1.0)) / z)
                 for branch, z in branches if z and node in (root(branch.i), root(branch.j)))
    return Seen(1.0 / total if total else None, into, onward)


def _standing(of: Solution, segment: Segment) -> Iterator[tuple[Branch, float]]:
    """The branches of a stage that carry current at midband, those of the device at its output left out."""
    after = "_upper" if segment.kind == "cascode" else ""
    own = {name + after for name in ("rx", "rpi", "ro")}
    for branch in segment.branches:
        part = of.circuit.layout.parts[branch.groups[0][0]]
        z = impedance(of.circuit.network, branch, 0.0, "midband")
        if z is not None and part.name not in own:
            yield branch, float(z)


def _joined(branches: list[tuple[Branch, float]]) -> Callable[[int], int]:
    """Node -> the node that stands for all that shorts make one with it; ground stands for its own."""
    parent: dict[int, int] = {}

    def root(node: int) -> int:
        while parent.get(node, node) != node:
            node = parent[node]
        return node

    for branch, z in branches:
        if z == 0.0:
            i, j = sorted((root(branch.i), root(branch.j)))
            parent[j] = i  # ground, the lowest number, stays
    return root


def _stars(mesh: dict[int, dict[int, float]], nodes: list[int]) -> list[tuple[int, dict[int, float]]]:
    """Eliminates nodes in place; returns each with the conductances that it had."""
    taken = []
    for node in nodes:
        arms = mesh.pop(node)
        total = sum(arms.values())
        for i, a in arms.items():
            mesh[i].pop(node)
            for j, b in arms.items():
                if i < j:
                    for k, m in ((i, j), (j, i)):
                        mesh[k][m] = mesh[k].get(m, 0.0) + a * b / total
        taken.append((node, arms))
    return taken
