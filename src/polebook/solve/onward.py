"""The midband network from source to load: what each line does with all that follows it taken away."""

from __future__ import annotations

from dataclasses import dataclass

from polebook.circuit.elements import Segment
from polebook.circuit.views import Network, entry_values, series_values
from polebook.solve.fold import NotHeld, Taken, eliminate, local_voltages
from polebook.stages.stamper import GROUND, Value


@dataclass(slots=True)
class Open:
    """Of one line, with what follows removed: V(after)/V(before), and the resistance at its output, ohms.

    None stands for what has no bound (an output that only a current drives).
    """

    gain: Value | None
    output_ohm: Value | None


def onward(net: Network) -> list[Open]:
    """Open gains and output resistances by segment, source first. Floats only."""
    layout = net.layout
    a: list[Value] = [0.0] * layout.slots
    entries = entry_values(net, 0.0, "midband")
    series = series_values(net, 0.0, "midband")
    result = [_source(net, a, entries, series)]
    for index in range(1, len(layout.segments)):
        segment = layout.segments[index]
        start, end = layout.stamps.ranges[index]
        for entry in range(start, end):
            a[layout.stamps.slot_of[entry]] += entries[entry]
        way = layout.onward[index]
        for branch, own_slot, reach_slot in way.resistive:
            a[own_slot] += 1.0 / series[branch]
            a[reach_slot] -= 1.0 / series[branch]
        try:
            taken = [eliminate(a, step, series) for step in way.steps]
        except NotHeld:
            raise NotHeld(segment.before) from None
        origin = way.origin
        own, reach = (a[slot] for slot in way.end)
        driven = layout.driven[segment.after] or segment.after == origin
        output = 0.0 if driven else _ohm(own)
        if segment.after == segment.before:
            result.append(Open(1.0, output))
            continue
        result.append(Open(_gain(segment, taken, origin, own, reach), output))
    return result


def _gain(segment: Segment, taken: list[Taken], origin: int, own: float, reach: float) -> float | None:
    """V(after)/V(before) with the known node at 1 V."""
    known: dict[int, Value] = {origin: 1.0}
    if segment.after != origin:
        if own == 0.0:
            return None
        known[segment.after] = -reach / own
    v = local_voltages(taken, known)
    return float(v[segment.after] / v[segment.before]) if v[segment.before] else None


def _ohm(siemens: float) -> float | None:
    return 1.0 / siemens if siemens else None


def _source(net: Network, a: list[Value], entries: list[Value], series: list[Value]) -> Open:
    layout = net.layout
    start, end = layout.stamps.ranges[0]
    if layout.emf == GROUND:
        y = sum(entries[start:end])
        a[layout.seed[0]], a[layout.seed[1]] = y, -1.0
        return Open(_ohm(y), _ohm(y))
    if layout.seed[0] < 0:
        return Open(1.0, 0.0)
    ohm = sum(series[number] for number, _ in enumerate(layout.segments[0].branches))
    a[layout.seed[0]], a[layout.seed[1]] = 1.0 / ohm, -1.0 / ohm
    return Open(1.0, ohm)
