"""What a compensation is judged by: poles of the upper network, the stage's zeros, edge, peaking, overshoot, the loop.

Where a couple of poles or zeros is complex it counts once, by its size.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from math import pi

from polebook.book.ledger import Ledger
from polebook.book.poles import Root
from polebook.plan.compensate_loop import Loop, loop
from polebook.plan.compensate_nodes import two_nodes
from polebook.solve.zeros import zeros as all_zeros

NEAR = 0.5  # a pole of the upper network is the one of the full network that lies within this share of it


@dataclass(frozen=True, slots=True)
class Figures:
    """Hz, dB, %, s; None for what the chain does not have.

    first, second  poles of the upper network, the two that lie nearest to 0: what is one of a pair counts once
    split          the second pole that the stage's two nodes make alone
    zeros          the stage's own above the middle of the band, by rising size
    """

    edge_hz: float | None
    peaking_db: float | None
    overshoot_percent: float | None
    rise_s: float | None
    first: Root | None
    second: Root | None
    split: Root | None
    zeros: tuple[Root, ...]
    loop: Loop | None


def figures(of: Ledger, stage: str, beta: float | None) -> Figures:
    """Of a chain, in which `stage` is looked at; beta of the loop that it stands in, None without one."""
    first, second = (*upper_poles(of), None, None)[:2]
    alone = two_nodes(of, stage)
    return Figures(
        of.upper_hz, of.solution.band.peaking_db if of.judged else None, of.pulse.overshoot_percent,
        of.pulse.rise_time_s, first, second, None if alone is None else Root(alone[1], stage),
        tuple(Root(z, stage) for z in upper_zeros(of, stage) or ()), None if beta is None else loop(of, beta))


def upper_poles(of: Ledger) -> list[Root]:
    """Poles of the upper network by rising size, one of each pair, with the stage that makes them; [] without them.

    The stage is that of the nearest pole of the full network, None where couplings have moved that one too far.
    """
    known = [root for root in of.poles.roots or () if root.value]
    result = []
    for value in dominant_first(of):
        near = min(known, key=lambda root: abs(root.value - value), default=None)
        named = near is not None and abs(near.value - value) < NEAR * abs(value)
        result.append(Root(value, near.stage if named and near is not None else None))
    return result


def dominant_first(of: Ledger) -> list[complex]:
    """Poles of the upper network (rad/s) by rising size, one of each pair."""
    found: Iterable[complex] = of.pulse.poles.tolist()
    return sorted((complex(p) for p in found if p and p.imag >= 0.0), key=abs)


def dominant_hz(of: Ledger) -> float | None:
    """|p|/(2·pi) of the pole of the upper network that lies nearest to 0."""
    poles = dominant_first(of) if of.judged else []
    return abs(poles[0]) / (2.0 * pi) if poles else None


def upper_zeros(of: Ledger, stage: str) -> list[complex] | None:
    """Zeros of one stage (rad/s) above the middle of the band; None where they are not resolved."""
    hz = of.solution.sweep.hz
    found = all_zeros(of.solution.circuit.network, float(hz[0]), float(hz[-1]))
    own = next((one.roots for one in found if one.stage == stage), None)
    if own is None:
        return None
    middle = 2.0 * pi * of.solution.band.seed_hz
    return sorted((complex(z) for z in own.tolist() if abs(z) > middle), key=abs)
