"""What is amiss with a solved bias: cautions, told at the file's own values."""

from __future__ import annotations

from collections.abc import Iterator

from polebook.chain.model import Chain
from polebook.circuit.bias import Operating, Plan, compared
from polebook.circuit.bias_laws import Get, reading
from polebook.circuit.bias_missing import missing
from polebook.circuit.bias_network import Device
from polebook.devices import bjt, fet, ratings
from polebook.problem import Problem
from polebook.quantity import engineering
from polebook.stages.base import GROUP, TERMINALS, slot_key

APART = 0.2  # share by which stated and solved figures may differ
_BIAS_KEYS = {"bjt": "rb1 and rb2", "mosfet": "rg, or rg1 and rg2", "jfet": "rg", "triode": "rg"}


def cautions(plan: Plan, chain: Chain, operating: dict[str, Operating]) -> list[Problem]:
    """Every caution of the bias, stage by stage. `operating` holds plain floats: the solution at the file's values."""
    points = {**operating, **compared(plan, chain.get, operating)}
    lacking = missing(plan, chain)
    found: list[Problem] = []
    for device in (device for part in plan.groups for device in part.group.devices):
        desk = _Desk(chain, device)
        if device.name in plan.floating:
            found.append(desk.floating())
        if device.name in lacking:
            found.append(desk.missing(lacking[device.name]))
        found.extend(desk.lower_device(points[device.name]))
        if device.upper:
            found.extend(desk.upper_device(points[f"{device.name}_upper"]))
    found.extend(_amplifier(chain, name) for name in plan.floating if name not in points or points[name].lower_v is None
                 and name in {amplifier.name for amplifier in plan.amplifiers})
    return found


def _amplifier(chain: Chain, name: str) -> Problem:
    return Problem(chain.places.get(name), f"no d.c. path to the input of {name}",
                   "its non-inverting input hangs on capacitors alone, so nothing sets its voltage",
                   f"give {name} an r_bias, or take couple out", "caution")
