"""How far a sweep must reach: the fastest and the slowest corner that any part of the network can make."""

from __future__ import annotations

from collections.abc import Iterable
from math import isfinite, pi, sqrt

from polebook.circuit.elements import Branch
from polebook.circuit.views import Network
from polebook.stages.stamper import GROUND

MARGIN = 300.0
LEAST_HZ, MOST_HZ = 1e-20, 1e25  # no part acts beyond these; past them only rounding would be swept


def span(net: Network, taus: Iterable[float]) -> tuple[float, float]:
    """(low, high) in Hz, a good two decades beyond every corner.

    taus are time constants in seconds (those of the open- and short-circuit sums). Beside them stand, for every
    node, its conductances over its capacitance, and for every branch in series what it makes with its ends.
    """
    conductance, capacitance = _nodes(net)
    rates = [1.0 / tau for tau in taus if tau > 0 and isfinite(1.0 / tau)]
    rates += [g / capacitance[k] for k, g in conductance.items() if g > 0 and capacitance.get(k, 0.0) > 0]
    for branch in net.layout.branches:
        ends = [k for k in (branch.i, branch.j) if k != GROUND]
        g = [conductance.get(k, 0.0) for k in ends]
        c = [capacitance.get(k, 0.0) for k in ends]
        rates += _branch_rates(net, branch, [x for x in g if x > 0], [x for x in c if x > 0])
    rates = [rate for rate in rates if rate > 0 and isfinite(rate)] or [2 * pi * 1e3]
    low, high = min(rates) / (2 * pi * MARGIN), max(rates) * MARGIN / (2 * pi)
    return max(low, LEAST_HZ), max(min(high, MOST_HZ), 10 * max(low, LEAST_HZ))


def _nodes(net: Network) -> tuple[dict[int, float], dict[int, float]]:
    """Sum of the conductances in each node's row, and its capacitance."""
    conductance: dict[int, float] = {}
    capacitance: dict[int, float] = {}
    for (i, j), g, c in zip(net.layout.stamps.where, net.conductance, net.storing, strict=True):
        conductance[i] = conductance.get(i, 0.0) + abs(g)
        if i == j:
            capacitance[i] = capacitance.get(i, 0.0) + c
    return conductance, capacitance


def _branch_rates(net: Network, branch: Branch, g: list[float], c: list[float]) -> list[float]:
    values: dict[str, list[float]] = {"R": [], "C": [], "L": []}
    for group in branch.groups:
        for index in group:
            values[net.layout.parts[index].type].append(net.values[index])
    ohms = values["R"] + [1.0 / x for x in g]
    rates = [1.0 / (r * x) for r in values["R"] for x in c]
    rates += [1.0 / (r * x) for r in ohms for x in values["C"] if not (branch.single and branch.series is False)]
    rates += [r / x for r in ohms for x in values["L"]]
    rates += [1.0 / sqrt(x * y) for x in values["L"] for y in c + values["C"]]
    return rates
