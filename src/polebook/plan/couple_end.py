"""The lower end of a chain as a function of some of its low-role capacitors.

They are shorts at midband and carry no d.c., so bias, midband gains and what each of them sees stand still while they
move: only the network's own values are put in anew.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from math import inf, log, pi, sqrt
from typing import TYPE_CHECKING, TypeAlias

import numpy as np

from polebook.book.shares import derivatives
from polebook.book.solution import Solution
from polebook.circuit.views import Network, network
from polebook.solve.edges import HALF_POWER
from polebook.solve.fold import fold
from polebook.solve.sweep import relative, relative_at

if TYPE_CHECKING:  # numpy.typing costs 5 ms at start-up
    from numpy.typing import NDArray

Array: TypeAlias = "NDArray[np.float64]"
A_DECADE = 30
BELOW, ABOVE = 100.0, 10.0  # how far around the edge the response is looked at
ROUND = 1e-12  # neper; what rounding may leave


@dataclass(frozen=True, slots=True)
class Mark:
    """What must hold at one frequency: ln|H|/|gain| not below `bound` (floor), or not above it."""

    hz: float
    bound: float
    floor: bool = True

    def spare(self, loss: float) -> float:
        """Neper by which it holds."""
        return loss - self.bound if self.floor else self.bound - loss


class LowEnd:
    """`parts` are the layout's numbers of the capacitors that move; edge_hz is the wanted edge, rise (neper) how far
    |H| may rise above the midband gain below the band's middle."""

    def __init__(self, of: Solution, parts: Sequence[int], edge_hz: float, rise: float) -> None:
        self._net, self._gains = of.circuit.network, of.gains
        self._parts = list(parts)
        self.edge_hz, self.rise = edge_hz, rise
        self.ohms = np.array([ohm_seen(of, part) or inf for part in parts])
        self.now: Array = np.array([self._net.values[part] for part in parts], dtype=float)
        # what is lost above the middle of the wanted band is the upper edge's
        top = ABOVE * edge_hz if of.band.upper_hz is None else max(edge_hz, sqrt(edge_hz * of.band.upper_hz))
        count = max(2, int(log(BELOW * top / edge_hz) / log(10.0) * A_DECADE))
        self._hz: Array = np.unique(np.append(np.geomspace(edge_hz / BELOW, top, count), edge_hz))

    @property
    def least(self) -> Array:
        """Of each part the value whose own corner lies at the wanted edge."""
        found: Array = 1.0 / (2 * pi * self.edge_hz * self.ohms)
        return found

    def _with(self, farads: Array) -> Network:
        values = list(self._net.values)
        for part, farad in zip(self._parts, farads.tolist(), strict=True):
            values[part] = farad
        return network(self._net.layout, values)

    def loss(self, farads: Array, hz: float) -> float:
        """ln|H|/|gain| in neper."""
        return relative_at(self._with(farads), hz, self._gains)

    def slopes(self, farads: Array, hz: float) -> Array:
        """d ln|H|/d ln C of each part."""
        found = derivatives(self._with(farads), hz).by_part
        return np.array([found[part].real for part in self._parts])

    def held(self, farads: Array, marks: Sequence[Mark]) -> bool:
        """Whether the values keep every mark."""
        return all(mark.spare(self.loss(farads, mark.hz)) >= -ROUND for mark in marks)

    def _losses(self, farads: Array) -> Array:
        """ln|H|/|gain| at the frequencies that are looked at."""
        with np.errstate(all="ignore"):
            return relative(fold(self._with(farads), 2j * pi * self._hz, "full"), self._gains)

    def highest(self, farads: Array) -> float:
        """Neper by which |H| rises most above the midband gain."""
        return float(np.nanmax(self._losses(farads)))

    def worst(self, farads: Array) -> Mark | None:
        """The mark that the response misses by most, at the frequencies that are looked at; None where it misses none.

        Above the wanted edge nothing may fall below half power, and nowhere may it rise too far.
        """
        loss = self._losses(farads)
        inside = self._hz >= self.edge_hz
        dip, peak = np.where(inside, HALF_POWER - loss, -inf), loss - self.rise
        at_dip, at_peak = int(np.nanargmax(dip)), int(np.nanargmax(peak))
        if max(dip[at_dip], peak[at_peak]) <= 1e-9:
            return None
        if dip[at_dip] >= peak[at_peak]:
            return Mark(float(self._hz[at_dip]), HALF_POWER)
        return Mark(float(self._hz[at_peak]), self.rise, floor=False)


def ohm_seen(of: Solution, part: int) -> float | None:
    """Resistance at a capacitor's terminals at midband; None where it sees nothing, or a short."""
    tau = of.constants.by_part.get(part)
    return tau / float(of.circuit.network.values[part]) if tau and tau > 0 else None
