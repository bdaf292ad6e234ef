"""det(G + sC) as a product of factors: the pivots of the elimination, and what they lack of it."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from polebook.circuit.elements import Branch
from polebook.circuit.layout import Layout
from polebook.circuit.views import Network, View, impedance, live
from polebook.solve.fold import Folded
from polebook.stages.stamper import GROUND, Value

if TYPE_CHECKING:  # numpy.typing costs 5 ms at start-up
    from numpy.typing import NDArray


def determinant(folded: Folded, s: Value, view: View = "full") -> NDArray[np.complex128]:
    """Factors of the determinant at s (rad/s, an array of any one-dimensional shape), (factors, points).

    First the pivot of every step, source's segment first; then one factor for each branch of several parts with a coil
    or capacitor (`compounds`). Powers of s are left away: `powers` counts them.
    """
    shape = s.shape
    rows = [np.broadcast_to(step.across, shape) for taken in folded.taken for step in taken]
    for branch in compounds(folded.net.layout):
        rows.append(np.broadcast_to(_denominator(folded.net, branch, s, view), shape))
    return np.array(rows, dtype=complex).reshape(len(rows), *shape)


def compounds(layout: Layout) -> list[Branch]:
    """Branches of several parts, coils or capacitors among them."""
    return [branch for branch in layout.branches if len(_kinds(layout, branch)) > 1 and _kinds(layout, branch) != {"R"}]


def _kinds(layout: Layout, branch: Branch, view: View = "full") -> set[str]:
    """R, C and L of a branch, those that store only where the view has them live."""
    parts = (layout.parts[index] for group in branch.groups for index in group)
    return {part.type for part in parts if part.type == "R" or live(part, view)}


def _denominator(net: Network, branch: Branch, s: Value, view: View) -> Value:
    """What a pivot is divided by where it holds this branch as z or y; 1 where the view leaves the branch open."""
    z = impedance(net, branch, s, view)
    if z is None or (isinstance(z, float) and z == 0.0):
        return 1.0
    kinds = _kinds(net.layout, branch, view)
    if branch.series:
        return (s if "L" in kinds else 1.0) / z
    return z * (s if "C" in kinds else 1.0)


def owners(layout: Layout) -> list[int]:
    """The node that each factor of `determinant` belongs to."""
    steps = [step for taken in layout.steps for step in taken]
    child = {step.branch: step.node for step in steps if step.branch >= 0}
    numbers = {id(branch): number for number, branch in enumerate(layout.branches)}
    result = [step.node for step in steps]
    for branch in compounds(layout):
        result.append(child[numbers[id(branch)]] if branch.series else across(layout, branch))
    return result


def across(layout: Layout, branch: Branch) -> int:
    """The end of an admittance branch whose row it stands in."""
    ends = [k for k in (branch.i, branch.j) if k != GROUND]
    return next((k for k in ends if not layout.driven[k]), ends[0])


def powers(layout: Layout, view: View = "full") -> dict[int, int]:
    """Powers of s by which the factors lack of the determinant, by node: one for each capacitor in series alone, each
    coil across alone, each washout, where the view has it live."""
    result: dict[int, int] = {}
    steps = {step.branch: step.node for taken in layout.steps for step in taken if step.branch >= 0}
    for number, branch in enumerate(layout.branches):
        if not branch.single:
            continue
        part = layout.parts[branch.groups[0][0]]
        if part.type == ("C" if branch.series else "L") and live(part, view):
            node = steps[number] if branch.series else across(layout, branch)
            result[node] = result.get(node, 0) + 1
    for _, signed in layout.stamps.washing if view in ("full", "lower") else ():
        node = layout.stamps.where[signed[0][0]][0]
        result[node] = result.get(node, 0) + 1
    return result
