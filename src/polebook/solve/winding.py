"""Stability by the winding of the determinant: no pole is computed for it, and no eigenvalue trusted.

The determinant D(s) of the network is the product of the pivots of the elimination and of the denominators of
its branches. With the turn Δ of arg D(jω) from 0+ to infinity and D growing as ω^n0 below and ω^n1 above, the
number of zeros with positive real part is ((n1 - n0) - Δ/(π/2))/2 (argument principle), and n1 - n0 the number
of finite poles that are not at s = 0.
"""

from __future__ import annotations

from dataclasses import dataclass
from math import log, pi

import numpy as np

from polebook.solve.sweep import NARROW, Array, Sweep, wrapped


@dataclass(frozen=True, slots=True)
class Winding:
    """finite: poles not at 0; right: how many have a positive real part. None where the count is no whole number."""

    finite: int | None
    right: int | None


def winding(s: Sweep) -> Winding:
    """Counts poles from a sweep that reaches well below and above all of them."""
    if not s.fine:
        return Winding(None, None)
    turn = float(turns_of(s).sum()) / (pi / 2)
    total = s.sizes.sum(axis=0)
    below = float(total[1] - total[0]) / log(s.hz[1] / s.hz[0])
    above = float(total[-1] - total[-2]) / log(s.hz[-1] / s.hz[-2])
    grown = above - below
    right = (grown - turn) / 2
    whole = abs(grown - round(grown)) < 0.1 and abs(right - round(right)) < 0.1
    if not whole or round(right) < 0:
        return Winding(None, None)
    return Winding(round(grown), round(right))


def turns_of(s: Sweep) -> Array:
    """Turn of arg D between neighbours, rad.

    Where a pivot still turns within a hair's breadth, a zero of it lies on the axis and a pole of another one with
    it (a lossless trap): only their sum has a direction there. Half a turn of the sum is a pole on the axis itself,
    which has no positive real part: it counts as those to the left of it do.
    """
    each = wrapped(s.angles)
    narrow = np.diff(s.hz) <= 4 * NARROW * s.hz[1:]
    result: Array = each.sum(axis=0)
    jump = np.abs(result[narrow] - 2 * pi * np.round(result[narrow] / (2 * pi)))
    result[narrow] = np.where(jump > pi / 2, pi, 0.0)
    return result
