"""Axes up the side that suit what is drawn: round ends that hold still while a curve stays between them."""

from __future__ import annotations

from collections.abc import Sequence
from math import log10

import numpy as np

from polebook.tui.draw.plot.axis import Array, Axis, Ticks, decades, evenly, rounded, short, step_of

LEAST_DB = 2.0  # that an axis spans
_DEGREES = (15.0, 30.0, 45.0, 90.0, 180.0, 360.0, 720.0, 1800.0)
_ROOM = 0.02  # of the span, kept free above
_MOST_DB = 6000.0  # of a ratio that has a double


def _ends(values: Sequence[Array]) -> tuple[float, float] | None:
    """Least and greatest of all that is a number."""
    known = [found for found in (value[np.isfinite(value)] for value in values) if found.size]
    return (min(float(v.min()) for v in known), max(float(v.max()) for v in known)) if known else None


def _intervals(rows: int) -> int:
    return max(rows // 2, 1)


def decibels(values: Sequence[Array], rows: int, most: float, unit: str = "") -> Axis:
    """Of dB, at most `most` below the greatest: what lies lower is out of sight."""
    ends = _ends(values)
    if ends is None:
        return Axis(-1.0, 1.0)
    high = ends[1]
    low = max(ends[0], high - most)
    if high - low < LEAST_DB:
        low, high = (low + high - LEAST_DB) / 2, (low + high + LEAST_DB) / 2
    high += _ROOM * (high - low)
    step = step_of(high - low, _intervals(rows))
    low, high = rounded(low, high, step / 2)
    return Axis(low, high, ticks=evenly(low, high, 0, unit, step))


def as_ratios(axis: Axis, rows: int, unit: str = "") -> Axis:
    """The same axis of dB, told in plain ratios."""
    low, high = (min(max(db, -_MOST_DB), _MOST_DB) for db in (axis.low, axis.high))
    if low >= high:
        return axis
    ticks = upwards(10 ** (low / 20), 10 ** (high / 20), rows)
    return Axis(axis.low, axis.high, ticks=tuple((20 * log10(value), short(value, unit)) for value, _ in ticks))


def upwards(low: float, high: float, rows: int) -> Ticks:
    """Ticks of equal ratios up an axis of so many rows, one in two at the most."""
    return decades(low, high, rows, 1, upright=True)


def degrees(values: Sequence[Array], rows: int) -> Axis:
    """Of phases, in parts and multiples of a right angle."""
    low, high = _ends(values) or (-90.0, 90.0)
    step = next((step for step in _DEGREES if (high - low) / step <= _intervals(rows)), _DEGREES[-1])
    low, high = rounded(low, high, step if step >= 90 else 15.0)
    count = range(round(low / step) - 1, round(high / step) + 2)
    return Axis(low, high, ticks=tuple((k * step, f"{k * step:.0f}°") for k in count if low <= k * step <= high))


def sizes(values: Sequence[Array], rows: int, unit: str = "", most: float = 6.0) -> Axis:
    """Of magnitudes in equal ratios, of at most `most` decades: about what is usual, where there are more."""
    with np.errstate(all="ignore"):
        known = [np.log10(np.where(value > 0, value, np.nan)) for value in values]
    ends = _ends(known)
    if ends is None:
        return Axis(0.1, 10.0, log=True)
    usual = float(np.nanmedian(np.concatenate(known)))
    low = max(ends[0], min(usual - most / 3, ends[1] - most))
    high = min(ends[1], low + most)
    if high - low < 0.2:
        low, high = low - 0.1, high + 0.1
    low, high = rounded(low, high + _ROOM * (high - low), 0.5 if high - low > 1 else 0.25)
    low, high = 10.0 ** max(low, -300), 10.0 ** min(high, 300)
    return Axis(low, high, log=True, ticks=_with_unit(upwards(low, high, rows), unit))


def linear(values: Sequence[Array], rows: int, unit: str = "") -> Axis:
    """Of plain values."""
    low, high = _ends(values) or (-1.0, 1.0)
    if high - low <= 1e-9 * max(abs(low), abs(high)):
        low, high = (low - abs(low) / 10, high + abs(high) / 10) if high else (-1.0, 1.0)
    high += _ROOM * (high - low)
    step = step_of(high - low, _intervals(rows))
    low, high = rounded(low, high, step / 2)
    return Axis(low, high, ticks=evenly(low, high, 0, unit, step))


def _with_unit(ticks: Ticks, unit: str) -> Ticks:
    return tuple((value, short(value, unit)) for value, _ in ticks)
