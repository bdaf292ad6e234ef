"""What each capacitor puts on each site: its value or its Miller half, the resistance there, and the time constant.

The parts of a site's time constant, as `sites` sums them, one by one.
"""

from __future__ import annotations

from dataclasses import dataclass

from polebook.book.sites import FAINT, site_names
from polebook.book.solution import Solution
from polebook.circuit.views import impedance
from polebook.stages.stamper import GROUND


@dataclass(frozen=True, slots=True)
class Landed:
    """One capacitor at one node of a site. For a storage only `tau` has a value.

    part   number of the part in the layout
    node   name of the network's node that it lands on
    k      V(other end)/V(node); None where the other end is ground
    farad  how much of it lands there, F;  ohm  driving-point resistance there, Ω;  tau  their product, s
    """

    part: int
    node: str
    k: float | None
    farad: float | None
    ohm: float | None
    tau: float


def landed(of: Solution) -> dict[str, list[Landed]]:
    """By site, the greatest time constant first; `sites.Site.tau` is their sum."""
    layout, net = of.circuit.layout, of.circuit.network
    names = site_names(layout)
    volts = [*of.volts[:len(layout.names)], 0.0]  # the last is ground, number -1
    root = _one(of)
    stands: dict[int, int] = {}  # root -> a node of it that belongs to a site
    loudest: dict[str, float] = {}
    for node, name in names.items():
        stands.setdefault(root[node], node)
        loudest[name] = max(loudest.get(name, 0.0), abs(volts[node]))
    stiff = {root[GROUND]} | {root[k] for k, driven in enumerate(layout.driven) if driven}
    found: dict[str, list[Landed]] = {}
    for branch in layout.branches:
        part = branch.groups[0][0]
        if not branch.single or branch.series or layout.parts[part].type != "C":
            continue
        for own, other in ((branch.i, branch.j), (branch.j, branch.i)):
            node = stands.get(root[own], GROUND)
            if own == GROUND or root[own] in (root[other], root[GROUND]) or node == GROUND:
                continue
            share = 1.0 - volts[other] / volts[own] if volts[own] else 0.0
            counts = share > 0.0 or (share < 0.0 and branch.bridge and own == branch.i)
            if not counts or abs(volts[node]) < FAINT * loudest[names[node]]:
                continue
            ohm = 0.0 if root[node] in stiff else float(of.inverse.point(node))
            farad = float(net.values[part]) * share
            k = None if other == GROUND else volts[other] / volts[own]
            found.setdefault(names[node], []).append(Landed(part, layout.names[node], k, farad, ohm, ohm * farad))
    for segment in layout.segments:
        for storage in segment.storages:
            if layout.parts[storage.part].role == "high" and storage.node in names:
                tau = float(net.values[storage.part] * of.inverse.own(storage.node))
                found[names[storage.node]] = [Landed(storage.part, layout.names[storage.node], None, None, None, tau)]
    return {name: sorted(each, key=lambda one: -abs(one.tau)) for name, each in found.items()}


def _one(of: Solution) -> dict[int, int]:
    """Node -> a node that stands for all those that a short at midband makes one with it."""
    root = {k: k for k in range(GROUND, len(of.circuit.layout.names))}

    def find(k: int) -> int:
        while root[k] != k:
            k = root[k]
        return k

    for branch in of.circuit.layout.branches:
        if branch.series and impedance(of.circuit.network, branch, 0.0, "midband") == 0.0:
            root[find(branch.j)] = find(branch.i)
    return {k: find(k) for k in root}
