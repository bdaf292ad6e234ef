"""How many digits double precision leaves: the network once more with every entry off by a little, and what that moves.

An entry is a sum that was rounded. Where a figure rests on what all but cancels in one (an emitter on 10 GΩ: what gets
through is 1e-14 of gm), shaking the entries moves it by as much more as rounding them has spoilt it.
"""

from __future__ import annotations

from random import Random

from polebook.circuit.views import Network
from polebook.stages.stamper import Value

SHAKE = 1e-11  # relative: far above rounding, and little enough for a figure with half its digits to move in proportion
TURNS = 3  # one alone may by chance move what cancels together
ROUNDING = 2.0**-52
FEW = 1e-8  # error above which a figure is not told; what shaking tells may be some times too little


def shaken(net: Network, turn: int) -> Network:
    """The network with every entry off by up to SHAKE, each by a share of its own; other shares at every turn."""
    random = Random(turn)

    def off(entries: list[Value]) -> list[Value]:
        return [x * (1.0 + random.uniform(-SHAKE, SHAKE)) for x in entries]

    return Network(net.layout, net.values, off(net.conductance), off(net.storing))


def error(figure: complex, moved: complex) -> float:
    """What rounding may have done to a figure that shaking has moved, relative; infinite where it is all gone."""
    if figure == moved:
        return 0.0
    return abs(moved / figure - 1.0) * ROUNDING / SHAKE if figure else float("inf")
