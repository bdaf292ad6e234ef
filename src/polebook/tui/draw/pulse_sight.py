"""What of a time axis is in sight, and where its cursor is: as the keys change them. Seconds throughout, from 0 on."""

from __future__ import annotations

from dataclasses import dataclass, replace
from math import ceil, floor, isfinite

from polebook.tui.draw.plot.axis import step_of
from polebook.tui.draw.plot.sight import PAN, ZOOM
from polebook.tui.view import Times

LEAST = 1e-4  # of the whole, that a window spans
STEPS = 100  # of the cursor, at most, over a window: each about a column of a usual plot
_NEAR = 0.25  # of a step: rounding of a time to few digits is less
_DIGITS = 9
_SAME = 1e-9  # of a window: two that differ by less are one
Window = tuple[float, float]


@dataclass(frozen=True, slots=True)
class Reach:
    """What there is to look at: `end` of the window that the figures ask for, as far as it goes, where one begins."""

    end: float
    most: float
    begin: float

    @property
    def whole(self) -> Window:
        return 0.0, self.end


def window(at: Times, reach: Reach) -> Window:
    """(low, high) that is shown."""
    if at.low_s is None or at.high_s is None:
        return reach.whole
    return _held(at.low_s, at.high_s, reach)


def _held(low: float, high: float, reach: Reach) -> Window:
    """A window within the limits, wide enough."""
    if not (isfinite(low) and isfinite(high)):
        return reach.whole
    size = min(max(high - low, LEAST * reach.end), reach.most)
    low = min(max(low, 0.0), reach.most - size)
    return low, low + size


def cursor(at: Times, reach: Reach) -> float:
    """Where the cursor is: where one begins, until it was moved."""
    low, high = window(at, reach)
    stated = at.cursor_s if at.cursor_s is not None and isfinite(at.cursor_s) else reach.begin
    return min(max(stated, low), high)


def moved(at: Times, reach: Reach, by: int) -> Times:
    """The cursor a step of about a column further, on round values; a window of one's own goes along."""
    low, high = window(at, reach)
    step, t = step_of(high - low, STEPS), cursor(at, reach)
    number = floor(t / step + _NEAR) + by if by > 0 else ceil(t / step - _NEAR) + by
    to = min(max(float(f"{number * step:.{_DIGITS}g}"), 0.0), reach.most)
    if at.low_s is None:
        return replace(at, cursor_s=min(max(to, low), high))
    if not low <= to <= high:
        at = panned(at, reach, by)
    return replace(at, cursor_s=to)


def zoomed(at: Times, reach: Reach, by: int) -> Times:
    """Closer (by > 0) or further about the cursor, which keeps its place on the screen.

    On the way out the window of the figures is met, and left behind with the next step.
    """
    (low, high), t = window(at, reach), cursor(at, reach)
    size = min(max((high - low) * (1.0 / ZOOM if by > 0 else ZOOM), LEAST * reach.end), reach.most)
    factor = size / (high - low)
    if abs(factor - 1.0) < _SAME:
        return at
    new = _held(t - (t - low) * factor, t + (high - t) * factor, reach)
    inside = high - low < reach.end * (1.0 - _SAME)
    if by < 0 and inside and new[1] - new[0] >= reach.end * (1.0 - _SAME):
        return Times(cursor_s=t)
    return Times(*new, min(max(t, new[0]), new[1]))


def panned(at: Times, reach: Reach, by: int) -> Times:
    """The window a quarter of itself to the left or right; the cursor is taken along where it would leave."""
    (low, high), t = window(at, reach), cursor(at, reach)
    new = _held(low + PAN * by * (high - low), high + PAN * by * (high - low), reach)
    return Times(*new, min(max(t, new[0]), new[1]))


def to_end(at: Times, reach: Reach, by: int) -> Times:
    """The window to the beginning or end of the whole; where it is there, the cursor to the window's end."""
    (low, high), t = window(at, reach), cursor(at, reach)
    size = high - low
    new = _held(0.0, size, reach) if by < 0 else _held(reach.end - size, reach.end, reach)
    if at.low_s is None or abs(new[0] - low) < _SAME * size:
        return replace(at, cursor_s=low if by < 0 else high)
    return Times(*new, min(max(t, new[0]), new[1]))


def shown_at(at: Times, reach: Reach, t: float) -> Times:
    """The cursor at a time, the window moved where that is out of sight."""
    low, high = window(at, reach)
    if not low <= t <= high:
        new = _held(t - (high - low) / 2.0, t + (high - low) / 2.0, reach)
        return Times(*new, min(max(t, new[0]), new[1]))
    return replace(at, cursor_s=t)
