"""Owned shares: how much of an edge each reactive part makes, by the exact derivative of the edge."""

from __future__ import annotations

from dataclasses import dataclass
from math import pi

from polebook.circuit.views import Network
from polebook.formula import Formula
from polebook.solve.contributions import contributions
from polebook.solve.fold import fold
from polebook.solve.transfer import adjoint, branch_currents, voltages

HOMOGENEITY = "implicit derivative of |H(f)| = |gain|/sqrt 2; all C, L and tau times x scale every f by 1/x, so " \
              "that the shares sum to 1 (Euler's theorem on homogeneous functions)"
FORMULAS = (
    Formula("parts.owns_upper", "-d ln f_H/d ln X of the exact upper edge", HOMOGENEITY),
    Formula("parts.owns_lower", "-d ln f_L/d ln X of the exact lower edge", HOMOGENEITY),
)


@dataclass(frozen=True, slots=True)
class Derivatives:
    """d ln H/d ln X at one frequency, complex, by part, for every C, L and time constant."""

    by_part: dict[int, complex]


def derivatives(net: Network, hz: float, resistive: bool = False) -> Derivatives:
    """One adjoint solution gives them all; with `resistive` those of R, gm and gains too."""
    s = 2j * pi * hz
    folded = fold(net, s, "full")
    output = net.layout.after[-1]
    v = voltages(folded)
    adj = adjoint(folded, output)
    each = contributions(net, s, v, adj.u, branch_currents(folded, v, adj), "full", resistive)
    return Derivatives({index: x / v[output] for index, x in each.items()})


def owned(net: Network, edge_hz: float | None) -> dict[int, float]:
    """Share of the edge at edge_hz (Hz) by part; they sum to 1. Empty where there is no edge."""
    if edge_hz is None:
        return {}
    slopes = {index: d.real for index, d in derivatives(net, edge_hz).by_part.items()}
    total = sum(slopes.values())
    return {index: slope / total for index, slope in slopes.items()} if total else {}
