"""What keeps a plan's bias sane: every device in the region that its law holds for, and within its ratings.

A guard is a number that is not negative where all is well. Volts are counted in tenths of the supply, ratings in
neper. The formulas take floats, and complex arrays for exact derivatives.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np

from polebook.chain.model import Chain
from polebook.circuit.bias_laws import Get, reading
from polebook.circuit.bias_network import Device
from polebook.circuit.bias_solution import Operating, Plan
from polebook.devices import fet
from polebook.devices.num import Value

VCE_SAT = 0.2  # V, where the card has none
LEAST_SHARE = 0.1  # of today's current, which a plan goes no lower than
LEAST_A = 1e-5  # the same for a device that is cut off today
APART = 0.2  # share by which what is stated and what the network gives may differ before it is told
VOLTS_EASE, RATING_EASE, CURRENT_EASE, APART_EASE = 0.15, 0.05, 0.0, 0.05


@dataclass(frozen=True, slots=True)
class Guard:
    """value is not below 0 where the device is as it should be; it should be `ease` above it."""

    stage: str
    what: str
    value: Value
    ease: float


def guards(chain: Chain, plan: Plan, points: Mapping[str, Operating], get: Get,
           today: Mapping[str, float]) -> list[Guard]:
    """The guards of every device, always as many and in the same order for one structure.

    get    path -> value of this plan
    today  current in A of every device in the file as it is, by name
    """
    unit = span(chain) / 10.0
    found: list[Guard] = []
    for device in (device for group in plan.groups for device in group.group.devices):
        if device.name in points:
            found += _device(device, device.name, device.card, device.family, points, get, today, unit)
        if device.upper and f"{device.name}_upper" in points:
            found += _device(device, f"{device.name}_upper", device.upper, device.upper_family, points, get, today,
                             unit)
    return found


def span(chain: Chain) -> float:
    """Volts between the rails; 10 V where there are none."""
    ends = [chain.get("supply.positive", 0.0) or 0.0, chain.get("supply.negative", 0.0) or 0.0]
    return abs(ends[0] - ends[1]) or 10.0


def _device(device: Device, name: str, card: str, family: str, points: Mapping[str, Operating], get: Get,
            today: Mapping[str, float], unit: float) -> Iterator[Guard]:
    point, card_get, stage = points[name], reading(card, get), device.name
    current, across = point.current, point.across
    if current is not None:
        least = max(LEAST_SHARE * today.get(name, 0.0), LEAST_A)
        yield Guard(stage, "current", (current - least) / (10.0 * least), CURRENT_EASE)
    left = across
    if point.output_v is not None and point.lower_v is not None:
        left = device.sign * (point.output_v - point.lower_v)
    if left is not None:
        yield Guard(stage, "room", (left - _least(family, card_get, current)) / unit, VOLTS_EASE)
    if device.across and not device.upper and left is not None and across is not None:
        off = left / across - 1.0
        yield Guard(stage, "across", APART - np.where(np.real(off) < 0.0, -off, off), APART_EASE)
    if family == "triode" and point.control_v is not None and point.lower_v is not None:
        yield Guard(stage, "grid", point.lower_v - point.control_v, VOLTS_EASE)
    idss = card_get("idss")
    if idss is not None and current is not None:
        yield Guard(stage, "idss", _ln(idss / _above(current)), RATING_EASE)
    watts = None if current is None or across is None else current * across
    for key, value in (("p_max", watts), ("v_max", across), ("i_max", current)):
        most = card_get(key)
        if most is not None and value is not None:
            yield Guard(stage, key, _ln(most / _above(value)), RATING_EASE)


def _least(family: str, card: Get, current: Value | None) -> Value:
    """The least voltage across a device that its law holds for."""
    if family == "bjt":
        least = card("vce_sat")
        return VCE_SAT if least is None else least
    if family == "triode" or current is None:
        return 0.0
    k = fet.strength(card, current)
    return 0.0 if k is None else fet.overdrive(k, _above(current))


def _above(value: Value) -> Value:
    """What a logarithm can be taken of: nothing in place of what is negative."""
    return np.where(np.real(value) > 1e-9, value, 1e-9)


def _ln(value: Value) -> Any:
    return np.log(value)
