"""What of a frequency axis is in sight, and where its cursor is: as the keys change them. Hz throughout.

`whole` is the window that the figures ask for: what a plot without a window of its own shows.
"""

from __future__ import annotations

from dataclasses import replace
from math import ceil, floor, log10

from polebook.tui.view import Plot

LEAST_HZ, MOST_HZ = 1e-6, 1e12
LEAST_DECADES = 0.5
ZOOM = 2.0
PAN = 0.25  # of a window
USUAL_COLUMNS = 64  # of a plot on a terminal of 80 columns
_STEPS = (1, 2, 5, 10, 20, 40, 80, 160, 320, 640)
_SAME = 0.25  # of a step: rounding of a frequency to few digits is less
Window = tuple[float, float]


def window(plot: Plot, whole: Window) -> Window:
    """(low, high) that is shown."""
    if plot.low_hz is None or plot.high_hz is None:
        return whole
    return _held(plot.low_hz, plot.high_hz)


def _held(low: float, high: float) -> Window:
    """A window within the limits, wide enough."""
    low, high = (min(max(hz, LEAST_HZ), MOST_HZ) if hz == hz else LEAST_HZ for hz in (low, high))
    short = LEAST_DECADES - log10(high / low)
    if short > 0:
        low, high = low / 10 ** (short / 2), high * 10 ** (short / 2)
        if low < LEAST_HZ:
            low, high = LEAST_HZ, LEAST_HZ * 10**LEAST_DECADES
        if high > MOST_HZ:
            low, high = MOST_HZ / 10**LEAST_DECADES, MOST_HZ
    return low, high


def cursor(plot: Plot, whole: Window, reference_hz: float | None) -> float:
    """Where the cursor is; at the reference, or in the middle, until it was moved."""
    low, high = window(plot, whole)
    stated = plot.cursor_hz if plot.cursor_hz is not None and plot.cursor_hz > 0 else reference_hz
    hz = stated if stated is not None and stated > 0 else (low * high) ** 0.5
    return min(max(hz, low), high)


def moved(plot: Plot, whole: Window, hz: float, by: int) -> Plot:
    """The cursor a step of about a column further, on round values; a window of one's own goes along."""
    low, high = window(plot, whole)
    to = min(max(stepped(hz, by, steps_a_decade(low, high)), LEAST_HZ), MOST_HZ)
    if plot.low_hz is None:
        return replace(plot, cursor_hz=min(max(to, low), high))
    if not low <= to <= high:
        plot = panned(plot, whole, hz, by)
    return replace(plot, cursor_hz=to)


def steps_a_decade(low: float, high: float) -> int:
    """Cursor positions a decade: about as many as a usual plot has columns."""
    columns = USUAL_COLUMNS / log10(high / low)
    return min(_STEPS, key=lambda count: abs(log10(count / columns)))


def stepped(hz: float, by: int, count: int) -> float:
    """The next of `count` values a decade, evenly spaced and rounded to as few digits as tell them apart."""
    at = log10(hz) * count
    number = floor(at + _SAME) + by if by > 0 else ceil(at - _SAME) + by
    return float(f"{10 ** (number / count):.{2 if count <= 80 else 3}e}")


def zoomed(plot: Plot, whole: Window, hz: float, by: int) -> Plot:
    """Closer (by > 0) or further about the cursor, which keeps its place on the screen.

    On the way out the window of the figures is met, and left behind with the next step.
    """
    low, high = window(plot, whole)
    if by < 0 and (low, high) == (LEAST_HZ, MOST_HZ):
        return plot
    factor = 1 / ZOOM if by > 0 else ZOOM
    if by > 0 and log10(high / low) * factor < LEAST_DECADES:
        factor = LEAST_DECADES / log10(high / low)
    new = _held(hz * (low / hz) ** factor, hz * (high / hz) ** factor)
    inside = log10(high / low) < log10(whole[1] / whole[0]) * (1 - 1e-9)
    if by < 0 and inside and log10(new[1] / new[0]) >= log10(whole[1] / whole[0]) * (1 - 1e-9):
        return automatic(plot, whole, hz)
    return replace(plot, low_hz=new[0], high_hz=new[1], cursor_hz=hz)


def panned(plot: Plot, whole: Window, hz: float, by: int) -> Plot:
    """The window a quarter of itself to the left or right; the cursor is taken along where it would leave."""
    low, high = window(plot, whole)
    by_ratio = (high / low) ** (PAN * by)
    by_ratio = min(max(by_ratio, LEAST_HZ / low), MOST_HZ / high)
    return _with_cursor(replace(plot, low_hz=low * by_ratio, high_hz=high * by_ratio), hz)


def to_end(plot: Plot, whole: Window, hz: float, by: int) -> Plot:
    """The window to the beginning or end of the whole band; where it is there, the cursor to the window's end."""
    low, high = window(plot, whole)
    size = high / low
    new = (whole[0], whole[0] * size) if by < 0 else (whole[1] / size, whole[1])
    if plot.low_hz is None or abs(log10(new[0] / low)) < 1e-9:
        return replace(plot, cursor_hz=low if by < 0 else high)
    return _with_cursor(replace(plot, low_hz=new[0], high_hz=new[1]), hz)


def automatic(plot: Plot, whole: Window, hz: float) -> Plot:
    """Back to the window of the figures."""
    return replace(plot, low_hz=None, high_hz=None, cursor_hz=min(max(hz, whole[0]), whole[1]))


def shown_at(plot: Plot, whole: Window, hz: float) -> Plot:
    """The cursor at a frequency, the window moved where that is out of sight."""
    low, high = window(plot, whole)
    if not low <= hz <= high:
        half = (high / low) ** 0.5
        low, high = _held(hz / half, hz * half)
        plot = replace(plot, low_hz=low, high_hz=high)
    return replace(plot, cursor_hz=hz)


def _with_cursor(plot: Plot, hz: float) -> Plot:
    return replace(plot, cursor_hz=min(max(hz, plot.low_hz or hz), plot.high_hz or hz))
