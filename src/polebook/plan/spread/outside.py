"""Built chains in which a device has left the region that its law holds for: as circuit.bias_region, for arrays."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping
from typing import TYPE_CHECKING

import numpy as np

from polebook.circuit.bias import Operating, Plan
from polebook.circuit.bias_laws import reading
from polebook.devices import fet
from polebook.stages.stamper import Value

if TYPE_CHECKING:
    from numpy.typing import NDArray

VCE_SAT = 0.2  # V, where the card has none


def outside(plan: Plan, get: Callable[[str], Value | None],
            points: Mapping[str, Operating]) -> Iterator[tuple[str, NDArray[np.bool_] | bool]]:
    """(stage, whether its device, or a cascode's upper one, is cut off, saturated or not pinched off)."""
    for device in (device for part in plan.groups for device in part.group.devices):
        yield device.name, _left(device.family, device.card, device.sign, points[device.name], get)
        if device.upper:
            point = points[f"{device.name}_upper"]
            yield device.name, _left(device.upper_family, device.upper, device.sign, point, get)


def _left(family: str, card: str, sign: int, point: Operating,
          get: Callable[[str], Value | None]) -> NDArray[np.bool_] | bool:
    current, across = point.current, point.across
    if point.output_v is not None and point.lower_v is not None:
        across = sign * (point.output_v - point.lower_v)  # what the rails leave, also where a voltage is stated
    left: NDArray[np.bool_] | bool = False if current is None else np.asarray(current) <= 0.0
    if across is None:
        return left
    if family in ("bjt", "triode"):
        stated = get(f"device.{card}.vce_sat") if family == "bjt" else 0.0
        return left | (np.asarray(across) < (VCE_SAT if stated is None else stated))
    k = fet.strength(reading(card, get), current)
    if k is None or current is None:
        return left
    pinched: NDArray[np.bool_] = np.asarray(across < fet.overdrive(k, current))
    return left | pinched
