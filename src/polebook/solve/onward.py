"""The midband network from source to load: what each line does with all that follows it taken away."""

from __future__ import annotations

from dataclasses import dataclass

from polebook.circuit.views import Network, entry_values, series_values
from polebook.solve.fold import NotHeld, eliminate, local_voltages
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
        try:
            taken = [eliminate(a, step, series) for step in layout.onward[index]]
        except NotHeld:
            raise NotHeld(segment.before) from None
        origin = layout.origins[index]
        own, reach = (a[slot] for slot in layout.ends[index])
        driven = layout.driven[segment.after] or segment.after == origin
        output = 0.0 if driven else _ohm(own)
        if segment.after == segment.before:
            result.append(Open(1.0, output))
            continue
        gain = None
        if own != 0.0:
            v = local_voltages(taken, {origin: 1.0, segment.after: -reach / own})
            gain = v[segment.after] / v[segment.before]
        result.append(Open(gain, output))
    return result


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
