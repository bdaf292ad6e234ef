"""What a capacitor across a stage does to the stage's zeros, and the resistor in series with it that undoes it.

The numerator of a stage's forward transfer begins as 1 - s·sum(1/z) over its zeros z. A capacitor C across the stage
adds C/Gm to that sum (a zero on the right), a resistor R in series with it takes away R·C, whatever else the stage has:
so R = (what C adds)/C brings the sum back to what it is without C. That is 1/gm for a device alone, and then the zero
is gone to infinity (P. R. Gray, P. J. Hurst, S. H. Lewis and R. G. Meyer, Analysis and Design of Analog Integrated
Circuits, 5th ed., section 9.4.3).
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

SAME = 0.01  # a zero that moves by a smaller share is the same one


@dataclass(frozen=True, slots=True)
class Brought:
    """Zeros (rad/s) by rising size: `came` are those that a part brings or moves, `went` those that it takes away."""

    came: tuple[complex, ...]
    went: tuple[complex, ...]


def brought(with_it: Sequence[complex], without: Sequence[complex]) -> Brought:
    """What a part does to a stage's zeros: those that are in both lists but for a hundredth are no business of its."""
    came, went = list(with_it), []
    for zero in without:
        near = min(came, key=lambda one: abs(one - zero), default=None)
        if near is not None and abs(near - zero) <= SAME * abs(zero):
            came.remove(near)
        else:
            went.append(zero)
    return Brought(tuple(sorted(came, key=abs)), tuple(sorted(went, key=abs)))


def added(with_it: Sequence[complex], without: Sequence[complex]) -> float:
    """By how much the sum of 1/z (s) is larger with the capacitor than without."""
    return sum((1.0 / z).real for z in with_it) - sum((1.0 / z).real for z in without)
