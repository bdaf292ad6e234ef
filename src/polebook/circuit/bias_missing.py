"""What a stage lacks whose quiescent current can't be had."""

from __future__ import annotations

from polebook.chain.model import Chain
from polebook.circuit.bias_compile import Compiled
from polebook.circuit.bias_laws import lacking
from polebook.circuit.bias_solution import Plan
from polebook.stages.base import GROUP, TERMINALS, slot_key

BIAS_KEYS = {"bjt": "rb1 and rb2", "mosfet": "rg1 and rg2", "jfet": "rg", "triode": "rg"}


def missing(plan: Plan, chain: Chain) -> dict[str, tuple[str, ...]]:
    """Stage name -> what could be given so that its current can be had, each as a part of a sentence.

    ("ic", "rb1 and rb2 at its base") reads: give ic, or rb1 and rb2 at its base.
    """
    return {
        device.name: _alternatives(plan, part, k, chain)
        for part in plan.groups
        for k, device in enumerate(part.group.devices)
        if not device.current and part.cols.current[k] not in part.choice.settled
    }


def _alternatives(plan: Plan, part: Compiled, k: int, chain: Chain) -> tuple[str, ...]:
    device = part.group.devices[k]
    terminals = TERMINALS[GROUP[device.family]]
    ways = [slot_key("current", device.family)]
    keys = lacking(device, chain.get)
    if keys:
        ways.append(f"{' and '.join(keys)} on card {device.card}")
    if device.name in plan.floating:
        ways.append(f"{BIAS_KEYS[device.family]} at its {terminals['control']}")
    if device.fed_lower:
        ways.append(f"{slot_key('r_low', device.family)} at its {terminals['lower']}")
    coupled = f"{device.name}.couple" in chain.numbers
    unknown = [
        other for n, other in enumerate(part.group.devices)
        if n != k and not other.current and part.cols.current[n] not in part.choice.settled
    ]
    if not coupled and unknown:
        ways.append("couple, which parts it from the stage before")
    if len(ways) == 1:
        ways.append(f"a resistor that sets the current of its {terminals['lower']}: {slot_key('r_low', device.family)}")
    return tuple(ways)
