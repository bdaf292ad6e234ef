"""The histogram of a figure: how many builds have which value, the target's limits, the chain as filed, the worst."""

from __future__ import annotations

from math import log10
from typing import TYPE_CHECKING

import numpy as np

from polebook.tui.draw.plot.axis import Axis, Ticks, decades, evenly, short, step_of
from polebook.tui.draw.plot.chart import Bars, Chart, Mark, Upright
from polebook.tui.draw.plot.paint import AXIS_ROWS, columns, painted
from polebook.tui.draw.scene import Scene
from polebook.tui.draw.spread_text import limit
from polebook.tui.lines import Line
from polebook.tui.spreads import Figure, Heap

if TYPE_CHECKING:
    from polebook.tui.draw.plot.axis import Array

NOMINAL, WORST = "●", "×"
_LABEL = 9  # cells that a label along the bottom takes
_HEADROOM = 1.08


def histogram(scene: Scene, of: Figure, room: int, rows: int) -> list[Line]:
    """At most `rows` lines of at most `room` cells; [] where there is nothing to draw or no room."""
    if of.heap is None or rows < AXIS_ROWS + 1:
        return []
    x = Axis(of.heap.low, of.heap.high, ticks=_ticks(scene, of, of.heap, room), unit=_unit(scene, of))
    empty = Chart(x, Axis(0.0, 1.0))
    bars = _bars(of.heap, max(columns(empty, room, scene.pen), 1))
    most = max(float(bars.max()), 1.0) * _HEADROOM
    y = Axis(0.0, most, ticks=_counts(most, rows - AXIS_ROWS))
    uprights = tuple(Upright(end, style="warn") for end in of.limits if end is not None)
    marks = [Mark(one.value, WORST, "warn") for one in of.worst if one.value is not None]
    if of.nominal is not None:
        marks.append(Mark(of.nominal, NOMINAL, "head"))
    chart = Chart(x, y, bars=Bars(bars), uprights=uprights, marks=tuple(marks), note=_out_of_sight(scene, of, of.heap))
    return painted(chart, room, rows, scene.pen)


def _bars(of: Heap, count: int) -> Array:
    """Builds in each of `count` even steps, from the fine ones between."""
    whole = np.concatenate([[0], np.cumsum(of.counts)]).astype(float)
    at = np.linspace(0.0, of.counts.size, count + 1)
    return np.diff(np.interp(at, np.arange(whole.size), whole))


def _counts(most: float, tall: int) -> Ticks:
    """Ticks of whole builds."""
    return tuple((value, label) for value, label in evenly(0.0, most, max(tall // 2, 1)) if value == int(value))


def _ticks(scene: Scene, of: Figure, heap: Heap, room: int) -> Ticks:
    most = max((room - 8) // _LABEL, 2)
    if of.unit != "dB":
        return evenly(heap.low, heap.high, most)
    if of.target == "gain" and not scene.view.decibels:
        low, high = (10.0 ** (min(max(db, -6000.0), 6000.0) / 20.0) for db in (heap.low, heap.high))
        if 0.0 < low < high:
            return tuple((20.0 * log10(x), short(x)) for x, _ in decades(low, high, max(room - 8, 2)))
    step = step_of(heap.high - heap.low, most)
    digits = min(max(-int(np.floor(log10(step))), 0), 6)
    return tuple((x, f"{x:.{digits}f}") for x, _ in evenly(heap.low, heap.high, most, step=step))


def _unit(scene: Scene, of: Figure) -> str:
    if of.unit != "dB":
        return of.unit
    volts = scene.chain.source_kind == "voltage"
    if of.target == "gain":
        return ("dB" if volts else "dBΩ") if scene.view.decibels else ("" if volts else "Ω")
    return "dB"


def _out_of_sight(scene: Scene, of: Figure, heap: Heap) -> str:
    """Limits that lie beyond the ends, and on which side."""
    told = []
    for at, end in enumerate(of.limits):
        if end is not None and not heap.low <= end <= heap.high:
            told.append(f"{limit(scene, of, at)}: {'lower' if end < heap.low else 'higher'} than all of this")
    return ", ".join(told)
