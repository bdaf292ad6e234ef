"""The sweep of a part: gain and edges over its value, each as a ratio to today's, so that a slope is a leverage."""

from __future__ import annotations

from math import isfinite, log10
from typing import TYPE_CHECKING

from polebook.chain.said import said
from polebook.report import figures as show
from polebook.tui.draw.levers import Aim, aim, followed, unit_of
from polebook.tui.draw.plot.paint import painted
from polebook.tui.draw.progress import progress
from polebook.tui.draw.scene import Scene
from polebook.tui.draw.swept_chart import chart
from polebook.tui.draw.swept_judged import fine, limits_of, met, text_of, today_of, value_now
from polebook.tui.keys import Hint
from polebook.tui.lines import Line, Span, width
from polebook.tui.sweeps import at_cursor, fresh, snapped
from polebook.tui.view import Sweep

if TYPE_CHECKING:
    from polebook.plan.sweep import Point

HEAD_ROWS = 2
MOST_TOLD = 3  # figures at the cursor where there is no room for all
LEAST_ROWS = HEAD_ROWS + 8


def plot(scene: Scene, sweep: Sweep, room: int, rows: int) -> list[Line]:
    """At most `rows` lines of at most `room` cells: what is swept, the figures at the cursor, the curves."""
    lines = [_head(scene, sweep, room), _readout(scene, sweep, room)]
    return [*lines, *painted(chart(scene, sweep, room, rows - HEAD_ROWS), room, rows - HEAD_ROWS, scene.pen)][:rows]


def hints(scene: Scene, sweep: Sweep) -> tuple[Hint, ...]:
    """What can be pressed on the plot, Enter by what it would do."""
    running = _running(scene)
    text = snapped(scene.state, sweep)
    key = sweep.path.rpartition(".")[2]
    enter = scene.pen.text(f"set {key} to {text}") if text and fresh(scene.state, sweep) else "sweep again"
    return (("Enter", enter), (", .", "cursor"), ("z Z", "narrower, wider"), ("Esc", "stop" if running else "ranking"),
            ("s", "one more figure"), ("[ ]", "range"), ("?", "help"))


def _running(scene: Scene) -> bool:
    return scene.state.job is not None and scene.state.job.page == "leverage"


def _head(scene: Scene, sweep: Sweep, room: int) -> Line:
    """What is swept over which range, and how far it is."""
    pen, unit = scene.pen, unit_of(sweep.chain, sweep.path)
    low, high = (show.eng(sweep.values[at], unit) for at in (0, -1))
    what = sweep.path
    if what.startswith("device."):
        what = said(what) + (f", for {sweep.row}" if sweep.row != what else "")
    now = show.eng(value_now(scene, sweep), unit)
    told: list[Line] = [(Span(f" {pen.cut(pen.text(what), 32)}", "head"), Span(pen.text(f"  {low} to {high}"))),
                        (Span(pen.text(f"   ● today {now}"), "dim"),)]
    if scene.state.job is not None and _running(scene):
        told.append((Span("   "), *progress(pen, scene.state.job)))
    elif len(sweep.points) < len(sweep.values):
        told.append((Span(f"   stopped at {len(sweep.points)} of {len(sweep.values)}", "warn"),))
    if not fresh(scene.state, sweep):
        told.append((Span("   of before the edit", "warn"),))
    elif limits := limits_of(scene):
        some = any(fine(limits, point) for point in sweep.points)
        whole = len(sweep.points) == len(sweep.values)
        if some or whole:
            told.append((Span("   = as wanted" if some else "   nowhere as wanted", "dim"),))
    return _pieces(told, room)


def _readout(scene: Scene, sweep: Sweep, room: int) -> Line:
    """The figures at the cursor, by how much they are off today's, and which fall short."""
    pen, at = scene.pen, sweep.cursor
    value = (Span(f" {pen.text(show.eng(at_cursor(sweep), unit_of(sweep.chain, sweep.path)))}", "select"),)
    if not 0 <= at < len(sweep.points):
        word = "not computed yet" if _running(scene) else "not computed"
        return _pieces([value, (Span(f"   {word}", "dim"),)], room)
    point = sweep.points[at]
    every = followed(scene)
    if all(one.swept(point) is None for one in every):
        return _pieces([value, (Span(f"   no figures: {pen.text(point.why)}", "warn"),)], room)
    ranks = aim(scene.view.lever.figure)
    first = {ranks, *sorted((one for one in every if one is not ranks), key=lambda one: not one.name)[:MOST_TOLD - 1]}
    few = [one for one in every if one in first]
    for shown, changed in ((every, every), (every, (ranks,)), (few, every), (few, (ranks,)), (few, ())):
        told = [value, *(_told(scene, sweep, point, one, one in changed) for one in shown)]
        if sum(map(width, told)) <= room:
            break
    return _pieces(told, room)


def _told(scene: Scene, sweep: Sweep, point: Point, one: Aim, change: bool) -> Line:
    """A figure at the cursor."""
    value, today, limits = one.swept(point), today_of(scene, sweep, one), limits_of(scene)
    held = met(limits, one, point)
    text = text_of(scene, one, value)
    spans = [Span(f"   {one.short} ", "dim"), Span(scene.pen.text(text), "bad" if held is False else "")]
    if held is False:
        over = one.key == "gain" and abs(value or 0.0) > limits[one.key][1]
        spans.append(Span(" over" if over else " short", "bad"))
    if change and value and today and (by := _by(value / today, one.key == "gain" and scene.view.decibels)):
        spans.append(Span(f" {by}", "dim"))
    return tuple(spans)


def _by(ratio: float, decibels: bool) -> str:
    """By how much a figure is off today's; "" where it would not show."""
    if not ratio or not isfinite(ratio):
        return ""
    if decibels:
        return show.signed(20 * log10(abs(ratio)), "dB")
    if abs(ratio) >= 10:
        return f"x{ratio:.3g}"
    by = show.signed(100 * (ratio - 1), "%")
    return f"{by} %" if by else ""


def _pieces(told: list[Line], room: int) -> Line:
    """The pieces that there is room for, two at the least."""
    spans: list[Span] = []
    for number, piece in enumerate(told):
        if number > 1 and width((*spans, *piece)) > room:
            break
        spans += piece
    return tuple(spans)
