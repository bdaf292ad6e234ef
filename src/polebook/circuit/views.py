"""Four views of the same elements: what each is worth at a complex frequency.

    midband  low-role C and high-role L are shorts, high-role C and low-role L are open: a resistive network
    full     every element live
    upper    high-role parts live, low-role ones at their midband state
    lower    low-role parts live, high-role ones at their midband state
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

from polebook.circuit.elements import Branch, Part
from polebook.circuit.layout import Layout
from polebook.circuit.placing import Placed
from polebook.stages.stamper import Value

View = Literal["midband", "full", "upper", "lower"]


@dataclass(slots=True)
class Network:
    """A layout with values: entries of conductance and of what multiplies s, numbered as in the layout's stamps."""

    layout: Layout
    values: list[Value]
    conductance: list[Value]
    storing: list[Value]


def network(layout: Layout, values: list[Value]) -> Network:
    """Sums the part values into the entries. Values may be floats or arrays of one shape."""
    count = len(layout.stamps.slot_of)
    conductance: list[Value] = [0.0] * count
    storing: list[Value] = [0.0] * count
    stamps = layout.stamps
    for entry in stamps.unit:
        conductance[entry] = 1.0
    _add(conductance, stamps.conducting, [1.0 / values[part] for part, _ in stamps.conducting])
    _add(conductance, stamps.forward, [values[part] for part, _ in stamps.forward])
    _add(storing, stamps.storing, [values[part] for part, _ in stamps.storing])
    return Network(layout, values, conductance, storing)


def _add(into: list[Value], placed: Placed, values: list[Value]) -> None:
    for (_, signed), value in zip(placed, values, strict=True):
        for entry, sign in signed:
            into[entry] = into[entry] + sign * value


LIVE_IN = {"high": "upper", "low": "lower"}


def live(part: Part, view: View) -> bool:
    """Whether a part that stores acts in a view; else it stands at its midband state."""
    return view == "full" or view == LIVE_IN[part.role]


def each_admittance(net: Network, group: tuple[int, ...], s: Value, view: View) -> list[tuple[int, Value]] | None:
    """(part, admittance) of parts in parallel, opens left away; None where one of them is a short."""
    result: list[tuple[int, Value]] = []
    for index in group:
        part, value = net.layout.parts[index], net.values[index]
        if part.type == "R":
            result.append((index, 1.0 / value))
        elif live(part, view):
            result.append((index, s * value if part.type == "C" else 1.0 / (s * value)))
        elif part.short:
            return None
    return result


def admittance(net: Network, group: tuple[int, ...], s: Value, view: View) -> Value | None:
    """Admittance of parts in parallel: None for a short, 0.0 for an open."""
    each = each_admittance(net, group, s, view)
    return None if each is None else sum((y for _, y in each), 0.0)


def impedance(net: Network, branch: Branch, s: Value, view: View) -> Value | None:
    """Impedance of a branch, its groups in series: None for an open."""
    total: Value = 0.0
    for group in branch.groups:
        y = admittance(net, group, s, view)
        if y is None:
            continue
        if isinstance(y, float) and y == 0.0:
            return None
        total = total + 1.0 / y
    return total


def entry_values(net: Network, s: Value, view: View) -> list[Value]:
    """Every entry at s (rad/s, a complex number or an array of them), in the order of the layout's stamps."""
    if view in ("midband", "lower"):
        result = list(net.conductance)
    elif hasattr(s, "shape") and not any(hasattr(g, "shape") for g in net.conductance[:1]):
        result = _outer(net, s)
    else:
        result = [g + s * c for g, c in zip(net.conductance, net.storing, strict=True)]
    for number, signed in net.layout.stamps.compound:
        z = impedance(net, net.layout.branches[number], s, view)
        if z is not None:
            y = 1.0 / z
            for entry, sign in signed:
                result[entry] = result[entry] + sign * y
    if view in ("full", "lower"):
        for part, signed in net.layout.stamps.washing:
            for entry, sign in signed:
                result[entry] = result[entry] + sign / (s * net.values[part])
    return result


def _outer(net: Network, s: Value) -> list[Value]:
    """As g + s·c for every entry at once: one array operation instead of one each."""
    import numpy as np  # only a sweep needs it here; saves nothing where numpy is in already

    both = np.array(net.conductance)[:, None] + np.array(net.storing)[:, None] * s
    return list(both)


def series_values(net: Network, s: Value, view: View) -> list[Value]:
    """Impedance of every series branch at s, by index among all branches; 0.0 for the others."""
    result: list[Value] = []
    for branch in net.layout.branches:
        if branch.series:
            z = impedance(net, branch, s, view)
            if z is None:
                raise ArithmeticError("a series branch is open")  # the reader refuses such chains
            result.append(z)
        else:
            result.append(0.0)
    return result
