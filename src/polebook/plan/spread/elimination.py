"""The elimination of `solve.fold` for many builds, worked out once as a list of operations in place.

The steps are the layout's own, in their order; what `fold` keeps for other solutions (rows as they stood, inputs of
segments) is left away, entries that are not there cost nothing, and an array is written again as soon as it is done
with. So the arrays of one segment fit into a core's cache. Signs: t here is -t of circuit.schedule.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import TypeAlias

import numpy as np

from polebook.circuit.layout import Layout
from polebook.circuit.schedule import Step
from polebook.plan.spread.buffers import Buffers, Lane
from polebook.stages.stamper import GROUND

Entry: TypeAlias = "Callable[[int], Lane | None]"  # slot -> its lane as the parts make it, None where there is none
Impedance: TypeAlias = "Callable[[int], Lane]"  # series branch -> its impedance

PIVOTS = 12  # in one product: few enough for it to turn little between builds


@dataclass(slots=True, eq=False)
class Share:
    """A lane that counts as itself or as minus itself."""

    lane: Lane
    negative: bool


class Elimination:
    """Enters the operations of all segments. `transfer` is then V(load) per volt or ampere of the source, `products`
    the products of the pivots of neighbouring segments, from the load to the source, some `PIVOTS` in each.

    factors  segment -> what the determinant has beside the pivots of its steps
    """

    def __init__(self, layout: Layout, buffers: Buffers, entry: Entry, impedance: Impedance,
                 factors: Callable[[int], list[Lane]], pivots: bool) -> None:
        self.layout, self.buffers = layout, buffers
        self._entry, self._impedance, self._factors, self._pivots = entry, impedance, factors, pivots
        self._at: dict[int, Lane | None] = {}
        self._begun: set[int] = set()
        self.transfer = buffers.own()
        self.transfer.fill(1.0)
        self.products: list[Lane] = []
        self._taken = 0
        for index in range(len(layout.segments) - 1, -1, -1):
            self._segment(index)

    def _segment(self, index: int) -> None:
        layout, buffers = self.layout, self.buffers
        segment, steps = layout.segments[index], layout.steps[index]
        origin = segment.before if index else layout.emf
        current = not index and layout.emf == GROUND
        passing = not current and segment.after not in (origin, segment.before if index else GROUND)
        wanted = _on_the_way(steps, segment.after, origin) if passing else frozenset[int]()
        kept: dict[int, tuple[Step, list[Share | None]]] = {}
        product = self._product(len(steps)) if self._pivots else None
        own: Lane | None = None
        for step in steps:
            own, t = self._eliminate(step, product)
            if step.node in wanted:
                kept[step.node] = (step, t)
            else:
                self._drop(t)
            if not (current and step is steps[-1]):
                buffers.give_back(own)
        if product is not None:
            for factor in self._factors(index):
                self._times(product, factor)
        if current:
            assert own is not None
            self._gain(Share(own, False))
            buffers.give_back(own)
        elif passing:
            gain = self._voltage(kept, segment.after, origin)
            self._gain(gain)
            self._drop([gain])
            for _, t in kept.values():
                self._drop(t)

    def _product(self, pivots: int) -> Lane:
        """The product that takes a segment's pivots: the last one, or a new one where that has enough."""
        if not self.products or self._taken + pivots > PIVOTS:
            self.products.append(self.buffers.own())
            self.products[-1].fill(1.0)
            self._taken = 0
        self._taken += pivots
        return self.products[-1]

    def _stands(self, slot: int) -> Lane | None:
        """The entry as it stands at this moment."""
        if slot < 0:
            return None
        if slot not in self._at:
            self._at[slot] = self._entry(slot)
        return self._at[slot]

    def _eliminate(self, step: Step, product: Lane | None) -> tuple[Lane, list[Share | None]]:
        """One step; returns what a current into the node meets, and t."""
        buffers = self.buffers
        a_kk = self._stands(step.diag)
        a_kj = [self._stands(slot) for slot in step.col_slots]
        a_ik = [self._stands(slot) for slot in step.row_slots]
        if a_kk is None:
            a_kk = buffers.own()
        p: Lane | None = None
        if step.branch >= 0:
            z = self._impedance(step.branch)
            pivot = buffers.put(np.multiply, z, a_kk)
            buffers.do(np.add, pivot, 1.0, pivot)
            p = buffers.put(np.reciprocal, pivot)
            own = buffers.put(np.multiply, z, p)
        else:
            pivot, own = a_kk, buffers.put(np.reciprocal, a_kk)
        if product is not None:
            self._times(product, pivot)
        if step.branch >= 0:
            buffers.give_back(pivot)
        t = self._shares(step, own, p, a_kj)
        self._spread(step, t, a_ik)
        if p is not None:
            for slot, x in zip((*step.parent_slots, *step.parent_slots[-1:]), (*a_kj, a_kk), strict=False):
                if x is not None:
                    self._add(slot, Share(buffers.put(np.multiply, p, x), False))
            if not any(share is not None and share.lane is p for share in t):
                buffers.give_back(p)
        for slot, lane in zip((step.diag, *step.col_slots, *step.row_slots), (a_kk, *a_kj, *a_ik), strict=True):
            buffers.give_back(lane)
            self._at[slot] = None
        return own, t

    def _shares(self, step: Step, own: Lane, p: Lane | None, a_kj: list[Lane | None]) -> list[Share | None]:
        """V of the node = sum of t_j·V_j: minus own·a_kj, and p more for the parent."""
        buffers = self.buffers
        t: list[Share | None] = [None if x is None else Share(buffers.put(np.multiply, own, x), True) for x in a_kj]
        if step.parent != GROUND and p is not None:
            last = t[-1]
            if last is None:
                t[-1] = Share(p, False)
            else:
                buffers.do(np.subtract, last.lane, p, last.lane)
        return t

    def _spread(self, step: Step, t: list[Share | None], a_ik: list[Lane | None]) -> None:
        """Every other row takes a_ij += a_ik·t_j."""
        for x, slots in zip(a_ik, step.targets, strict=True):
            for share, slot in zip(t, slots, strict=True):
                if x is not None and share is not None:
                    self._add(slot, Share(self.buffers.put(np.multiply, x, share.lane), share.negative))

    def _add(self, slot: int, share: Share) -> None:
        buffers, old = self.buffers, self._stands(slot)
        if old is None:
            if share.negative:
                buffers.do(np.negative, share.lane, share.lane)
            self._at[slot] = share.lane
        else:
            self._at[slot] = buffers.into(old, np.subtract if share.negative else np.add, share.lane)

    def _voltage(self, kept: dict[int, tuple[Step, list[Share | None]]], node: int, origin: int) -> Share:
        """V(node) for 1 V at the origin, by back substitution over the kept steps, last first."""
        buffers = self.buffers
        found: dict[int, Share] = {}
        for at, (step, t) in reversed(kept.items()):
            total: Share | None = None
            for j, share in zip(step.cols, t, strict=True):
                if share is None:
                    continue
                term = share
                if j != origin:
                    over = found[j]
                    term = Share(buffers.put(np.multiply, share.lane, over.lane), share.negative != over.negative)
                if total is not None:
                    before, same = total, total.negative == term.negative
                    lane = buffers.put(np.add if same else np.subtract, before.lane, term.lane)
                    total = Share(lane, before.negative)
                    self._drop([one for one in (before, term) if one not in t])
                else:
                    total = term
            assert total is not None
            found[at] = total
        self._drop([share for at, share in found.items() if at != node and share not in kept[at][1]])
        return found[node]

    def _times(self, product: Lane, factor: Lane) -> None:
        """Multiplies a product, which the first factor begins anew."""
        if id(product) in self._begun:
            self.buffers.do(np.multiply, product, factor, product)
        else:
            self.buffers.do(np.positive, factor, product)
        self._begun.add(id(product))

    def _gain(self, share: Share) -> None:
        """Takes the gain of a segment into the transfer."""
        self._times(self.transfer, share.lane)
        if share.negative:
            self.buffers.do(np.negative, self.transfer, self.transfer)

    def _drop(self, t: list[Share | None]) -> None:
        for share in t:
            if share is not None:
                self.buffers.give_back(share.lane)


def _on_the_way(steps: list[Step], node: int, origin: int) -> frozenset[int]:
    """Nodes whose voltages that of `node` rests on, itself among them."""
    wanted = {node}
    for step in steps:
        if step.node in wanted:
            wanted.update(k for k in step.cols if k != origin)
    return frozenset(wanted)
