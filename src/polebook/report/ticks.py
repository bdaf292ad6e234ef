"""Ticks of an axis: which round values stand on it, and how they read in engineering notation."""

from __future__ import annotations

from math import ceil, floor, isfinite, log10

from polebook.quantity import engineering

Ticks = tuple[tuple[float, str], ...]
"""(value, label) of every tick."""
_MANTISSAS = ((1, 3), (1, 2, 5), range(1, 10))
_STEPS = (1.0, 2.0, 5.0)
MOST_MINOR = 9.0  # decades of an axis with ticks between them
_NEAR = 1e-9  # of an axis: what misses an end by less is at the end


def short(value: float, unit: str = "") -> str:
    """A tick's label, no digit too many: 1000.0 -> "1k", 0.05 -> "50m", with a unit "1 kHz"."""
    text = engineering(value, unit, 4)
    number, space, rest = text.partition(" ")
    digits = number.rstrip("abcdefghijklmnopqrstuvwxyzµGMRTZYPE")
    return (digits.rstrip("0").rstrip(".") if "." in digits else digits) + number[len(digits):] + space + rest


def decades(low: float, high: float, room: int, gap: int = 2, upright: bool = False) -> Ticks:
    """Ticks of an axis of equal ratios `room` cells long: as many round values as their labels leave `gap` between.

    upright  up the side, where every label takes one cell of the length
    """
    best: Ticks = ()
    first, last = floor(log10(low)), ceil(log10(high))
    size = log10(high / low)
    tried = [[10.0**k for k in range(first, last + 1) if k % stride == 0] for stride in (12, 6, 3, 2, 1)]
    if size <= MOST_MINOR:
        tried += [[float(f"{m}e{k}") for k in range(first, last + 1) for m in some] for some in _MANTISSAS]
    for values in tried:
        ticks = _seen(values, low, high)
        if _fits(ticks, low, high, room, gap, upright):
            best = ticks
    if len(best) < 3:
        ticks = tuple(tick for tick in evenly(low, high, max(room // (2 if upright else 10), 2)) if tick[0] > 0)
        if len(ticks) > len(best) and _fits(ticks, low, high, room, gap, upright):
            best = ticks
    return best


def _seen(values: list[float], low: float, high: float) -> Ticks:
    return tuple((value, short(value)) for value in values if low * (1 - _NEAR) <= value <= high * (1 + _NEAR))


def _fits(ticks: Ticks, low: float, high: float, room: int, gap: int, upright: bool) -> bool:
    """Whether labels, set about their ticks, keep apart."""
    end = -float("inf")
    for value, label in ticks:
        size = 1 if upright else len(label)
        at = log10(value / low) / log10(high / low) * (room - 1) - size / 2
        if at < end + gap:
            return False
        end = at + size
    return bool(ticks)


def step_of(span: float, most: int) -> float:
    """The least of 1, 2, 5, 10 ... of which at most `most` make up the span."""
    if not (span > 0 and isfinite(span)):
        return 1.0
    rough = span / max(most, 1)
    power = floor(log10(rough))
    sizes = [float(f"{step:g}e{power + more}") for more in (0, 1) for step in _STEPS]
    return next((size for size in sizes if size >= rough * (1 - _NEAR)), sizes[-1])


def evenly(low: float, high: float, most: int, unit: str = "", step: float | None = None) -> Ticks:
    """At most `most` + 1 round values of a linear axis."""
    by = step or step_of(high - low, most)
    first, last = ceil(low / by - _NEAR), floor(high / by + _NEAR)
    return tuple((k * by, short(k * by, unit) if k else "0") for k in range(first, min(last, first + 99) + 1))


def rounded(low: float, high: float, step: float) -> tuple[float, float]:
    """The ends of an axis around two values: whole steps, one at least."""
    first, last = floor(low / step + _NEAR), ceil(high / step - _NEAR)
    return first * step, max(last, first + 1) * step
