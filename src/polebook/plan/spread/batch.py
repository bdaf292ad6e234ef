"""Many builds of one network at once, each at a frequency of its own: transfer and determinant, or the midband gain."""

from __future__ import annotations

from collections.abc import Callable, Sequence

import numpy as np

from polebook.circuit.layout import Layout
from polebook.circuit.views import Network, impedance
from polebook.plan.spread.buffers import Buffers, Lane
from polebook.plan.spread.elimination import Elimination
from polebook.plan.spread.immittance import Form, form, parts
from polebook.plan.spread.normal import Array
from polebook.plan.spread.terms import Terms, terms
from polebook.stages.stamper import Value

Filler = Callable[[Sequence[Value]], None]


class Batch:
    """The full network of `size` builds: fill in part values, then look at frequencies.

    transfer  (size,) complex, V(load)/EMF or V(load)/I, after `look`
    products  (size,) complex each: the determinant, save powers of s, in factors of a stage or some
    """

    def __init__(self, layout: Layout, size: int) -> None:
        self.layout, self.size = layout, size
        self._buffers = Buffers(size, complex)
        self._omega = np.ones(size)
        self._scratch = np.zeros(size)
        self._fillers: list[Filler] = []
        self._terms = terms(layout)
        self._brackets: dict[int, Lane] = {}
        self._carried: dict[int, Lane] = {}
        done = Elimination(layout, self._buffers, self._entry, self._branch, self._factors, pivots=True)
        self.transfer: Lane = done.transfer
        self.products: list[Lane] = done.products
        self._operations = self._buffers.operations

    @property
    def counts(self) -> dict[str, int]:
        """How many operations on `size` numbers a look takes, by name."""
        return dict(self._buffers.counts)

    def fill(self, values: Sequence[Value]) -> None:
        """Part values, in the layout's order: floats or arrays (size,)."""
        for filler in self._fillers:
            filler(values)

    def look(self, hz: float | Array) -> None:
        """Solves every build at hz, one for all or (size,)."""
        np.multiply(hz, 2.0 * np.pi, out=self._omega)
        for operation in self._operations:
            operation()

    def _entry(self, slot: int) -> Lane | None:
        made = self._terms.get(slot)
        if made is None:
            return None
        lane = self._buffers.own()
        self._fillers.append(_conductance(made, lane))
        up = down = None
        if made.storing:
            up = np.zeros(self.size)
            self._fillers.append(_sum(made.storing, up, turned=False))
        if made.washing:
            down = np.zeros(self.size)
            self._fillers.append(_sum([(part, -sign) for part, sign in made.washing], down, turned=True))
        self._imaginary(lane, up, down)
        for number, sign in made.compound:
            carried = self._branch(number)
            lane = self._buffers.into(lane, np.add if sign > 0 else np.subtract, carried)
        return lane

    def _imaginary(self, lane: Lane, up: Array | None, down: Array | None) -> None:
        """lane.imag = omega·up + down/omega, of the terms that there are."""
        do = self._buffers.do
        if up is not None:
            do(np.multiply, up, self._omega, lane.imag)
        if down is not None:
            do(np.divide, down, self._omega, lane.imag if up is None else self._scratch)
            if up is not None:
                do(np.add, lane.imag, self._scratch, lane.imag)

    def _branch(self, number: int) -> Lane:
        """What a branch is carried as: an impedance in series, an admittance across."""
        if number in self._carried:
            return self._carried[number]
        branch = self.layout.branches[number]
        shape = form(self.layout, branch)
        lane = self._buffers.own()
        up = np.zeros(self.size) if shape.up else None
        down = np.zeros(self.size) if shape.down else None
        self._fillers.append(self._bracket(number, shape, lane, up, down))
        self._imaginary(lane, up, down)
        if shape.mixed:
            self._brackets[number] = lane
        if shape.turned:
            turned = self._buffers.own()
            self._buffers.do(np.reciprocal, lane, turned)
            lane = turned
        self._carried[number] = lane
        return lane

    def _bracket(self, number: int, shape: Form, lane: Lane, up: Array | None, down: Array | None) -> Filler:
        branch = self.layout.branches[number]

        def fill(values: Sequence[Value]) -> None:
            lane.real, rising, falling = parts(self.layout, branch, values, shape)
            if up is not None:
                np.copyto(up, rising)
            if down is not None:
                np.copyto(down, falling)
        return fill

    def _factors(self, index: int) -> list[Lane]:
        first = sum(len(segment.branches) for segment in self.layout.segments[:index])
        last = first + len(self.layout.segments[index].branches)
        return [lane for number, lane in self._brackets.items() if first <= number < last]


class Midband:
    """The midband gain of `size` builds, signed: V/V or V/A."""

    def __init__(self, layout: Layout, nominal: Network, size: int) -> None:
        self.layout, self.size, self._nominal = layout, size, nominal
        self._buffers = Buffers(size, float)
        self._fillers: list[Filler] = []
        self._terms = terms(layout)
        done = Elimination(layout, self._buffers, self._entry, self._series, lambda index: [], pivots=False)
        self.gain: Lane = done.transfer

    def look(self, values: Sequence[Value]) -> Array:
        """(size,) gains for part values that are floats or arrays (size,); the array is written again next time."""
        for filler in self._fillers:
            filler(values)
        for operation in self._buffers.operations:
            operation()
        return self.gain

    def _entry(self, slot: int) -> Lane | None:
        made = self._terms.get(slot)
        if made is None:
            return None
        closed = [(number, sign) for number, sign in made.compound if self._ohms(number, self._nominal.values)]
        if not (made.number or made.conducting or made.forward or closed):
            return None
        lane = self._buffers.own()
        self._fillers.append(_conductance(made, lane))
        if closed:
            self._fillers.append(self._admittances(closed, lane))
        return lane

    def _admittances(self, closed: list[tuple[int, float]], lane: Lane) -> Filler:
        def fill(values: Sequence[Value]) -> None:
            for number, sign in closed:
                lane[:] += sign / self._ohms(number, values)
        return fill

    def _series(self, number: int) -> Lane:
        lane = self._buffers.own()
        self._fillers.append(lambda values: np.copyto(lane, self._ohms(number, values)))
        return lane

    def _ohms(self, number: int, values: Sequence[Value]) -> Value:
        """Resistance of a branch at midband: 0.0 for a short, None for an open one."""
        return impedance(Network(self.layout, list(values), [], []), self.layout.branches[number], 0.0, "midband")


def _conductance(made: Terms, lane: Lane) -> Filler:
    """Writes the real part of an entry."""
    def fill(values: Sequence[Value]) -> None:
        total: Value = made.number
        for part, sign in made.conducting:
            total = total + sign / values[part]
        for part, sign in made.forward:
            total = total + sign * values[part]
        lane.real = total
    return fill


def _sum(terms_of: list[tuple[int, float]], into: Array, turned: bool) -> Filler:
    """Writes the sum of sign·value, or of sign/value."""
    def fill(values: Sequence[Value]) -> None:
        total: Value = 0.0
        for part, sign in terms_of:
            total = total + (sign / values[part] if turned else sign * values[part])
        np.copyto(into, total)
    return fill
