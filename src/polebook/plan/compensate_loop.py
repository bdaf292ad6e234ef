"""The loop that a chain stands in: where its gain is 1, and how many degrees it is then away from singing.

The chain is the forward path, H = V(load)/EMF (or V/I). Of its output the share beta (a source of current: siemens) is
taken back to its input, with the sign that makes the feedback negative at midband. So the loop gain is
T(f) = beta·|H(f)|, and its phase is that which H turns from midband, followed without jumps.
"""

from __future__ import annotations

from dataclasses import dataclass
from math import exp, log
from typing import TYPE_CHECKING

import numpy as np

from polebook.book.ledger import Ledger
from polebook.book.response import response
from polebook.solve.root import bracketed_root
from polebook.solve.sweep import relative_at

if TYPE_CHECKING:
    from polebook.solve.sweep import Array

HALF_TURN = 180.0
NO_CROSSING = "the loop gain stays below 1"
NEVER_BELOW = "the loop gain never falls below 1"
NO_FIGURES = "the chain has no edges"


@dataclass(frozen=True, slots=True)
class Loop:
    """beta as given; gain, beta·|gain| at midband.

    hz, margin_deg              of the crossing above the middle of the band with the least margin; None: `why`
    lower_hz, lower_margin_deg  of the one below it; None where the loop gain does not fall to 1 there
    """

    beta: float
    gain: float
    hz: float | None
    margin_deg: float | None
    lower_hz: float | None
    lower_margin_deg: float | None
    why: str = ""


def loop(of: Ledger, beta: float) -> Loop:
    """The loop that is closed round the chain by `beta`."""
    solution = of.solution
    gain = beta * abs(solution.gain)
    if not of.judged or not solution.band.clean:
        return Loop(beta, gain, None, None, None, None, NO_FIGURES)
    level = log(gain)
    x, size = np.log(solution.sweep.hz), solution.sweep.loss + level
    above = x > log(solution.band.seed_hz)
    upper = _least(of, _crossings(of, x[above], size[above], level), -1.0)
    lower = _least(of, _crossings(of, x[~above], size[~above], level), 1.0)
    why = "" if upper else NEVER_BELOW if size[-1] > 0.0 else NO_CROSSING
    high, low = upper or (None, None), lower or (None, None)
    return Loop(beta, gain, high[0], high[1], low[0], low[1], why)


def _crossings(of: Ledger, x: Array, size: Array, level: float) -> list[float]:
    """Every frequency (Hz) between the points x (ln f) at which the loop gain is 1; size is its logarithm there."""
    net, gains = of.solution.circuit.network, of.solution.gains
    found = []
    for k in np.nonzero((size[:-1] > 0.0) != (size[1:] > 0.0))[0].tolist():
        ends = (float(x[k]), float(x[k + 1]), float(size[k]), float(size[k + 1]))
        found.append(exp(bracketed_root(lambda y: relative_at(net, exp(y), gains) + level, *ends)))
    return found


def _least(of: Ledger, crossings: list[float], lag: float) -> tuple[float, float] | None:
    """(Hz, degrees) of the crossing with the least margin; lag -1 where the phase falls behind, 1 where it leads."""
    if not crossings:
        return None
    hz = np.array(crossings)
    turned = response(of, hz).phase_deg - (HALF_TURN if of.solution.gain < 0.0 else 0.0)
    margins = HALF_TURN - lag * turned
    at = int(np.argmin(margins))
    return float(hz[at]), float(margins[at])
