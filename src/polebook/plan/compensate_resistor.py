"""The resistor in series with a capacitor across a stage: that which sends its zero away, that which lays it on a pole.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from math import log, sqrt

from polebook.book.ledger import Ledger, ledger
from polebook.chain.model import Chain
from polebook.plan.compensate_figures import dominant_first, upper_zeros
from polebook.plan.compensate_search import HIT, changed
from polebook.plan.compensate_zero import added
from polebook.solve.root import bracketed_root

ABOVE, WIDE, STEPS = 3.0, 1.5, 24  # where the resistor for a pole is looked for: from 3/(p·C) down in steps of 1.5
NARROW = 1.02  # where it is nearly known
TIGHT = 1e-7  # a bracket so narrow is a point
Answer = tuple[float | None, str]  # Ω, or why there is none


@dataclass(frozen=True, slots=True)
class Bridge:
    """`farad` across a stage of a chain: the paths of the capacitor and of the resistor in series with it."""

    chain: Chain
    stage: str
    across: str
    resistor: str
    farad: float

    def at(self, ohm: float) -> Ledger:
        return ledger(changed(self.chain, {self.across: self.farad, self.resistor: ohm}))


def away(of: Bridge) -> Answer:
    """The resistor that takes away what the capacitor adds to the sum of 1/z."""
    with_it = upper_zeros(of.at(0.0), of.stage)
    without = upper_zeros(ledger(changed(of.chain, {of.across: 0.0})), of.stage)
    if with_it is None or without is None:
        return None, f"the zeros of {of.stage} are not resolved"
    ohm = added(with_it, without) / of.farad
    return (ohm, "") if ohm > 0.0 else (None, f"{of.across} brings no zero on the right that a resistor could undo")


def left(of: Bridge, near: float) -> Answer:
    """The greatest resistor with which the zero lies on a real pole behind the dominant one: the second, if it can.

    near  where it is nearly known, else 0. The resistor is looked for from above, where the zero lies below all those
    poles: as it moves out it passes one wherever the number of them that lie nearer than it goes from even to odd or
    back. (A pair of poles that comes to be real changes that number by two.)
    """
    least, why = away(of)
    if least is None:
        return None, why
    scene = _Scene(of, least)
    if near > least:
        low, high = (near - least) / NARROW, (near - least) * NARROW
        if scene.passes(low, high) and (more := scene.meet(low, high)):
            return least + more, ""
    second = scene.second()
    if second is None:
        return None, "there is no second pole to bring the zero onto"
    high = ABOVE / (second * of.farad)
    for _ in range(STEPS):
        low = high / WIDE
        if scene.passes(low, high) and (more := scene.meet(low, high)):
            return least + more, ""
        high = low
    return None, "no pole behind the dominant one is real where the zero could lie on it"


@dataclass(frozen=True, slots=True)
class _Scene:
    """Zero and poles of a chain by how much (Ω) the resistor is more than the least, which sends the zero away."""

    of: Bridge
    least: float
    known: dict[float, tuple[float | None, list[float]]] = field(default_factory=dict)

    def solved(self, more: float) -> tuple[float | None, list[float]]:
        """(the real zero on the left that is nearest to 0, the real poles behind the dominant one), rad/s."""
        if more not in self.known:
            self.known[more] = self._solved(more)
        return self.known[more]

    def _solved(self, more: float) -> tuple[float | None, list[float]]:
        now = self.of.at(self.least + more)
        zeros = [z.real for z in upper_zeros(now, self.of.stage) or () if not z.imag and z.real < 0.0]
        return max(zeros, default=None), [p.real for p in dominant_first(now)[1:] if not p.imag and p.real < 0.0]

    def second(self) -> float | None:
        """|p| of the second pole without a zero."""
        poles = dominant_first(self.of.at(self.least))
        return abs(poles[1]) if len(poles) > 1 else None

    def passes(self, low: float, high: float) -> bool:
        """Whether the zero passes a pole between two resistances: then more or fewer lie nearer to 0 than it."""
        def nearer(more: float) -> int:
            zero, poles = self.solved(more)
            return len(poles) if zero is None else sum(pole > zero for pole in poles)
        return nearer(low) % 2 != nearer(high) % 2

    def meet(self, low: float, high: float) -> float | None:
        """The resistance between two at which it does; None where the two only seem to meet."""
        def apart(x: float) -> float:
            zero, poles = self.solved(x)
            if zero is None or not poles:
                return 1.0
            pole = min(poles, key=lambda one: abs(log(one / zero)))
            return log(zero / pole)

        a, b = apart(low), apart(high)
        while not a > 0.0 > b and high > low * (1.0 + TIGHT):  # until one pole is the nearest at both ends
            middle = sqrt(low * high)
            low, high = (low, middle) if self.passes(low, middle) else (middle, high)
            a, b = apart(low), apart(high)
        root = bracketed_root(apart, low, high, a, b, 1e-8) if a > 0.0 > b else low
        return root if abs(apart(root)) < HIT else None
