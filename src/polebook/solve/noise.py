"""From every noise source to the output by one adjoint solution, and what all of them together do to the network.

A current between two nodes reaches the output as u_i - u_j, a resistor's own across its group of a branch as the
adjoint current of the branch times the group's impedance, a voltage in an amplifier's control as u times the gain
(R. Rohrer, L. Nagel, R. Meyer and L. Weber, Computationally efficient electronic-circuit noise calculations, IEEE
J. Solid-State Circuits 6, 1971, from memory).
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from typing import TYPE_CHECKING

import numpy as np

from polebook.circuit.elements import Branch, NoiseSource
from polebook.circuit.noise import Array, Sources
from polebook.circuit.views import Network, admittance
from polebook.solve.fold import Folded
from polebook.solve.transfer import Adjoint
from polebook.stages.stamper import GROUND, Value

if TYPE_CHECKING:
    from numpy.typing import NDArray


BLOCK = 8192  # complex numbers that are worked on at once: they stay in the processor's cache


def powers(folded: Folded, adj: Adjoint, s: Value, of: Sources, scale: float) -> Array:
    """(n, f) |transfer to the output|² of every source, over scale², at the frequencies (f,) of a folded network.

    Ω² of currents, plain numbers of voltages. What is beyond all numbers is infinite.
    """
    net = folded.net
    plain, ends = _plain(net, of)
    with np.errstate(all="ignore"):
        u: NDArray[np.complex128] = np.zeros((len(net.layout.names) + 1, s.size), dtype=complex)  # the last is ground
        for node, x in enumerate(quiet(net, adj.u)):
            u[node] = x
        result: Array = np.empty((of.white.size, s.size))
        step = max(1, BLOCK // max(len(plain), 1))
        for start in range(0, s.size, step):
            some = slice(start, start + step)
            x = u[:, some].take(ends[0], axis=0)
            x -= u[:, some].take(ends[1], axis=0)
            x /= scale
            result[plain, some] = x.real**2 + x.imag**2
        for k, one in zip(*_other(folded, adj, s, of, frozenset(plain)), strict=True):
            t = np.asarray(one / scale)
            result[k] = t.real**2 + t.imag**2
        return result


def _plain(net: Network, of: Sources) -> tuple[list[int], tuple[list[int], list[int]]]:
    """Sources that are a current between two nodes, and their nodes; ground is -1."""
    found, i, j = [], [], []
    for k, (_, number, _) in enumerate(of.resistors):
        branch = net.layout.branches[number]
        if branch.single and not branch.series:
            found.append(k)
            i.append(branch.i)
            j.append(branch.j)
    for k, source in enumerate(net.layout.recorder.noises, len(of.resistors)):
        if source.driven == GROUND:
            found.append(k)
            i.append(source.i)
            j.append(source.j)
    return found, (i, j)


def _other(folded: Folded, adj: Adjoint, s: Value, of: Sources,
           plain: frozenset[int]) -> tuple[list[int], list[Value]]:
    """Place and transfer of every source that is none of the `plain` ones."""
    net = folded.net
    u = quiet(net, adj.u)
    currents = _returning(folded, adj)
    found: list[int] = []
    result: list[Value] = []
    for k, (_, number, place) in enumerate(of.resistors):
        if k not in plain:
            branch = net.layout.branches[number]
            sizes = impedances(net, branch, s)
            back = currents[number] if branch.series else (at(u, branch.i) - at(u, branch.j)) / sum(sizes)
            found.append(k)
            result.append(back * sizes[place])
    for k, source in enumerate(net.layout.recorder.noises, len(of.resistors)):
        if k not in plain:
            found.append(k)
            result.append(_of_voltage(net, source, s, adj.u, u))
    return found, result


def transfers(folded: Folded, adj: Adjoint, s: Value, of: Sources) -> list[Value]:
    """Transfer of every source to the output of the adjoint solution, at s (rad/s, scalar or array), full network."""
    u = quiet(folded.net, adj.u)
    result: list[Value] = [0.0] * of.white.size
    plain, ends = _plain(folded.net, of)
    for k, i, j in zip(plain, *ends, strict=True):
        result[k] = at(u, i) - at(u, j)
    for k, x in zip(*_other(folded, adj, s, of, frozenset(plain)), strict=True):
        result[k] = x
    return result


def _of_voltage(net: Network, source: NoiseSource, s: Value, own: Sequence[Value], u: Sequence[Value]) -> Value:
    """own are the adjoint voltages as they stand, u those for currents."""
    total = own[source.driven] * gain_of(net, source)
    for _, branch, sign in hung(net, source):
        total = total + sign * (at(u, branch.j) - at(u, branch.i)) / sum(impedances(net, branch, s))
    return total


def quiet(net: Network, u: Sequence[Value]) -> list[Value]:
    """Adjoint voltages for currents: a driven node feels none."""
    return [0.0 if driven else x for x, driven in zip(u, net.layout.driven, strict=False)]


def gain_of(net: Network, source: NoiseSource) -> Value:
    """Gain of the amplifier whose control a noise voltage stands in."""
    drives = net.layout.segments[source.segment].drives
    return next(net.values[drive.gain] for drive in drives if drive.node == source.driven)


def hung(net: Network, source: NoiseSource) -> Iterator[tuple[int, Branch, float]]:
    """(number, branch, +1 where its i is the near end, else -1) of what a noise voltage lies ahead of."""
    if source.ahead == GROUND:
        return
    first = sum(len(segment.branches) for segment in net.layout.segments[:source.segment])
    for number, branch in enumerate(net.layout.segments[source.segment].branches, first):
        if not branch.series and source.ahead in (branch.i, branch.j):
            yield number, branch, 1.0 if branch.i == source.ahead else -1.0


def impedances(net: Network, branch: Branch, s: Value) -> list[Value]:
    """Impedance of each group of a branch, full network."""
    each = [admittance(net, group, s, "full") for group in branch.groups]
    return [0.0 if y is None else 1.0 / y for y in each]


def at(values: Sequence[Value], node: int) -> Value:
    return 0.0 if node == GROUND else values[node]


def _returning(folded: Folded, adj: Adjoint) -> dict[int, Value]:
    """Output for 1 V in each series branch, towards the node that it carries: without a difference of near voltages."""
    result: dict[int, Value] = {}
    u, count = adj.u, len(adj.u) - 1
    for taken in folded.taken:
        for step in taken:
            here = step.step
            if here.branch < 0:
                continue
            r = step.a_kk * u[here.parent] - adj.b[here.node] if here.takes else -adj.b[here.node]
            for i, x in zip(here.rows, step.a_ik, strict=True):
                if i < count:
                    r = r + x * u[i]
            result[here.branch] = -step.share * r
    return result
