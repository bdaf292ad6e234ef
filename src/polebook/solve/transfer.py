"""Node voltages of a folded network, and its adjoint: what a current into any node does at the output.

Between them they give the derivative of the transfer to any element by one product (the adjoint network;
S. W. Director and R. A. Rohrer, 1969, from memory): for an admittance y between i and j
dH = -(u_i - u_j)·(v_i - v_j)·dy, for an impedance z in a branch that carries r and q in the two solutions dH = r·q·dz.
"""

from __future__ import annotations

from dataclasses import dataclass

from polebook.solve.fold import Folded, Taken
from polebook.stages.stamper import GROUND, Value


def voltages(folded: Folded) -> list[Value]:
    """Voltage of every node for 1 V of EMF (or 1 A of a current source), by node number."""
    layout = folded.net.layout
    v: list[Value] = [0.0] * (len(layout.names) + 1)
    v[layout.known] = 1.0
    for index, taken in enumerate(folded.taken):
        for step in reversed(taken):
            total: Value = 0.0
            for j, t in zip(step.step.cols, step.t, strict=True):
                total = total + t * v[j]
            if index == 0 and layout.emf == GROUND and step.step.node == layout.after[0]:
                total = total + step.own
            v[step.step.node] = total
    return v


@dataclass(slots=True)
class Adjoint:
    """u: voltage at the output for 1 A into each node (driven: for 1 V more in its equation); b: currents folded on."""

    u: list[Value]
    b: list[Value]


def adjoint(folded: Folded, output: int) -> Adjoint:
    """The adjoint solution of a folded network for the voltage at node `output`, ohms, by node number."""
    layout = folded.net.layout
    count = len(layout.names)
    b: list[Value] = [0.0] * (count + 1)
    b[output] = 1.0
    for taken in reversed(folded.taken):
        for step in taken:
            x = b[step.step.node]
            if isinstance(x, float) and x == 0.0:
                continue
            for j, t in zip(step.step.cols, step.t, strict=True):
                b[j] = b[j] + t * x
    u: list[Value] = [0.0] * (count + 1)
    if layout.emf != GROUND:
        u[layout.emf] = b[layout.emf]
    for taken in folded.taken:
        for step in reversed(taken):
            u[step.step.node] = _answer(step, b, u)
    return Adjoint(u, b)


def _answer(taken: Taken, b: list[Value], u: list[Value]) -> Value:
    step = taken.step
    total = taken.own * b[step.node]
    for i, x in zip(step.rows, taken.a_ik, strict=True):
        if i < len(u) - 1:
            total = total - x * taken.own * u[i]
    if step.takes:
        total = total + taken.share * u[step.parent]
    return total


def branch_currents(folded: Folded, v: list[Value], adj: Adjoint) -> dict[int, tuple[Value, Value]]:
    """Current of every series branch in both solutions, by branch: free of the difference of two near voltages."""
    result: dict[int, tuple[Value, Value]] = {}
    u, count = adj.u, len(adj.u) - 1
    for taken in folded.taken:
        for step in taken:
            at = step.step
            if at.branch < 0:
                continue
            q = step.a_kk * v[at.parent] if at.parent != GROUND else 0.0
            r = step.a_kk * u[at.parent] - adj.b[at.node] if at.takes else -adj.b[at.node]
            for j, x in zip(at.cols, step.a_kj, strict=True):
                q = q + x * v[j]
            for i, x in zip(at.rows, step.a_ik, strict=True):
                if i < count:
                    r = r + x * u[i]
            result[at.branch] = (-step.share * q, -step.share * r)
    return result
