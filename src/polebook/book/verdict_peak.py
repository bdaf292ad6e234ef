"""Why the response peaks: the line that rises, the parts that ring, and the part that calms it most.

At the top of the response d ln|H|/d ln f is 0, so that the height moves with a part as |H| itself does there
(envelope theorem): one adjoint solution at the top tells what every part does to the peak.
"""

from __future__ import annotations

from math import exp
from typing import TYPE_CHECKING

import numpy as np

from polebook.book.account import account
from polebook.book.shares import derivatives
from polebook.book.verdict_how import OPAMP, branches_of, kind_of, topology_of
from polebook.book.verdict_lever import chosen
from polebook.book.verdict_words import UNITS, figure, loss, sentences, stated
from polebook.circuit.elements import Part
from polebook.solve.edges import DECIBEL
from polebook.solve.root import bracketed_maximum
from polebook.solve.sweep import relative_at
from polebook.stages.base import slot_of
from polebook.stages.terminals import ACROSS_LOWER

if TYPE_CHECKING:
    from polebook.book.ledger import Ledger

FELT = 0.15  # share of the greatest pull from which another part counts
SLIGHT = 0.005  # dB; less is no peak


def top_hz(of: Ledger) -> float:
    """Frequency (Hz) at which |H| is greatest."""
    sweep, solution = of.solution.sweep, of.solution
    k = int(np.argmax(sweep.loss))
    if not 0 < k < len(sweep.hz) - 1:
        return float(sweep.hz[k])
    x = np.log(sweep.hz[k - 1:k + 2])
    y = sweep.loss[k - 1:k + 2]

    def at(z: float) -> float:
        return relative_at(solution.circuit.network, exp(z), solution.gains)

    return exp(bracketed_maximum(at, (float(x[0]), float(x[1]), float(x[2])),
                                 (float(y[0]), float(y[1]), float(y[2])))[0])


def pulls(of: Ledger, hz: float) -> dict[int, float]:
    """dB that 1 % more of each C, L and time constant adds to the peak at hz."""
    found = derivatives(of.solution.circuit.network, hz).by_part
    return {index: DECIBEL * d.real / 100.0 for index, d in found.items()}


def missed(of: Ledger) -> tuple[str, str]:
    """(where it rises and by what, what calms it), as sentences."""
    hz = top_hz(of)
    found = pulls(of, hz)
    name, rise = rising(of, hz)
    where = f"{name} rises by {loss(rise)} at {figure(hz, 'Hz')}"
    return sentences(where, cause(of, found)), sentences(_calm(of, found))


def rising(of: Ledger, hz: float) -> tuple[str, float]:
    """(node, dB) that rises most at hz, as the account books it."""
    lost = account(of.solution, of.held, hz, {}).lost
    db, name = min((db, name) for name, db in lost.items() if db is not None)
    return name, -db


def _named(of: Ledger, index: int) -> str:
    part = of.solution.circuit.layout.parts[index]
    name, value = f"{part.stage}.{part.name}", float(of.solution.circuit.network.values[index])
    return name if part.type == "tau" else f"{name} ({stated(value, UNITS[part.type])})"


def cause(of: Ledger, found: dict[int, float]) -> str:
    """What the parts with the greatest pull, or the greatest weight in a pole, do to each other."""
    parts = of.solution.circuit.layout.parts
    order = sorted(found, key=lambda k: -abs(found[k]))
    for index in (k for k in order if abs(found[k]) > FELT * abs(found[order[0]])):
        part = parts[index]
        if part.name in ACROSS_LOWER and found[index] > 0 and topology_of(of, part.stage) == "follower":
            load = next((k for k in order if found[k] > 0 and k != index and parts[k].type == "C"), None)
            if load is not None:
                return f"{part.stage} is a follower and turns {_named(of, load)} into negative resistance at its input"
    if len(order) < 2:
        return ""
    first = order[0]
    second = next((k for k in order[1:] if _other(parts[first], parts[k], found[k] / found[first])), order[1])
    if parts[first].name == "c_peak":
        return f"{_named(of, first)} lifts it by bypassing {_below(of, first)}"
    loop = next((parts[k].stage for k in (first, second) if kind_of(of, parts[k].stage) in OPAMP), "")
    if loop:
        return _rings(of, loop, [k for k in order if parts[k].name != "cf"][:2])
    if {parts[first].type, parts[second].type} != {"C", "L"}:
        return f"{_named(of, first)} has the most pull on it"
    return f"{_named(of, first)} rings with {_named(of, second)}"


def _other(first: Part, second: Part, pull: float) -> bool:
    """A coil for a capacitor, or the converse, that is felt."""
    return {first.type, second.type} == {"C", "L"} and abs(pull) > FELT


def _rings(of: Ledger, loop: str, two: list[int]) -> str:
    """What an op-amp's loop rings between; a capacitor across its feedback resistor is its brake."""
    text = f"{loop}'s loop rings between {' and '.join(_named(of, k) for k in two)}"
    if not any(at_input(of, k, loop) for k in two) or not of.chain.get(f"{loop}.rf"):
        return text
    brake = of.chain.get(f"{loop}.cf")
    some = f"only {stated(brake, 'F')} of" if brake else "no"
    return f"{text}, with {some} cf across rf"


def at_input(of: Ledger, index: int, stage: str) -> bool:
    """Whether a capacitance lies at the inverting input of an op-amp stage."""
    part, segments = of.solution.circuit.layout.parts[index], of.solution.circuit.layout.segments
    before = next(segment.before for segment in segments if segment.name == stage)
    held = kind_of(of, stage) == "transimpedance" and any(before in (b.i, b.j) for b in branches_of(of, index))
    return part.type == "C" and (held or (part.stage == stage and part.name.startswith("cin_")))


def _below(of: Ledger, index: int) -> str:
    """The lower resistor that a c_peak lies across."""
    parts = of.solution.circuit.layout.parts
    return next((_named(of, k) for k, part in enumerate(parts)
                 if part.stage == parts[index].stage and slot_of(part.name) == "r_low"), "")


def _calm(of: Ledger, found: dict[int, float]) -> str:
    """The part that can be chosen and pulls most."""
    parts = of.solution.circuit.layout.parts
    known = {k: db for k, db in found.items() if chosen(of, parts[k]) and parts[k].type != "tau"}
    best = max(known, key=lambda k: abs(known[k]), default=None)
    if best is None or abs(known[best]) < 0.0005:
        return ""
    step = f"1 % {'more' if known[best] < 0 else 'less'} {parts[best].stage}.{parts[best].name}"
    return f"{step} takes {loss(abs(known[best]), digits=3)} off"
