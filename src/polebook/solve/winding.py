"""Stability by the winding of the determinant: no pole is computed for it, and no eigenvalue trusted.

The determinant D(s) of the network is, up to factors without zeros on the right, the product of the pivots of
the elimination. With the turn Δ of arg D(jω) from 0+ to infinity and D growing as ω^n0 below and ω^n1 above,
the number of zeros with positive real part is ((n1 - n0) - Δ/(π/2))/2 (argument principle). n1 - n0 is the
number of finite poles that are not at s = 0.
"""

from __future__ import annotations

from dataclasses import dataclass
from math import log, pi

from polebook.solve.sweep import Sweep, wrapped


@dataclass(frozen=True, slots=True)
class Winding:
    """finite poles not at 0, right: how many have a positive real part, None where the count came out no integer."""

    finite: int | None
    right: int | None


def winding(s: Sweep) -> Winding:
    """Counts poles from a sweep that reaches well below and above all of them."""
    turn = float(wrapped(s.angles).sum()) / (pi / 2)
    total = s.sizes.sum(axis=0)
    below = float(total[1] - total[0]) / log(s.hz[1] / s.hz[0])
    above = float(total[-1] - total[-2]) / log(s.hz[-1] / s.hz[-2])
    finite = above - below
    right = (finite - turn) / 2
    if abs(finite - round(finite)) > 0.1 or abs(right - round(right)) > 0.1 or round(right) < 0:
        return Winding(None, None)
    return Winding(round(finite), round(right))
