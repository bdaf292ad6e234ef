"""Elimination of the network from load to source: the gains of its lines, and all that other solutions need.

The values may be floats, complex numbers or arrays of them (frequencies, builds): the steps are the same.
"""

from __future__ import annotations

from dataclasses import dataclass

from polebook.circuit.layout import Layout
from polebook.circuit.schedule import Step
from polebook.circuit.views import Network, View, entry_values, series_values
from polebook.stages.stamper import GROUND, Value


class NotHeld(ArithmeticError):
    """A node of the midband network that nothing holds: no conductance from it to anywhere."""

    def __init__(self, node: int) -> None:
        super().__init__(node)
        self.node = node


@dataclass(slots=True)
class Taken:
    """What is kept of one step: V_k = sum t_j·V_j, a current into k acts as s_i on its neighbours' rows.

    own    impedance that a current into the node meets before its neighbours
    across pivot of the step (1 + z·A_kk, or A_kk)
    a_kk, a_kj  the row as it stood, for the current of the branch
    """

    step: Step
    own: Value
    across: Value
    share: Value  # p
    t: list[Value]
    a_kk: Value
    a_kj: list[Value]
    a_ik: list[Value]


@dataclass(slots=True)
class Folded:
    """The network folded into its source.

    taken      by segment, in the order of elimination
    gains      V(after)/V(before) by segment, of those that were folded; for the source V(n0) per volt of EMF or ampere
    inputs     admittance into the segment at its input with what follows attached; None for the source
    """

    net: Network
    taken: list[list[Taken]]
    gains: list[Value]
    inputs: list[Value | None]


def fold(net: Network, s: Value, view: View, lines: int | None = None) -> Folded:
    """Eliminates from load to source at s (rad/s, scalar or array). Raises NotHeld for a floating node.

    lines  of so many, source first; all that follows them is taken away. None: of the whole chain
    """
    layout = net.layout
    count = len(layout.segments) if lines is None else lines
    a: list[Value] = [0.0] * layout.slots
    entries = entry_values(net, s, view)
    series = series_values(net, s, view)
    slot_of, ranges = layout.stamps.slot_of, layout.stamps.ranges
    taken: list[list[Taken]] = [[] for _ in layout.segments]
    inputs: list[Value | None] = [None] * len(layout.segments)
    for index in range(count - 1, -1, -1):
        start, end = ranges[index]
        for entry in range(start, end):
            slot = slot_of[entry]
            a[slot] = a[slot] + entries[entry]
        taken[index] = [eliminate(a, step, series) for step in layout.steps[index]]
        if index:
            inputs[index] = a[layout.diagonal[index - 1]]
    gains = [segment_gain(layout, index, taken[index]) for index in range(count)]
    return Folded(net, taken, gains, inputs)


def eliminate(a: list[Value], step: Step, series: list[Value]) -> Taken:
    """One step, in place on the matrix entries."""
    a_kk = a[step.diag]
    a_kj = [a[slot] if slot >= 0 else 0.0 for slot in step.col_slots]
    if step.branch >= 0:
        z = series[step.branch]
        pivot = 1.0 + z * a_kk
        p: Value = 1.0 / pivot
        w = z * p
    else:
        pivot, p = a_kk, 0.0
        if isinstance(a_kk, float) and a_kk == 0.0:
            raise NotHeld(step.node)
        w = 1.0 / a_kk
    t = [-w * x for x in a_kj]
    if step.parent != GROUND:
        t[-1] = t[-1] + p
    a_ik = [a[slot] for slot in step.row_slots]
    for x, slots in zip(a_ik, step.targets, strict=True):
        for slot, t_j in zip(slots, t, strict=True):
            a[slot] = a[slot] + x * t_j
    if step.parent_slots:
        for slot, x in zip(step.parent_slots, a_kj, strict=True):
            a[slot] = a[slot] + p * x
        last = step.parent_slots[-1]
        a[last] = a[last] + p * a_kk
    return Taken(step, w, pivot, p, t, a_kk, a_kj, a_ik)


def segment_gain(layout: Layout, index: int, taken: list[Taken]) -> Value:
    """V(after)/V(before) of a folded segment."""
    segment = layout.segments[index]
    if index and segment.after == segment.before:
        return 1.0
    if not index and layout.emf == GROUND:
        return taken[-1].own  # ohms: the whole network seen by the current
    origin = segment.before if index else layout.emf
    if segment.after == origin:
        return 1.0
    return local_voltages(taken, {origin: 1.0})[segment.after]


def local_voltages(taken: list[Taken], known: dict[int, Value]) -> dict[int, Value]:
    """Node voltages of a segment from those of the nodes that remain, by back substitution."""
    for step in reversed(taken):
        total: Value = 0.0
        for j, t in zip(step.step.cols, step.t, strict=True):
            total = total + t * known[j]
        known[step.step.node] = total
    return known
