"""How the output noise moves with every element, by one more solution: all sources act at once, each as strong as its
part in the output noise.

With T_k the transfer of source k and weights c_k = S_k·conj(T_k), the sum of c_k·dT_k/d ln X over all k is for each
element X the product of its adjoint and its forward voltage, the forward ones in the network that is driven by the
c_k (B. D. H. Tellegen's theorem; S. W. Director and R. A. Rohrer, 1969, from memory). A source inside a branch drives
it from within, so that each of its parts sees a voltage of its own.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field

from polebook.circuit.elements import Branch
from polebook.circuit.noise import Sources
from polebook.circuit.views import Network, admittance, each_admittance
from polebook.solve.fold import Folded
from polebook.solve.noise import at, gain_of, hung, impedances, quiet
from polebook.solve.transfer import Adjoint, branch_currents
from polebook.stages.stamper import GROUND, Value


@dataclass(slots=True)
class _Drive:
    """All sources, as the elimination takes them.

    rhs      current into each node, for a driven one what is added to its equation
    inside   branch -> current that flows across each of its groups
    ahead    branch -> voltage in series with it, added at its end i
    control  driven node -> voltage added to its control
    """

    rhs: list[Value]
    inside: dict[int, list[Value]] = field(default_factory=dict)
    ahead: dict[int, Value] = field(default_factory=dict)
    control: dict[int, Value] = field(default_factory=dict)
    emf: dict[int, Value] = field(default_factory=dict)  # of series branches


def slopes(folded: Folded, adj: Adjoint, s: Value, of: Sources, weights: Sequence[Value]) -> dict[int, Value]:
    """Sum over all sources of weight·dT/d ln X by part number, of every R, C, L, gm, gain and time constant.

    s in rad/s, a scalar. The sources' own strengths stand still.
    """
    net = folded.net
    drive = _driven(net, s, of, weights)
    v, q = _forward(folded, drive)
    returning = {number: r for number, (_, r) in branch_currents(folded, v, adj).items()}
    u, found = quiet(net, adj.u), dict[int, Value]()
    for number, branch in enumerate(net.layout.branches):
        _branch(net, (number, branch), s, drive, (u, v), (q, returning), found)
    for segment in net.layout.segments:
        for t in segment.transfers:
            found[t.part] = -(at(u, t.output) - at(u, t.lower)) * (at(v, t.plus) - at(v, t.minus)) * net.values[t.part]
        for d in segment.drives:
            across = at(v, d.plus) - at(v, d.minus) + drive.control.get(d.node, 0.0)
            found[d.gain] = adj.u[d.node] * net.values[d.gain] * across
        for storage in segment.storages:
            tau = s * net.values[storage.part]
            change = tau if net.layout.parts[storage.part].role == "high" else -1.0 / tau
            found[storage.part] = -adj.u[storage.node] * v[storage.node] * change
    return found


def _branch(net: Network, numbered: tuple[int, Branch], s: Value, drive: _Drive,
            solutions: tuple[Sequence[Value], Sequence[Value]],
            currents: tuple[dict[int, Value], dict[int, Value]], found: dict[int, Value]) -> None:
    """Every part of a branch: minus its adjoint voltage times its forward one times its admittance."""
    number, branch = numbered
    (u, v), (q, returning) = solutions, currents
    if any(y == 0.0 for y in (admittance(net, group, s, "full") for group in branch.groups)):
        return  # open, as ro of a device that is cut off: nothing flows in it
    sizes = impedances(net, branch, s)
    inside = drive.inside.get(number) or [0.0] * len(sizes)
    if branch.series:
        forward, back = q[number], returning[number]
    else:
        whole = sum(sizes)
        across = at(v, branch.i) - at(v, branch.j) + drive.ahead.get(number, 0.0)
        forward = (across - sum(i * z for i, z in zip(inside, sizes, strict=True))) / whole
        back = (at(u, branch.i) - at(u, branch.j)) / whole
    for group, z, own in zip(branch.groups, sizes, inside, strict=True):
        product = back * z * z * (forward + own)
        for index, y in each_admittance(net, group, s, "full") or []:
            sign = -1.0 if net.layout.parts[index].type == "C" else 1.0
            found[index] = found.get(index, 0.0) + sign * product * y


def _driven(net: Network, s: Value, of: Sources, weights: Sequence[Value]) -> _Drive:
    layout = net.layout
    drive = _Drive([0.0] * (len(layout.names) + 1))
    for (_, number, place), weight in zip(of.resistors, weights, strict=False):
        branch = layout.branches[number]
        drive.inside.setdefault(number, [0.0] * len(branch.groups))[place] += weight
    for number, currents in drive.inside.items():
        branch, sizes = layout.branches[number], impedances(net, layout.branches[number], s)
        emf = sum(i * z for i, z in zip(currents, sizes, strict=True))
        if branch.series:
            drive.emf[number] = emf
        else:
            _between(drive.rhs, branch.i, branch.j, emf / sum(sizes))
    for source, weight in zip(layout.recorder.noises, weights[len(of.resistors):], strict=True):
        if source.driven == GROUND:
            _between(drive.rhs, source.i, source.j, weight)
            continue
        drive.control[source.driven] = drive.control.get(source.driven, 0.0) + weight
        drive.rhs[source.driven] += weight * gain_of(net, source)
        for number, branch, sign in hung(net, source):
            drive.ahead[number] = drive.ahead.get(number, 0.0) + sign * weight
            _between(drive.rhs, branch.j, branch.i, sign * weight / sum(impedances(net, branch, s)))
    for node, driven in enumerate(layout.driven):
        if driven and node not in drive.control:
            drive.rhs[node] = 0.0  # it takes no current
    return drive


def _between(rhs: list[Value], i: int, j: int, current: Value) -> None:
    for node, sign in ((i, 1.0), (j, -1.0)):
        if node != GROUND:
            rhs[node] = rhs[node] + sign * current


def _forward(folded: Folded, drive: _Drive) -> tuple[list[Value], dict[int, Value]]:
    """Node voltages, and the current of every series branch as transfer.branch_currents counts it."""
    layout, rhs = folded.net.layout, drive.rhs
    count = len(layout.names)
    local: list[Value] = [0.0] * count
    into: list[Value] = [0.0] * count  # what each node's row has at its turn
    for taken in reversed(folded.taken):
        for step in taken:
            here = step.step
            k, emf = here.node, drive.emf.get(here.branch, 0.0)
            into[k] = rhs[k]
            local[k] = step.own * rhs[k] + step.share * emf
            for i, x in zip(here.rows, step.a_ik, strict=True):
                if i < count:
                    rhs[i] = rhs[i] - x * local[k]
            if here.takes:
                rhs[here.parent] = rhs[here.parent] + step.share * (into[k] - step.a_kk * emf)
    v: list[Value] = [0.0] * (count + 1)
    q: dict[int, Value] = {}
    for taken in folded.taken:
        for step in reversed(taken):
            here, total = step.step, 0.0
            pulled: Value = -into[here.node]
            for j, t, x in zip(here.cols, step.t, step.a_kj, strict=True):
                total = total + t * v[j]
                pulled = pulled + x * v[j]
            v[here.node] = total + local[here.node]
            if here.branch >= 0:
                behind = at(v, here.parent) + drive.emf.get(here.branch, 0.0)
                q[here.branch] = -step.share * (pulled + step.a_kk * behind)
    return v, q
