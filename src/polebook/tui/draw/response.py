"""Page 3, response: the chain over frequency, with the figures at the cursor below. And the small plot of it."""

from __future__ import annotations

from dataclasses import replace
from math import log10

import numpy as np

from polebook.book.account import BUDGET_DB
from polebook.book.ledger import Ledger
from polebook.book.response import Array, begin_hz, whole_band
from polebook.tui.draw import benches, readout
from polebook.tui.draw.curves import delayed, impedances, swept
from polebook.tui.draw.plot import scale
from polebook.tui.draw.plot.axis import Axis, decades
from polebook.tui.draw.plot.chart import Chart, Curve, Level, Mark, Spot, Upright
from polebook.tui.draw.plot.paint import AXIS_ROWS, painted
from polebook.tui.draw.plot.sight import cursor, window
from polebook.tui.draw.scene import Scene
from polebook.tui.lines import Line

WHAT = ("gain", "delay", "input", "output")
"""What the page can show."""
LEAST_PLOT = 8
LEAST_SPARE, MOST_FIGURES = 4, 3  # rows above the axis for a line of figures; rows of them where there is no table
PLOT_FOR_TABLE = 12  # rows of the plot before there is a table of all lines
MANY_ROWS = 14  # from so many on the other lines' curves are drawn too
DB_A_ROW, MOST_DB = 5.0, 80.0
BELOW_DB = 15.0  # that are seen of every curve
UNEVEN = 30.0  # a delay so many times its median needs an axis of equal ratios
_ROUNDING = 1e-9
UNSTABLE = "unstable: curves of the network, which no signal will follow"
UNKNOWN = "stability not told: curves of the network"


def figures(scene: Scene) -> tuple[str, ...]:
    """The edge nearer to the cursor."""
    edges = [(hz, name) for hz, name in ((scene.figures.lower_hz, "overall.lower_edge_hz"),
                                         (scene.figures.upper_hz, "overall.upper_edge_hz")) if hz is not None]
    at = log10(at_hz(scene))
    return tuple(name for _, name in sorted(edges, key=lambda edge: abs(log10(edge[0]) - at))[:1])


def page(scene: Scene, room: int, rows: int, focus: str = "") -> list[Line]:
    """At most `rows` lines of at most `room` cells: the plot, and below it as much of the figures as there is room."""
    spare = rows - AXIS_ROWS
    figures = max(min(spare - LEAST_PLOT, MOST_FIGURES), spare >= LEAST_SPARE)
    below = readout.rows(scene, what(scene), at_hz(scene), room, figures, spare - PLOT_FOR_TABLE)
    plot = painted(chart(scene, room, rows - AXIS_ROWS - len(below)), room, rows - len(below), scene.pen)
    return [*plot, *below][:rows]


def small(scene: Scene, room: int, rows: int) -> list[Line]:
    """The gain alone, over the whole band; without the poles, which would cost more than all else in sight."""
    of = scene.figures
    low, high = whole_band(of)
    found = swept(of, low, high, 2 * room, False)
    curves = [Curve(found.hz, found.gain_db)]
    base = _baseline(scene)
    if base is not None:
        then = swept(base, low, high, 2 * room, False)
        curves.insert(0, _pinned(then.hz, then.gain_db))
    empty = _base(scene, (low, high), room)
    return painted(_limited(scene, empty, curves, rows - AXIS_ROWS), room, rows, scene.pen)


def what(scene: Scene) -> str:
    """What is shown."""
    return scene.view.plot.what if scene.view.plot.what in WHAT else WHAT[0]


def at_hz(scene: Scene) -> float:
    """Where the cursor is."""
    of = scene.figures
    return cursor(scene.view.plot, whole_band(of), begin_hz(of))


def chart(scene: Scene, room: int, rows: int) -> Chart:
    """What the plot of the page shows."""
    low, high = window(scene.view.plot, whole_band(scene.figures))
    made = {"gain": _gain, "delay": _delay, "input": _impedance, "output": _impedance}[what(scene)]
    result = made(scene, low, high, room, rows)
    return replace(result, cursor=at_hz(scene))


def _gain(scene: Scene, low: float, high: float, room: int, rows: int) -> Chart:
    of, count = scene.figures, 2 * room
    found = swept(of, low, high, count)
    measured = benches.phases(scene, found)
    phase = scale.degrees([found.phase_deg, *(_within(one, low, high) for one in measured)], rows)
    curves = [*measured, Curve(found.hz, found.phase_deg, "bar", "dotted", ".", "p", right=True)]
    base = _baseline(scene)
    if base is not None:
        then = swept(base, low, high, count)
        curves.append(_pinned(then.hz, then.gain_db))
    if scene.view.plot.single:
        curves.append(Curve(found.hz, found.gains_db[scene.at], "select", "dashed", "o", _letter(scene)))
    curves += benches.gains(scene)
    curves.append(Curve(found.hz, found.gain_db, letter="g"))
    others = [Curve(found.hz, own, "dim", "sparse", ",") for k, own in enumerate(found.gains_db) if k != scene.at] \
        if scene.view.plot.single and rows >= MANY_ROWS else []
    empty = replace(_base(scene, (low, high), room), marks=_poles(scene), right=phase, curves=tuple(others))
    if not empty.note and (bad := benches.faults(scene)):
        empty = replace(empty, note=bad, note_style="warn")
    return _limited(scene, empty, curves, rows)


def _limited(scene: Scene, empty: Chart, curves: list[Curve], rows: int) -> Chart:
    """Curves of dB over those that are there, with the limits that the targets set, -3 dB and today's edges.

    The axis is made for the curves, and some of each is in sight.
    """
    of = scene.figures
    unit = "dB" if of.chain.source_kind == "voltage" else "dBΩ"
    gains = [_within(one, empty.x.low, empty.x.high) for one in curves if not one.right]
    gains = [gain for gain in gains if gain.size]
    tops = [float(np.nanmax(gain)) for gain in gains if np.isfinite(gain).any()]
    most = max(min(DB_A_ROW * rows, MOST_DB), max(tops) - min(tops) + BELOW_DB if tops else 0.0)
    up = scale.decibels(gains, rows, most)
    up = _labelled(up, unit) if scene.view.decibels else scale.as_ratios(up, rows, "" if unit == "dB" else "Ω")
    corner = 20 * log10(abs(of.solution.gain)) - BUDGET_DB
    limits = {target.name: target for target in of.targets if target.name in ("lower", "upper")}
    ends = {name: of.chain.get(f"target.{name}") for name in ("lower", "upper")}
    looks = {None: "dim", True: "good", False: "bad"}
    uprights = tuple(Upright(hz, corner, looks[limits[name].met if name in limits else None])
                     for name, hz in ends.items() if hz is not None)
    spots = tuple(Spot(hz, corner) for hz in (of.lower_hz, of.upper_hz) if hz is not None)
    return replace(empty, y=up, curves=(*empty.curves, *curves), uprights=uprights, spots=spots,
                   levels=(Level(corner, ends["lower"], ends["upper"], label="-3 dB"),))


def _delay(scene: Scene, low: float, high: float, room: int, rows: int) -> Chart:
    of, count = scene.figures, 2 * room
    hz, by_line = delayed(of, low, high, count)
    whole = by_line.sum(axis=0)
    curves = []
    base = _baseline(scene)
    if base is not None:
        then_hz, then = delayed(base, low, high, count)
        curves.append(_pinned(then_hz, then.sum(axis=0)))
    if scene.view.plot.single:
        curves.append(Curve(hz, by_line[scene.at], "select", "dashed", "o", _letter(scene)))
    curves.append(Curve(hz, whole, letter="d"))
    known = np.abs(whole[np.isfinite(whole)])
    if known.size and known.max() > UNEVEN * max(float(np.median(known)), known.max() * 1e-12):
        return _uneven(scene, (low, high), curves, room, rows)
    return replace(_base(scene, (low, high), room), marks=_poles(scene), curves=tuple(curves),
                   y=scale.linear([one.y for one in curves], rows, "s"))


def _uneven(scene: Scene, seen: tuple[float, float], curves: list[Curve], room: int, rows: int) -> Chart:
    """Delays on an axis of equal ratios; where they are negative, their size in dots."""
    before = [replace(one, y=-one.y, dots="dotted", plain=".", letter="") for one in curves if (one.y < 0).any()]
    result = replace(_base(scene, seen, room), marks=_poles(scene))
    note = "dotted: before its time (negative)" if before and not result.note else result.note
    return replace(result, curves=(*before, *curves), note=note, y=scale.sizes([np.abs(one.y) for one in curves], rows,
                                                                              "s"))


def _impedance(scene: Scene, low: float, high: float, room: int, rows: int) -> Chart:
    of, output = scene.figures, what(scene) == "output"
    line = readout.port(scene, what(scene))
    hz, ohms = impedances(of, low, high, 2 * room, output, line)
    phase = np.degrees(np.angle(ohms))
    curves = [Curve(hz, phase, "bar", "dotted", ".", "p", right=True)]
    base = _baseline(scene)
    if base is not None:
        own = _named(base).get(_named_at(of, line))
        if own is not None:
            then_hz, then = impedances(base, low, high, 2 * room, output, own)
            curves.append(_pinned(then_hz, np.abs(then)))
    curves.append(Curve(hz, np.abs(ohms), letter="Z"))
    up = scale.sizes([one.y for one in curves if not one.right], rows, "Ω")
    return replace(_base(scene, (low, high), room), marks=_poles(scene), curves=tuple(curves), y=up,
                   right=scale.degrees([phase], rows))


def _base(scene: Scene, seen: tuple[float, float], room: int) -> Chart:
    """An empty chart of frequencies, with a word on what can't be believed."""
    of = scene.figures
    right = of.solution.winding.right
    return Chart(Axis(*seen, log=True, ticks=decades(*seen, room - 14), unit="Hz"), Axis(0.0, 1.0),
                 note="" if right == 0 else UNSTABLE if right else UNKNOWN, note_style="bad")


def _poles(scene: Scene) -> tuple[Mark, ...]:
    """The poles, those of the selected line last and standing out; those of the nodes where they are not resolved."""
    roots = scene.figures.poles.roots
    if roots is None:
        return tuple(Mark(site.pole_hz) for site in scene.figures.sites if site.pole_hz is not None)
    own = scene.names[scene.at]
    return tuple(Mark(root.hz, style="select" if root.stage == own else "")
                 for root in sorted(roots, key=lambda root: root.stage == own) if root.hz > 0)


def _baseline(scene: Scene) -> Ledger | None:
    """The baseline's ledger, where it is another one than today's; None of a post, which holds no curve."""
    base = scene.session.baseline
    return base if base is not scene.ledger else None


def _within(of: Curve, low: float, high: float) -> Array:
    """The part of a curve that lies in a window, all of one that was computed for it."""
    return of.y[(of.x >= low * (1.0 - _ROUNDING)) & (of.x <= high * (1.0 + _ROUNDING))]


def _pinned(hz: Array, y: Array) -> Curve:
    return Curve(hz, y, "dim", "dashed", "-", "b")


def _letter(scene: Scene) -> str:
    """The selected line's name, as far as it is short."""
    name = scene.names[scene.at]
    return name if len(name) <= 6 else name[:5]


def _labelled(axis: Axis, unit: str) -> Axis:
    """The unit with the topmost label."""
    if not axis.ticks:
        return axis
    value, label = axis.ticks[-1]
    return replace(axis, ticks=(*axis.ticks[:-1], (value, f"{label}{' ' if len(label) < 3 else ''}{unit}")))


def _named(of: Ledger) -> dict[str, int]:
    return {segment.name: number for number, segment in enumerate(of.solution.circuit.layout.segments)}


def _named_at(of: Ledger, line: int) -> str:
    return of.solution.circuit.layout.segments[line].name
