"""Which parts make a pole: the derivative of its logarithm by every C, L and time constant.

At a pole p the network has a voltage pattern v without a source, and its adjoint one, u. With M(s) = G + sC
d ln p/d ln X = -(u·X dM/dX·v)/(u·s dM/ds·v), and the denominator is the sum of the numerators over all X.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np

from polebook.circuit.views import Network
from polebook.solve.contributions import contributions
from polebook.solve.determinant import compounds
from polebook.solve.fold import Folded, fold
from polebook.solve.poles import Poles, split
from polebook.solve.transfer import Adjoint, branch_currents

if TYPE_CHECKING:
    from polebook.solve.aberth import Complex

Voltages = list[Any]
ASIDE = 1e-13  # so that no pivot vanishes to the last digit
NEAR = 1e-4  # a pivot that is ten times as large this share of p away vanishes at p


@dataclass(slots=True)
class Modes:
    """Weight of every part in every pole, Re(-d ln p/d ln X), by part number: arrays over the poles. They sum to 1."""

    by_part: dict[int, Any]


def modes(net: Network, found: Poles) -> Modes:
    """Weights of all poles at once."""
    with np.errstate(all="ignore"):
        p = found.roots * (1.0 + ASIDE)
        folded = fold(net, p, "full")
        place = _places(net)
        root = _roots(folded, fold(net, p * (1.0 + NEAR), "full"), found, split(net).of_node, place)
        v, u = _patterns(folded, p, root, place)
        currents = _currents(folded, p, v, u, root)
        each = contributions(net, p, v, u, currents)
        total = sum(each.values())
        weights = {index: np.real(x / total) for index, x in each.items()}
        for k in np.nonzero(root < 0)[0]:
            _hanging(net, p[k], int(k), weights)
    return Modes({index: np.where(np.isfinite(w), w, 0.0) for index, w in weights.items()})


def _places(net: Network) -> list[int]:
    """Place of every node in the elimination, -1 for one that is never eliminated."""
    place, count = [-1] * len(net.layout.names), 0
    for steps in reversed(net.layout.steps):
        for step in steps:
            place[step.node] = count
            count += 1
    return place


def _roots(at: Folded, near: Folded, found: Poles, of_node: list[int], place: list[int]) -> Any:
    """For each pole the node whose pivot vanishes there, of its block the last one; -1 where none does."""
    root = np.full(found.roots.shape, -1)
    latest = np.full(found.roots.shape, -1)
    for taken, beside in zip(at.taken, near.taken, strict=True):
        for step, other in zip(taken, beside, strict=True):
            k = step.step.node
            vanishes = (np.abs(step.across) < 0.1 * np.abs(other.across)) & (found.block == of_node[k])
            better = vanishes & (place[k] > latest)
            root[better], latest[better] = k, place[k]
    return root


def _patterns(folded: Folded, p: Complex, root: Any, place: list[int]) -> tuple[Voltages, Voltages]:
    """Voltages of every node in the two patterns, 1 V at the block's last node."""
    count = len(folded.net.layout.names)
    zero = np.zeros(p.shape, dtype=complex)
    v: Voltages = [zero] * (count + 1)
    u: Voltages = [zero] * (count + 1)
    order = np.array([place[k] if k >= 0 else len(place) for k in root])
    for taken in folded.taken:
        for step in reversed(taken):
            k = step.step.node
            forward, back = zero, zero
            for j, t in zip(step.step.cols, step.t, strict=True):
                forward = forward + t * v[j]
            for i, x in zip(step.step.rows, step.a_ik, strict=True):
                if i < count:
                    back = back - x * step.own * u[i]
            if step.step.takes:
                back = back + step.share * u[step.step.parent]
            later = place[k] >= order
            v[k] = np.where(root == k, 1.0, np.where(later, 0.0, forward))
            u[k] = np.where(root == k, 1.0, np.where(later, 0.0, back))
    return v, u


def _currents(folded: Folded, p: Complex, v: Voltages, u: Voltages, root: Any) -> dict[int, tuple[Any, Any]]:
    """Currents of the series branches in both patterns."""
    result = branch_currents(folded, v, Adjoint(u, [np.zeros(p.shape)] * len(u)))
    for taken in folded.taken:
        for step in taken:
            at = step.step
            if at.branch >= 0:
                q, r = result[at.branch]
                own = step.share / step.own  # 1/z, where the branch's own node carries the pattern
                result[at.branch] = (np.where(root == at.node, own * v[at.node], q),
                                     np.where(root == at.node, own * u[at.node], r))
    return result


def _hanging(net: Network, p: complex, k: int, weights: dict[int, Any]) -> None:
    """A pole of an arm across an ideal source: its own parts alone make it."""
    shares: dict[int, float] = {}
    least = np.inf
    for branch in compounds(net.layout):
        if branch.series:
            continue
        z, slopes = 0j, {}
        for group in branch.groups:
            for index in group:
                kind, value = net.layout.parts[index].type, net.values[index]
                part = value if kind == "R" else p * value if kind == "L" else 1 / (p * value)
                z += part
                if kind != "R":
                    slopes[index] = part if kind == "L" else -part
        size = abs(z) / max(abs(x) for x in slopes.values())
        if size < least:
            least = size
            total = sum(slopes.values())
            shares = {index: float(np.real(part / total)) for index, part in slopes.items()}
    for index, weight in weights.items():
        weight[k] = shares.get(index, 0.0)
