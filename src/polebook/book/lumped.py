"""The nodes of the midband network, those that a short makes one taken as one, and what each capacitor puts on them."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

from polebook.book.solution import Solution
from polebook.circuit.views import impedance
from polebook.stages.stamper import GROUND

FAINT = 1e-12  # a node that hears less than this share of its site's loudest is left out of it


@dataclass(frozen=True, slots=True)
class Half:
    """What one capacitor puts on a node.

    part    number of the part in the layout;  other  the node at its other end
    k       V(other)/V(node); None where the other end is ground
    share   1 - k: how much of the capacitance lands here
    of_use  False for a negative half that is no input half of a bridge (the output half of a follower's): it is left
            out of the node's capacitance, so that a microhm between two nodes of a site moves nothing
    """

    part: int
    other: int
    k: float | None
    share: float
    of_use: bool


def merged(of: Solution) -> dict[int, int]:
    """Node -> a node that stands for all those that are one with it at midband."""
    layout = of.circuit.layout
    root = {k: k for k in range(GROUND, len(layout.names))}

    def find(k: int) -> int:
        while root[k] != k:
            k = root[k]
        return k

    for branch in layout.branches:
        if branch.series and impedance(of.circuit.network, branch, 0.0, "midband") == 0.0:
            root[find(branch.j)] = find(branch.i)
    return {k: find(k) for k in root}


class Lumped:
    """The midband nodes of the sites that `names` tells, node -> site."""

    def __init__(self, of: Solution, names: dict[int, str]) -> None:
        self.of, self.names = of, names
        layout = of.circuit.layout
        self.root = merged(of)
        self.volts = [*of.volts[:len(layout.names)], 0.0]  # the last is ground, number -1
        self.first: dict[int, int] = {}  # root -> a node of it that belongs to a site
        self.loudest: dict[str, float] = {}
        for node, name in names.items():
            self.first.setdefault(self.root[node], node)
            self.loudest[name] = max(self.loudest.get(name, 0.0), abs(self.volts[node]))
        self.stiff = {self.root[GROUND]} | {self.root[k] for k, driven in enumerate(layout.driven) if driven}

    def ohm(self, node: int) -> float:
        """Driving-point resistance, 0 where something drives the node."""
        return 0.0 if self.root[node] in self.stiff else float(self.of.inverse.point(node))

    def hears(self, node: int) -> bool:
        """Whether the signal at the node is not faint beside its site's."""
        return abs(self.volts[node]) >= FAINT * self.loudest[self.names[node]]

    def landings(self) -> Iterator[tuple[int, Half | None]]:
        """(node of a site, what a capacitor puts on it), of every capacitor and end; None where the node is silent."""
        layout, root, volts = self.of.circuit.layout, self.root, self.volts
        for branch in layout.branches:
            index = branch.groups[0][0]
            if not branch.single or branch.series or layout.parts[index].type != "C":
                continue
            for own, other in ((branch.i, branch.j), (branch.j, branch.i)):
                node = self.first.get(root[own], GROUND)
                if own == GROUND or node == GROUND or root[own] in (root[other], root[GROUND]):
                    continue
                if not volts[own]:
                    yield node, None
                    continue
                k = volts[other] / volts[own]
                of_use = k <= 1.0 or (branch.bridge and own == branch.i)
                yield node, Half(index, other, None if other == GROUND else k, 1.0 - k, of_use)

    def storages(self) -> Iterator[tuple[int, int, float]]:
        """(node, part, time constant in s with its loop closed) of every high-role storage."""
        layout, values = self.of.circuit.layout, self.of.circuit.network.values
        for segment in layout.segments:
            for storage in segment.storages:
                if layout.parts[storage.part].role == "high" and storage.node in self.names:
                    tau = float(values[storage.part] * self.of.inverse.own(storage.node))
                    yield storage.node, storage.part, tau
