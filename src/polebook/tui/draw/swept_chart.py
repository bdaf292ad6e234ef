"""The curves of a sweep: each figure over today's, against the value, both in equal ratios."""

from __future__ import annotations

from dataclasses import replace
from math import ceil, floor, inf, isfinite, log10, nan
from typing import TYPE_CHECKING

import numpy as np

from polebook.tui.draw.levers import Aim, aim, followed
from polebook.tui.draw.plot.axis import Array, Axis, Ticks, decades, short, step_of
from polebook.tui.draw.plot.chart import Chart, Curve, Level, Mark, Spot, Upright
from polebook.tui.draw.plot.paint import AXIS_ROWS, columns
from polebook.tui.draw.scene import Scene
from polebook.tui.draw.swept_judged import Limits, fine, limits_of, today_of, value_now
from polebook.tui.sweeps import at_cursor
from polebook.tui.view import Sweep

if TYPE_CHECKING:
    from polebook.plan.sweep import Point

FURTHEST = 1e4  # a ratio that is drawn, and its inverse
NEAR = 2.0  # beyond the curves up to here limits are drawn
LEAST_SPAN = 1.5  # of the ratios: less is told as nothing
_MANTISSAS = ((1, 2, 5), (1, 3), (1,))
_DOTS = ("solid", "dotted", "dashed", "sparse")  # of the curves, in the order of what is followed


def chart(scene: Scene, sweep: Sweep, room: int, rows: int) -> Chart:
    """The curves, today's value, and the limits of the figure that ranks; as much as is computed."""
    limits, chosen, now = limits_of(scene), aim(scene.view.lever.figure), abs(value_now(scene, sweep))
    shown = followed(scene)
    x = np.abs(np.array([point.value for point in sweep.points], dtype=float))
    ratios = {one: _ratios(one, sweep.points, today_of(scene, sweep, one)) for one in shown}
    base = abs(today_of(scene, sweep, chosen) or 0.0)
    levels = [limit / base for limit in limits.get(chosen.key, ()) if base and 0.0 < limit < inf]
    low, high = _ends([ratio for each in ratios.values() for ratio in each], levels)
    first, last = abs(sweep.values[0]), abs(sweep.values[-1])
    wanted = tuple((level, _limit(scene, chosen, level * base, limits)) for level in levels if low <= level <= high)
    chosen_last = sorted(zip(shown, _DOTS, strict=False), key=lambda pair: pair[0] is chosen)
    drawn = Chart(
        Axis(first, last, True, _values(first, last, room - 12, sweep.values[0] < 0)),
        Axis(low, high, True, (*_ticks(low, high, rows - AXIS_ROWS), *wanted)),
        curves=tuple(Curve(x, ratios[one], "head" if one is chosen else "", dots, one.short[0], one.short)
                     for one, dots in chosen_last if x.size),
        uprights=(Upright(now),), levels=tuple(Level(level, style="warn") for level, _ in wanted),
        spots=(Spot(now, 1.0),), cursor=abs(at_cursor(sweep)), note=_why(sweep), note_style="warn")
    return replace(drawn, marks=_good(sweep, limits, columns(drawn, room, scene.pen)))


def _ratios(one: Aim, points: tuple[Point, ...], today: float | None) -> Array:
    """Sizes of a figure over today's; not a number where there is none."""
    sizes = [abs(value / today) if (value := one.swept(point)) and today else nan for point in points]
    return np.array(sizes, dtype=float)


def _ends(ratios: list[float], levels: list[float]) -> tuple[float, float]:
    """Of the axis of ratios: with today's, and with limits that are near."""
    seen = [ratio for ratio in ratios if isfinite(ratio)]
    low, high = (min(max(end, 1 / FURTHEST), FURTHEST) for end in (min([*seen, 1.0]), max([*seen, 1.0])))
    near = [level for level in levels if low / NEAR <= level <= high * NEAR]
    low, high = min([low, *near]), max([high, *near])
    more = max((LEAST_SPAN / (high / low)) ** 0.5, 1.02)
    return low / more, high * more


def _ticks(low: float, high: float, tall: int) -> Ticks:
    """Round ratios, as many as stand two rows apart."""
    most = max(tall // 2, 1)
    decades_in = range(floor(log10(low)), ceil(log10(high)) + 1)
    step = step_of(high - low, most)
    even = [k * step for k in range(ceil(low / step), floor(high / step) + 1)] if high < 5 * low else []
    rows = (*([float(f"{mantissa}e{k}") for k in decades_in for mantissa in row] for row in _MANTISSAS), even,
            *([10.0**k for k in decades_in if k % stride == 0] for stride in (2, 4)))
    seen = ([value for value in row if low <= value <= high] for row in rows)
    found = next((row for row in seen if 2 <= len(row) <= most), [1.0])
    return tuple((value, f"×{value:.4g}") for value in found)


def _values(first: float, last: float, room: int, negative: bool) -> Ticks:
    ticks = decades(first, last, max(room, 1))
    return tuple((value, f"-{label}") for value, label in ticks) if negative else ticks


def _limit(scene: Scene, one: Aim, limit: float, limits: Limits) -> str:
    """A limit beside its line, in dB or V/V for a gain."""
    sign = "≥" if limit < sum(limits[one.key]) / 2 else "≤"
    return sign + (f"{20 * log10(limit):.1f}" if one.key == "gain" and scene.view.decibels else short(limit))


def _why(sweep: Sweep) -> str:
    """Why the point at the cursor lacks figures, or is none that its device would keep."""
    return sweep.points[sweep.cursor].why if 0 <= sweep.cursor < len(sweep.points) else ""


def _good(sweep: Sweep, limits: Limits, wide: int) -> tuple[Mark, ...]:
    """Marks along the axis where all that has a target is as wanted: on every cell between two such points."""
    if not limits or wide < 2:
        return ()
    good = [fine(limits, point) for point in sweep.points]
    marks = []
    for column in range(wide):
        share = column / (wide - 1)
        at = share * (len(sweep.values) - 1)
        if ceil(at - 1e-9) < len(good) and good[floor(at + 1e-9)] and good[ceil(at - 1e-9)]:
            marks.append(Mark(abs(sweep.values[0]) * (sweep.values[-1] / sweep.values[0]) ** share, "=", "good"))
    return tuple(marks)
