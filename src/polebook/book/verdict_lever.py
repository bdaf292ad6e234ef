"""The part with the most leverage to mend a figure: what 1 % of it moves, and what that does to the gain."""

from __future__ import annotations

from dataclasses import dataclass
from math import isfinite
from typing import TYPE_CHECKING

from polebook.book.verdict_words import slope
from polebook.circuit.elements import Part
from polebook.stages.base import slot_of

if TYPE_CHECKING:
    from polebook.book.ledger import Ledger

OWN = 0.5  # share of the greatest leverage from which the owner itself is named
LEAST = 0.05  # leverage below which there is none to speak of
FELT = 0.05  # leverage on the gain from which a remedy's price is told
BIAS = frozenset(("bias_top", "bias_bottom", "bias_single"))


@dataclass(frozen=True, slots=True)
class Lever:
    """A part or a stated current, d ln(figure)/d ln(it) and d ln(gain)/d ln(it)."""

    name: str
    value: float
    gain: float

    def step(self, raised: bool) -> str:
        """The step that raises or lowers the figure."""
        return f"1 % {'more' if self.more(raised) else 'less'} {self.name}"

    def more(self, raised: bool) -> bool:
        return (self.value > 0) == raised

    def price(self, raised: bool) -> str:
        """What the step does to the gain, where it is felt."""
        change = self.gain if self.more(raised) else -self.gain
        if abs(change) < FELT:
            return ""
        return f" and the gain by {slope(change)}" if change > 0 else f" and costs {slope(change)} of gain"


def fitted(of: Ledger, stage: str, part: str) -> bool:
    """Whether its user has chosen the part's value, and can choose another one."""
    found = next((one for one in of.chain.stages if one.name == stage), None)
    if found is None:
        return part == "couple"
    if found.kind == "block":
        return part in ("couple", "c_load")
    return part != "stray"


def chosen(of: Ledger, part: Part) -> bool:
    """Whether a change of it can be asked for: fitted parts, a cable, another amplifier."""
    stated = (part.stage, part.name) in of.leverage.parts
    return part.type == "tau" or (stated and (part.stage in ("source", "load") or fitted(of, part.stage, part.name)))


def strongest(of: Ledger, figure: str) -> Lever | None:
    """What moves "gain", "lower_edge" or "upper_edge" most; bias resistors only where nothing else does."""
    found: list[tuple[bool, float, Lever]] = []
    parts = {(part.stage, part.name) for part in of.solution.circuit.layout.parts}
    rows = [(key, row) for key, row in of.leverage.parts.items() if key in parts]
    rows += [(key, row) for key, (_, row) in of.leverage.currents.items()]
    for (stage, name), row in rows:
        value, gain = row[figure], row["gain"]
        if value and isfinite(value) and fitted(of, stage, name):
            lever = Lever(f"{stage}.{name}", value, gain or 0.0)
            found.append((slot_of(name) not in BIAS, abs(value), lever))
    best = max(found, key=lambda each: each[:2], default=None)
    return best[2] if best and abs(best[2].value) >= LEAST else None


def lever(of: Ledger, end: str, owner: int, called: str) -> str:
    """What mends the edge: the owner itself where it can be chosen and has the leverage, else the part that has most.

    The owner is called by its name, or "it" where the sentence before is of it.
    """
    figure, part = f"{end}_edge", of.solution.circuit.layout.parts[owner]
    row = of.leverage.parts.get((part.stage, part.name), of.leverage.elements[owner])
    own, best = row[figure] or 0.0, strongest(of, figure)
    own = own if isfinite(own) else 0.0
    raised, verb = end == "upper", "lifts" if end == "upper" else "lowers"
    if own and chosen(of, part) and (best is None or abs(own) >= OWN * abs(best.value)):
        it = Lever("of it" if called == "it" else called, -own if part.type == "tau" else own, row["gain"] or 0.0)
        return f"{it.step(raised)} {verb} the edge by {slope(own)}"  # of a time constant the file states the frequency
    if best is None:
        return ""
    return f"most leverage: {best.step(raised)} {verb} the edge by {slope(best.value)}{best.price(raised)}"


def gain_lever(of: Ledger, raised: bool) -> str:
    """What moves the gain up (`raised`) or down the most."""
    best = strongest(of, "gain")
    what = "the midband gain" if of.chain.get("target.reference") else "the gain"
    move = ("adds", "to") if raised else ("takes", "from")
    return f"most leverage: {best.step(raised)} {move[0]} {slope(best.value)} {move[1]} {what}" if best else ""
