"""The frequencies at which all builds of a chain are looked at, set by where the nominal chain turns.

The nominal chain has been swept so that nothing turns by over a radian between two points (solve.sweep). From that
sweep comes how fast its fastest pivot or line gain turns, by frequency; a build's poles lie elsewhere, so what turns
fast in one place is taken to do so a good way to either side of it. The same for how fast the response falls.
"""

from __future__ import annotations

import numpy as np

from polebook.plan.spread.normal import Array
from polebook.solve.edges import OUTWARD
from polebook.solve.sweep import Sweep, wrapped

TURN = 0.9  # rad that a pivot or a line's gain turns between neighbours
FALL = 0.8  # neper that the response falls between neighbours, as long as it is of interest
OF_INTEREST = -1.5  # neper below midband
APART = 0.3  # ln f to either side that a build's poles may lie from the nominal ones
FINEST, WIDEST = 0.02, 3.0  # ln f between neighbours
LEVEL = 0.7  # neper within which an end of the sweep counts as level with the band


def grid(s: Sweep) -> Array:
    """Frequencies in Hz, rising, from end to end of the nominal sweep; beyond where the response is level there."""
    x = np.log(s.hz)
    width = np.diff(x)
    with np.errstate(all="ignore"):
        each = np.abs(np.concatenate([wrapped(s.angles), wrapped(s.turns)])).max(axis=0) / TURN
        seen = np.maximum(s.loss[1:], s.loss[:-1]) > OF_INTEREST
        fall = np.where(seen, np.abs(np.diff(s.loss)) / FALL, 0.0)
        rate = np.maximum(each, fall) / width
    sharp = ~(rate < 1.0 / FINEST)
    near = _around(x, np.where(sharp, 1.0 / FINEST, rate))
    steps = np.concatenate([[0.0], np.cumsum(np.maximum(near, 1.0 / WIDEST) * width)])
    count = max(2, int(np.ceil(steps[-1])) + 1)
    points = np.interp(np.linspace(0.0, steps[-1], count), steps, x)
    own = np.unique(np.concatenate([x[:-1][sharp], x[1:][sharp]]))  # as fine as the nominal chain itself needs it
    points = np.unique(np.concatenate([points, own]))
    level = s.loss.max() - LEVEL
    below = [points[0] - OUTWARD] if s.loss[0] > level else []
    above = [points[-1] + OUTWARD] if s.loss[-1] > level else []
    result: Array = np.exp(np.concatenate([below, points, above]))
    return result


def _around(x: Array, rate: Array) -> Array:
    """For each interval the greatest rate of all that lie within `APART` of it."""
    first = np.searchsorted(x[1:], x[:-1] - APART)
    last = np.searchsorted(x[:-1], x[1:] + APART, side="right")
    return np.array([rate[a:b].max() for a, b in zip(first.tolist(), last.tolist(), strict=True)])
