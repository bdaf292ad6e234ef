"""Sites: an interstage node with all that a small series resistor would only seem to split off; their poles."""

from __future__ import annotations

from dataclasses import dataclass
from math import pi, sqrt

from polebook.book.lumped import Lumped
from polebook.book.solution import Solution
from polebook.circuit.layout import Layout
from polebook.formula import Formula
from polebook.solve.root import bracketed_root

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
    lumped = Lumped(of, names)
    taus, left_out = _taus(lumped)
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


def _taus(lumped: Lumped) -> tuple[dict[str, float], dict[str, list[str]]]:
    """tau by site, and the nodes that were left out of it."""
    layout, values = lumped.of.circuit.layout, lumped.of.circuit.network.values
    farads: dict[int, float] = {}
    for node, half in lumped.landings():
        landed = values[half.part] * half.share if half is not None and half.of_use else 0.0
        farads[node] = farads.get(node, 0.0) + landed
    taus: dict[str, float] = {}
    left_out: dict[str, list[str]] = {}
    for node, farad in farads.items():
        name = lumped.names[node]
        if lumped.hears(node):
            taus[name] = taus.get(name, 0.0) + lumped.ohm(node) * farad
        else:
            left_out.setdefault(name, []).append(layout.names[node])
    taus |= {lumped.names[node]: tau for node, _, tau in lumped.storages()}
    return taus, left_out


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
