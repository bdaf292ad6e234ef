"""Capacitors of a preferred series that keep the marks with the least total, from values that need not be of it."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from polebook import series
from polebook.plan.couple_end import Array, LowEnd, Mark

_MOST = 400  # steps of one repair; a decade of E192 and more


def upward(farads: Array, row: str) -> Array:
    """Each value, or the next one above it that is in the series."""
    return np.array([series.at_least(one, row) for one in farads.tolist()])


def snapped(low: LowEnd, farads: Array, row: str, marks: Sequence[Mark]) -> Array | None:
    """Values of the series `row` that keep every mark: upward from `farads`, then down as long as a total falls.

    At the end no part can be stepped down, and none can be stepped down or up with others following so that the total
    falls. None where even far larger values do not keep the marks.
    """
    found = upward(farads, row)
    for _ in range(_MOST):
        if low.held(found, marks):
            break
        found = np.array([series.up(one, row) for one in found.tolist()])
    else:
        return None
    found = _lowered(low, found, row, marks)
    while (better := _exchanged(low, found, row, marks)) is not None:
        found = better
    return found


def _lowered(low: LowEnd, farads: Array, row: str, marks: Sequence[Mark], fixed: int = -1) -> Array:
    """Stepped down one part at a time, the largest saving first, as long as the marks are kept; not part `fixed`."""
    floor = low.least
    while True:
        down = [series.down(one, row) for one in farads.tolist()]
        for at in sorted(range(len(down)), key=lambda at: down[at] - float(farads[at])):
            tried = _stepped(farads, at, down[at])
            if at != fixed and down[at] >= floor[at] and low.held(tried, marks):
                farads = tried
                break
        else:
            return farads


def _exchanged(low: LowEnd, farads: Array, row: str, marks: Sequence[Mark]) -> Array | None:
    """The best of: one part down and others up until the marks are kept; one part up and others down. None for none
    with a smaller total."""
    floor = low.least
    tried: list[Array] = []
    for at, one in enumerate(farads.tolist()):
        down = series.down(one, row)
        if down >= floor[at] and (mended := _mended(low, _stepped(farads, at, down), row, marks, at)) is not None:
            tried.append(_lowered(low, mended, row, marks, at))
        up = _stepped(farads, at, series.up(one, row))
        if low.held(up, marks):
            tried.append(_lowered(low, up, row, marks, at))
    best = min(tried, key=lambda each: float(each.sum()), default=farads)
    return best if best.sum() < farads.sum() * (1 - 1e-12) else None


def _mended(low: LowEnd, farads: Array, row: str, marks: Sequence[Mark], fixed: int) -> Array | None:
    """Stepped up, not part `fixed`, always the part that mends the worst miss at the least capacitance."""
    most = float(farads.sum()) * 2
    for _ in range(_MOST):
        worst = min(marks, key=lambda mark: mark.spare(low.loss(farads, mark.hz)))
        if low.held(farads, marks):
            return farads
        slopes = low.slopes(farads, worst.hz) * (1 if worst.floor else -1)
        slopes[fixed] = 0.0
        up = np.array([series.up(one, row) for one in farads.tolist()])
        worth = slopes * np.log(up / farads) / (up - farads)
        at = int(np.argmax(worth))
        if worth[at] <= 0.0 or farads.sum() > most:
            return None
        farads = _stepped(farads, at, float(up[at]))
    return None


def _stepped(farads: Array, at: int, value: float) -> Array:
    changed = farads.copy()
    changed[at] = value
    return changed
