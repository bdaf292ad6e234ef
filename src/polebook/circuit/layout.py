"""The network of a chain: nodes, elements, owners, roles and orders of elimination. Built once; values many times."""

from __future__ import annotations

from dataclasses import dataclass, field

from polebook.circuit.elements import Branch, Part, Segment
from polebook.circuit.placing import Stamps, balance_rows, place
from polebook.circuit.recorder import Recorder
from polebook.circuit.schedule import Graph, Step, leaves_first
from polebook.stages.stamper import GROUND


@dataclass(slots=True)
class Onward:
    """One segment's part of the way from source to load.

    origin     the known node, of 1 V
    end        slots of (after, after) and (after, origin)
    resistive  (series branch, slot of (k, k), slot of (k, origin)) of resistors that leave the known node
    """

    steps: list[Step] = field(default_factory=list)
    origin: int = GROUND
    end: tuple[int, int] = (-1, -1)
    resistive: list[tuple[int, int, int]] = field(default_factory=list)


@dataclass(slots=True)
class Layout:
    """Topology, once. Lists by segment hold the source first, then each stage, then the load.

    emf       node that the source's EMF drives, GROUND for a current source
    after     interstage node behind each segment; a wire repeats the one before it
    branches  every branch of every segment, in order
    steps     elimination from load to source, by segment
    onward    elimination from source to load at midband, by segment
    diagonal  slot of the admittance at each `after`
    seed      slots of (n0, n0) and (n0, emf) that start the way onward; -1 where n0 is the EMF itself
    """

    recorder: Recorder
    emf: int
    after: list[int]
    branches: list[Branch]
    stamps: Stamps
    slots: int
    steps: list[list[Step]]
    onward: list[Onward]
    diagonal: list[int]
    seed: tuple[int, int]

    @property
    def parts(self) -> list[Part]:
        return self.recorder.parts

    @property
    def segments(self) -> list[Segment]:
        return self.recorder.segments

    @property
    def names(self) -> list[str]:
        return self.recorder.names

    @property
    def driven(self) -> list[bool]:
        return self.recorder.is_driven

    @property
    def known(self) -> int:
        """The node whose voltage is 1: the EMF's, or for a current source a name for its column."""
        return self.emf if self.emf != GROUND else len(self.names)

    @property
    def origin(self) -> int:
        """The known node on the way onward at midband: n0 itself where nothing but a coupling is ahead of it."""
        resistors = [b for b in self.segments[0].branches if b.series and self.parts[b.groups[0][0]].type == "R"]
        return self.known if resistors or self.emf == GROUND else self.after[0]


def arrange(recorder: Recorder, emf: int) -> Layout:
    """Turns the recorded stamps into a network ready to be solved."""
    segments = recorder.segments
    after = [segment.after for segment in segments]
    branches = [branch for segment in segments for branch in segment.branches]
    ties = _ties(segments)
    rows = balance_rows(recorder)
    back = Graph(rows)
    stamps = place(recorder, back.slots)
    entries = [stamps.where[start:end] for start, end in stamps.ranges]
    steps: list[list[Step]] = [[] for _ in segments]
    for index in range(len(segments) - 1, -1, -1):
        _stand(back, entries[index], ties[index])
        nodes = [k for k in segments[index].nodes if k != emf]
        order = leaves_first(nodes, _ends(ties[index]), after[index], recorder.is_driven, _storing(segments[index]))
        steps[index] = [back.eliminate(k) for k in order]
    diagonal = [back.slots.setdefault((rows[k], k), len(back.slots)) for k in after]
    layout = Layout(recorder, emf, after, branches, stamps, 0, steps, [], diagonal, (-1, -1))
    _plan_onward(layout, Graph(rows, slots=back.slots), entries, ties)
    layout.slots = len(back.slots)
    return layout


def _plan_onward(layout: Layout, graph: Graph, entries: list[list[tuple[int, int]]],
                 ties: list[list[tuple[int, int, int]]]) -> None:
    """The way from source to load; behind an ideal output it begins anew, since nothing ahead of it is felt there."""
    origin, first = layout.origin, layout.after[0]
    if first != origin:
        layout.seed = (graph.enter(first, first), graph.enter(first, origin))
    for index, segment in enumerate(layout.segments):
        onward = Onward()
        if index:
            if layout.driven[segment.before]:
                origin = segment.before
                graph.forget_row(origin)
            origin = _plan_segment(layout, graph, segment, (entries[index], ties[index]), origin, onward)
        onward.origin = origin
        onward.end = (graph.slot(segment.after, segment.after), graph.slot(segment.after, origin))
        layout.onward.append(onward)


def _plan_segment(layout: Layout, graph: Graph, segment: Segment,
                  stands: tuple[list[tuple[int, int]], list[tuple[int, int, int]]], origin: int, onward: Onward) -> int:
    """Steps of one segment; returns the known node that is left.

    A known node takes no part in the tree of series branches: a resistor that leaves it is carried as an admittance,
    a short (a coupling at midband) makes the node behind it the known one.
    """
    entries, ties = stands
    nodes = [k for k in segment.nodes if k != segment.after]
    if segment.after != segment.before and segment.before != origin:
        nodes.append(segment.before)
    passed: list[int] = []
    leaving = [tie for tie in ties if origin in tie[1:]]
    while leaving:
        branch, i, j = leaving.pop()
        other = j if i == origin else i
        if _shorted(layout, branch):
            passed.append(origin)
            nodes = [k for k in (*nodes, origin) if k != other]
            origin = other
            leaving = [tie for tie in ties if origin in tie[1:] and tie[0] != branch]
        else:
            ties = [tie for tie in ties if tie[0] != branch]
            onward.resistive.append((branch, graph.enter(other, other), graph.enter(other, origin)))
    _stand(graph, entries, ties)
    driven = [flag and k not in passed for k, flag in enumerate(layout.driven)]
    order = leaves_first(nodes, _ends(ties), segment.before, driven, _storing(segment))
    onward.steps = [graph.eliminate(k) for k in order]
    return origin


def _shorted(layout: Layout, branch: int) -> bool:
    """Whether a series branch is a short at midband."""
    parts = [layout.parts[index] for index in layout.branches[branch].groups[0]]
    return any(part.short for part in parts)


def _storing(segment: Segment) -> frozenset[int]:
    return frozenset(storage.node for storage in segment.storages)


def _ties(segments: list[Segment]) -> list[list[tuple[int, int, int]]]:
    """Series branches of each segment: (index among all branches, ends)."""
    result, number = [], 0
    for segment in segments:
        result.append([(number + n, b.i, b.j) for n, b in enumerate(segment.branches) if b.series])
        number += len(segment.branches)
    return result


def _ends(ties: list[tuple[int, int, int]]) -> list[tuple[int, int]]:
    return [(i, j) for _, i, j in ties]


def _stand(graph: Graph, entries: list[tuple[int, int]], ties: list[tuple[int, int, int]]) -> None:
    for i, j in entries:
        graph.enter(i, j)
    for number, i, j in ties:
        graph.tie(number, i, j)
