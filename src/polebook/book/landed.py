"""What each capacitor puts on each site: its value or its Miller half, the resistance there, and the time constant.

The parts of a site's time constant, as `sites` sums them, one by one.
"""

from __future__ import annotations

from dataclasses import dataclass

from polebook.book.lumped import Lumped
from polebook.book.sites import site_names
from polebook.book.solution import Solution


@dataclass(frozen=True, slots=True)
class Landed:
    """One capacitor at one node of a site. For a storage only `tau` has a value.

    part   number of the part in the layout
    node   name of the network's node that it lands on
    k      V(other end)/V(node); None where the other end is ground
    farad  how much of it lands there, F;  ohm  driving-point resistance there, Ω;  tau  their product, s
    """

    part: int
    node: str
    k: float | None
    farad: float | None
    ohm: float | None
    tau: float


def landed(of: Solution) -> dict[str, list[Landed]]:
    """By site, the greatest time constant first; `sites.Site.tau` is their sum."""
    layout, values = of.circuit.layout, of.circuit.network.values
    lumped = Lumped(of, site_names(layout))
    found: dict[str, list[Landed]] = {}
    for node, half in lumped.landings():
        if half is None or not half.of_use or not half.share or not lumped.hears(node):
            continue
        ohm, farad = lumped.ohm(node), float(values[half.part]) * half.share
        one = Landed(half.part, layout.names[node], half.k, farad, ohm, ohm * farad)
        found.setdefault(lumped.names[node], []).append(one)
    for node, part, tau in lumped.storages():
        found[lumped.names[node]] = [Landed(part, layout.names[node], None, None, None, tau)]
    return {name: sorted(each, key=lambda one: -abs(one.tau)) for name, each in found.items()}

