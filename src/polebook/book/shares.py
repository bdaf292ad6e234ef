"""Owned shares: how much of an edge each reactive part makes, by the exact derivative of the edge."""

from __future__ import annotations

from dataclasses import dataclass
from math import pi

from polebook.circuit.views import Network
from polebook.formula import Formula
from polebook.solve.fold import fold
from polebook.solve.transfer import adjoint, branch_currents, voltages
from polebook.stages.stamper import GROUND

HOMOGENEITY = "implicit derivative of |H(f)| = |gain|/sqrt 2; all C, L and tau times λ scale every f by 1/λ, so " \
              "that the shares sum to 1 (Euler's theorem on homogeneous functions)"
FORMULAS = (
    Formula("parts.owns_upper", "-d ln f_H/d ln X of the exact upper edge", HOMOGENEITY),
    Formula("parts.owns_lower", "-d ln f_L/d ln X of the exact lower edge", HOMOGENEITY),
)


@dataclass(frozen=True, slots=True)
class Derivatives:
    """d ln H/d ln X at one frequency, complex, by part, for every C, L and time constant."""

    by_part: dict[int, complex]


def derivatives(net: Network, hz: float) -> Derivatives:
    """One adjoint solution gives them all."""
    s = 2j * pi * hz
    folded = fold(net, s, "full")
    layout = net.layout
    v = voltages(folded)
    adj = adjoint(folded, layout.after[-1])
    u = [0j if driven else x for x, driven in zip(adj.u, layout.driven, strict=False)]
    currents = branch_currents(folded, v, adj)
    h = v[layout.after[-1]]
    found: dict[int, complex] = {}
    for number, branch in enumerate(layout.branches):
        if branch.series:
            q, r = currents[number]
            weight = q * r
        else:
            weight = -(_at(u, branch.i) - _at(u, branch.j)) * (_at(v, branch.i) - _at(v, branch.j))
        for index, change in branch_changes(net, number, s):
            found[index] = found.get(index, 0j) + weight * change / h
    for segment in layout.segments:
        for storage in segment.storages:
            tau = net.values[storage.part]
            change = s * tau if layout.parts[storage.part].role == "high" else -1.0 / (s * tau)
            found[storage.part] = found.get(storage.part, 0j) - adj.u[storage.node] * v[storage.node] * change / h
    return Derivatives(found)


def _at(voltages: list[complex], node: int) -> complex:
    return 0j if node == GROUND else voltages[node]


def branch_changes(net: Network, number: int, s: complex) -> list[tuple[int, complex]]:
    """d(z or y)/d ln X of a branch, the one that it is carried as, for each C and L in it."""
    branch = net.layout.branches[number]
    result: list[tuple[int, complex]] = []
    reactive = [index for group in branch.groups for index in group if net.layout.parts[index].type != "R"]
    if not reactive:
        return result
    groups = [[(index, _admittance(net, index, s)) for index in group] for group in branch.groups]
    total = sum(1.0 / sum(y for _, y in parallel) for parallel in groups)
    for parallel in groups:
        z = 1.0 / sum(y for _, y in parallel)
        for index, y in parallel:
            kind = net.layout.parts[index].type
            if kind != "R":
                change = -z * z * (y if kind == "C" else -y)
                result.append((index, change if branch.series else -change / (total * total)))
    return result


def _admittance(net: Network, index: int, s: complex) -> complex:
    value, kind = net.values[index], net.layout.parts[index].type
    if kind == "R":
        return complex(1.0 / value)
    return complex(s * value if kind == "C" else 1.0 / (s * value))


def owned(net: Network, edge_hz: float | None) -> dict[int, float]:
    """Share of the edge at edge_hz (Hz) by part; they sum to 1. Empty where there is no edge."""
    if edge_hz is None:
        return {}
    slopes = {index: d.real for index, d in derivatives(net, edge_hz).by_part.items()}
    total = sum(slopes.values())
    return {index: slope / total for index, slope in slopes.items()} if total else {}
