"""Sites: an interstage node with all that a small series resistor would only seem to split off; their poles."""

from __future__ import annotations

from dataclasses import dataclass
from math import pi, sqrt

from polebook.book.solution import Solution
from polebook.circuit.layout import Layout
from polebook.circuit.views import impedance
from polebook.formula import Formula
from polebook.solve.root import bracketed_root
from polebook.stages.stamper import GROUND

SHRINKAGE = "product of buffered one-pole stages (P. R. Gray, P. J. Hurst, S. H. Lewis and R. G. Meyer, Analysis and " \
            "Design of Analog Integrated Circuits, 5th ed., Wiley, eq. 7.128 for two; from memory)"
FORMULAS = (
    Formula("nodes.pole_hz", "f_S = 1/(2·pi·tau_S), tau_S = sum of R_i·C_i over the site's nodes, C_i with its "
                             "Miller halves", "definition"),
    Formula("nodes.ohm", "V/I for a current into the node, midband", "definition"),
    Formula("nodes.farad", "tau_S/R", "definition"),
    Formula("nodes.room", "f_S/(f_a/sqrt(2^(1/n) - 1)), n the interstage sites with a pole", SHRINKAGE),
    Formula("overall.node_upper_hz", "the f at which the product of 1 + (f/f_S)^2 over the sites is 2", SHRINKAGE),
    Formula("overall.shrinkage", "exact upper edge/lowest site pole", "definition"),
)
IDEAL_OHM = 1e-9
FAINT = 1e-12


@dataclass(frozen=True, slots=True)
class Site:
    """ohm in Ω, farad in F, pole in Hz, None where there is none; left_out names nodes without a share in tau."""

    name: str
    stage: str
    interstage: bool
    ohm: float | None
    tau: float
    left_out: tuple[str, ...]

    @property
    def farad(self) -> float | None:
        return None if self.ohm is None or self.ohm < IDEAL_OHM else self.tau / self.ohm

    @property
    def pole_hz(self) -> float | None:
        return 1.0 / (2 * pi * self.tau) if self.tau > 0 else None


def interstage_names(layout: Layout) -> dict[int, str]:
    """Node -> n0, n1 ... or load; a node that several lines share keeps the lowest number."""
    names: dict[int, str] = {}
    last = len(layout.segments) - 1
    for index, node in enumerate(layout.after):
        names.setdefault(node, f"n{index}" if index != last else "load")
    return names


def site_names(layout: Layout) -> dict[int, str]:
    """Node -> the site that it belongs to; nodes of no site are missing."""
    between = interstage_names(layout)
    result = dict(between)
    for segment in layout.segments:
        for node in segment.nodes:
            label = layout.recorder.sites[node]
            if node in result or not label:
                continue
            if label in ("in", "out"):
                result[node] = between[segment.before if label == "in" else segment.after]
            else:
                result[node] = f"{segment.name}.{label}"
    return result


def sites(of: Solution) -> list[Site]:
    """Every site with a pole or a place between the stages: interstage ones in order first, inner ones after."""
    layout = of.circuit.layout
    names, between = site_names(layout), interstage_names(layout)
    owner = {between[node]: layout.segments[index].name for index, node in reversed(list(enumerate(layout.after)))}
    lumped = _Lumped(of, names)
    taus, left_out = lumped.taus()
    result = [Site(name, owner[name], True, lumped.ohm(node), taus.get(name, 0.0), tuple(left_out.get(name, ())))
              for node, name in between.items()]
    storages = {storage.node for segment in layout.segments for storage in segment.storages}
    seen = set(owner)
    for node, name in names.items():
        if name not in seen and (node not in storages or name in taus):
            seen.add(name)
            ohm = None if node in storages else lumped.ohm(node)
            result.append(Site(name, name.partition(".")[0], False, ohm, taus.get(name, 0.0),
                               tuple(left_out.get(name, ()))))
    return result


class _Lumped:
    """The nodes of the midband network: those that a short makes one are one."""

    def __init__(self, of: Solution, names: dict[int, str]) -> None:
        self.of, self.names = of, names
        layout = of.circuit.layout
        self.root = _merge(of)
        self.first: dict[int, int] = {}  # root -> a node of it that belongs to a site
        for node in names:
            self.first.setdefault(self.root[node], node)
        self.stiff = {self.root[GROUND]} | {self.root[k] for k, driven in enumerate(layout.driven) if driven}

    def ohm(self, node: int) -> float:
        """Driving-point resistance, 0 where something drives the node."""
        return 0.0 if self.root[node] in self.stiff else float(self.of.inverse.point(node))

    def taus(self) -> tuple[dict[str, float], dict[str, list[str]]]:
        """tau by site, and the nodes that were left out of it."""
        layout, net = self.of.circuit.layout, self.of.circuit.network
        volts = [*self.of.volts[:len(layout.names)], 0.0]  # the last is ground, number -1
        loudest: dict[str, float] = {}
        for node, name in self.names.items():
            loudest[name] = max(loudest.get(name, 0.0), abs(volts[node]))
        taus: dict[str, float] = {}
        left_out: dict[str, list[str]] = {}
        for group, farad in self._farads(volts).items():
            node = self.first.get(group, GROUND)
            if node == GROUND or group == self.root[GROUND]:
                continue
            name = self.names[node]
            if abs(volts[node]) < FAINT * loudest[name]:
                left_out.setdefault(name, []).append(layout.names[node])
            else:
                taus[name] = taus.get(name, 0.0) + self.ohm(node) * farad
        for segment in layout.segments:
            for storage in segment.storages:
                if layout.parts[storage.part].role == "high" and storage.node in self.names:
                    own = self.of.inverse.own(storage.node)
                    taus[self.names[storage.node]] = float(net.values[storage.part] * own)
        return taus, left_out

    def _farads(self, volts: list[float]) -> dict[int, float]:
        """Capacitance of each midband node to ground, with the Miller halves of what floats; 0 where it hears nothing.

        A half below zero (the output half of a follower's bridge) is of no use for an estimate and is left away, save
        the input half of a bridge: so a resistor of a microhm between two nodes of a site moves nothing.
        """
        layout, net, root = self.of.circuit.layout, self.of.circuit.network, self.root
        farads: dict[int, float] = {}
        for branch in layout.branches:
            index = branch.groups[0][0]
            if not branch.single or branch.series or layout.parts[index].type != "C":
                continue
            for own, other in ((branch.i, branch.j), (branch.j, branch.i)):
                if root[own] != root[other] and own != GROUND:
                    share = 1.0 - volts[other] / volts[own] if volts[own] else 0.0
                    if share < 0.0 and not (branch.bridge and own == branch.i):
                        share = 0.0
                    farads[root[own]] = farads.get(root[own], 0.0) + net.values[index] * share
        return farads


def _merge(of: Solution) -> dict[int, int]:
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


def node_estimate(poles_hz: list[float]) -> float | None:
    """The f (Hz) at which buffered poles together lose 3 dB; None without poles."""
    if not poles_hz:
        return None
    lowest, count = min(poles_hz), len(poles_hz)

    def excess(f: float) -> float:
        product = 1.0
        for pole in poles_hz:
            product *= 1.0 + (f / pole) ** 2
        return product - 2.0

    low = lowest * sqrt(2.0 ** (1.0 / count) - 1.0)
    return bracketed_root(excess, 0.999 * low, 1.001 * lowest, excess(0.999 * low), excess(1.001 * lowest), 1e-15)


def equal_stage_pole(edge_hz: float, count: int) -> float:
    """Pole (Hz) that each of `count` like buffered stages needs for an edge at edge_hz."""
    return edge_hz / sqrt(2.0 ** (1.0 / count) - 1.0)
