"""What a ledger computes from, each piece when it is first asked for."""

from __future__ import annotations

from functools import cached_property
from math import isfinite, log, pi
from typing import TYPE_CHECKING

from polebook.book.reach import within_reach
from polebook.book.time_constants import TimeConstants, time_constants, told
from polebook.chain.model import Chain
from polebook.circuit.build import Circuit, circuit
from polebook.circuit.views import Network
from polebook.problem import Problem, ProblemsFound
from polebook.solve.digits import FEW, TURNS, error, shaken
from polebook.solve.edges import Band, band, first_seed, seed
from polebook.solve.fold import Folded, NotHeld, fold
from polebook.solve.inverse import Inverse, inverse
from polebook.solve.onward import Open, onward
from polebook.solve.span import span
from polebook.solve.sweep import Sweep, sweep
from polebook.solve.transfer import voltages
from polebook.solve.winding import Winding, winding

if TYPE_CHECKING:
    from polebook.solve.modes import Modes
    from polebook.solve.poles import Poles

MOST_NEPER = 690.0  # a product of gains beyond e^690 has no double


class Solution:
    """The solved chain. Raises ProblemsFound on the first look where its midband network has no solution."""

    def __init__(self, chain: Chain, made: Circuit | None = None) -> None:
        """`made` is the chain's circuit where it is at hand."""
        self.chain = chain
        with within_reach(chain):
            self.circuit: Circuit = circuit(chain) if made is None else made
            self.midband: Folded = self._fold_midband()

    @cached_property
    def gains(self) -> list[float]:
        """Midband gain of every line, source first; the source's in ohms where it is a current."""
        return [float(gain) for gain in self.midband.gains]

    @cached_property
    def gain(self) -> float:
        """Midband gain of the chain, signed: V/V or V/A."""
        product = 1.0
        for gain in self.gains:
            product *= gain
        return product

    @cached_property
    def volts(self) -> list[float]:
        """Midband voltage of every node for 1 V of EMF or 1 A."""
        return voltages(self.midband)

    @cached_property
    def inverse(self) -> Inverse:
        return inverse(self.midband)

    @cached_property
    def open_lines(self) -> list[Open]:
        return onward(self.circuit.network)

    @cached_property
    def constants(self) -> TimeConstants:
        moved = [time_constants(one, inverse(one), onward(one.net)) for one in self._shaken]
        return told(time_constants(self.midband, self.inverse, self.open_lines), moved)

    @cached_property
    def _shaken(self) -> list[Folded]:
        """The midband network with its entries shaken: what moves in it has lost digits."""
        try:
            return [fold(shaken(self.circuit.network, turn), 0.0, "midband") for turn in range(TURNS)]
        except NotHeld:  # nothing but rounding held it
            raise ProblemsFound([self._few_digits("source", "gain of the chain")], "") from None

    def told_at(self, hz: float) -> bool:
        """Whether double precision leaves enough digits of the response at one frequency."""
        def response(net: Network) -> complex:
            product: complex = 1.0
            for gain in fold(net, 2j * pi * hz, "full").gains:
                product *= complex(gain)
            return product

        size = response(self.circuit.network)
        return all(error(size, response(one.net)) <= FEW for one in self._shaken)

    @cached_property
    def sweep(self) -> Sweep:
        low, high = span(self.circuit.network, [abs(tau) for tau in self.constants.taus])
        return sweep(self.circuit.network, low, high, self.gains)

    @cached_property
    def winding(self) -> Winding:
        return winding(self.sweep)

    @cached_property
    def band(self) -> Band:
        start = first_seed(self.constants.lower_hz, self.constants.upper_hz)
        hz, clean = seed(self.circuit.network, self.gains, start, self.constants.taus)
        found = band(self.circuit.network, self.gains, self.sweep, hz, clean)
        for name, edge in (("lower", found.lower_hz), ("upper", found.upper_hz)):
            if edge is not None and not self.told_at(edge):
                raise ProblemsFound([self._few_digits("source", f"{name} edge")], "")
        return found

    @cached_property
    def poles(self) -> Poles:
        """Every finite pole of the full network; see whether they are to be trusted."""
        from polebook.solve.poles import poles  # deferred: an audit asks for none, and starts 2 ms sooner

        hz = self.sweep.hz
        return poles(self.circuit.network, float(hz[0]), float(hz[-1]), self.winding.right)

    @cached_property
    def modes(self) -> Modes:
        """Which parts make each of the poles."""
        from polebook.solve.modes import modes  # deferred with the poles

        return modes(self.circuit.network, self.poles)

    def _fold_midband(self) -> Folded:
        try:
            folded = fold(self.circuit.network, 0.0, "midband")
        except NotHeld as floating:
            raise ProblemsFound([self._not_held(floating.node)], "") from None
        for segment, gain in zip(self.circuit.layout.segments, folded.gains, strict=True):
            if gain == 0.0:
                raise ProblemsFound([self._no_gain(segment.name)], "")
            if not isfinite(gain):
                raise OverflowError
        if abs(sum(log(abs(gain)) for gain in folded.gains)) > MOST_NEPER:
            raise ProblemsFound([self._beyond()], "")
        for moved in self._shaken:
            for segment, gain, other in zip(self.circuit.layout.segments, folded.gains, moved.gains, strict=True):
                if error(float(gain), float(other)) > FEW:
                    raise ProblemsFound([self._few_digits(segment.name, f"midband gain of {segment.name}")], "")
        return folded

    def _not_held(self, node: int) -> Problem:
        owner, _, terminal = self.circuit.layout.names[node].partition(".")
        return Problem(
            self.chain.places.get(owner), f"nothing holds node {terminal} of {owner} at midband",
            "no conductance leads from it to anywhere, so that its voltage has no value",
            "give it a resistor (bias, output, load or source resistance), or the card an output resistance "
            "(early_voltage, channel_slope, ro)")

    def _no_gain(self, owner: str) -> Problem:
        return Problem(
            self.chain.places.get(owner), f"the midband gain of {owner} is zero",
            "nothing of the signal passes it: a device without transconductance (no quiescent current), or an arm that "
            "cuts the chain", "look at its bias and its parts")

    def _few_digits(self, owner: str, figure: str) -> Problem:
        return Problem(self.chain.places.get(owner), f"the {figure} cannot be told",
                       "values lie so far apart that what passes is lost in the rounding of what all but cancels",
                       "look for a value with a wrong prefix (p for M, a missing u), or a resistor as good as open")

    def _beyond(self) -> Problem:
        return Problem(self.chain.places.get("source"), "the gain of the chain is beyond what a number can hold",
                       "the product of the lines' gains passes 1e300 or falls below 1e-300",
                       "take stages out, or give them less gain")
