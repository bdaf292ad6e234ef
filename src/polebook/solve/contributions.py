"""What each part of a network weighs between two solutions of it, v and its adjoint u: -u·(X dM/dX)·v.

Divided by the transfer it is d ln H/d ln X (adjoint network); between the two patterns of a pole it is that pole's
derivative. An admittance between i and j weighs -(u_i - u_j)·(v_i - v_j)·X dy/dX, an impedance r·q·X dz/dX with the
currents r and q of its branch.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence

from polebook.circuit.elements import Branch
from polebook.circuit.views import Network, View, each_admittance, live
from polebook.stages.stamper import GROUND, Value


def contributions(net: Network, s: Value, v: Sequence[Value], u: Sequence[Value],
                  currents: Mapping[int, tuple[Value, Value]], view: View = "full",
                  resistive: bool = False) -> dict[int, Value]:
    """Weight of every C, L and time constant by part number; with `resistive` of R, gm and gains too.

    v and u by node number, at s (rad/s, scalar or array); currents by series branch, of v's and of u's solution.
    """
    layout = net.layout
    taken = [0.0 if driven else x for x, driven in zip(u, layout.driven, strict=False)]
    found: dict[int, Value] = {}
    for number, branch in enumerate(layout.branches):
        changes = branch_changes(net, branch, s, view, resistive)
        if not changes:
            continue
        if branch.series:
            q, r = currents[number]
            weight = q * r
        else:
            weight = -(_at(taken, branch.i) - _at(taken, branch.j)) * (_at(v, branch.i) - _at(v, branch.j))
        for index, change in changes:
            found[index] = found.get(index, 0.0) + weight * change
    for part, node, change in _storage_changes(net, s, view):
        found[part] = found.get(part, 0.0) - u[node] * v[node] * change
    if resistive:
        _active(net, v, u, taken, found)
    return found


def _active(net: Network, v: Sequence[Value], u: Sequence[Value], taken: Sequence[Value],
            found: dict[int, Value]) -> None:
    for segment in net.layout.segments:
        for t in segment.transfers:
            across = _at(v, t.plus) - _at(v, t.minus)
            found[t.part] = -(_at(taken, t.output) - _at(taken, t.lower)) * across * net.values[t.part]
        for d in segment.drives:
            found[d.gain] = u[d.node] * net.values[d.gain] * (_at(v, d.plus) - _at(v, d.minus))


def _storage_changes(net: Network, s: Value, view: View) -> list[tuple[int, int, Value]]:
    """(part, node, d ln tau's change of the node's own entry) of the storages that are live."""
    result = []
    for segment in net.layout.segments:
        for storage in segment.storages:
            tau = net.values[storage.part]
            part = net.layout.parts[storage.part]
            if live(part, view):
                change = s * tau if part.role == "high" else -1.0 / (s * tau)
                result.append((storage.part, storage.node, change))
    return result


def _at(values: Sequence[Value], node: int) -> Value:
    return 0.0 if node == GROUND else values[node]


def branch_changes(net: Network, branch: Branch, s: Value, view: View, resistive: bool) -> list[tuple[int, Value]]:
    """d(z or y)/d ln X of a branch, the one that it is carried as, for its live parts."""
    wanted = [index for group in branch.groups for index in group if resistive or net.layout.parts[index].type != "R"]
    if not wanted:
        return []
    sizes: list[Value] = []
    parallel = [each_admittance(net, group, s, view) for group in branch.groups]
    for group in parallel:
        total: Value = None if group is None else sum((y for _, y in group), 0.0)
        if total is not None and isinstance(total, float) and total == 0.0:
            return []  # open: nothing in it weighs
        sizes.append(0.0 if total is None else 1.0 / total)
    whole = sum(sizes)
    result: list[tuple[int, Value]] = []
    for group, z in zip(parallel, sizes, strict=True):
        for index, y in group or []:
            if index in wanted:
                change = z * z * (-y if net.layout.parts[index].type == "C" else y)
                result.append((index, change if branch.series else -change / (whole * whole)))
    return result

