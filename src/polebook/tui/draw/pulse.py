"""Page 4, pulse: the step response of the upper network; at the lower end of the band the sag of a pulse."""

from __future__ import annotations

from dataclasses import replace
from math import ceil, floor

import numpy as np

from polebook.book.ledger import Ledger
from polebook.tui.draw import pulse_curves as curves
from polebook.tui.draw import pulse_told as told
from polebook.tui.draw.plot.axis import Array, Axis, Ticks, evenly, step_of
from polebook.tui.draw.plot.chart import Chart, Curve, Level, Spot, Upright
from polebook.tui.draw.plot.paint import AXIS_ROWS, painted
from polebook.tui.draw.pulse_figures import SAG, STEP, chosen, listed, marks, target_of, why
from polebook.tui.draw.pulse_sight import Reach, Window, cursor, window
from polebook.tui.draw.scene import Scene
from polebook.tui.keys import Hint
from polebook.tui.lines import Line
from polebook.tui.view import Times

LEAST_PLOT, MOST_TOLD = 7, 4  # rows; of the plot before more than the cursor is told, of what is told without tables
PLOT_FOR_TABLES = 12
LOW, HIGH = 0.1, 0.9
NEAR = 1.5  # of what a curve spans: a target's limit that is further off is out of sight
ROOM = 0.03  # of what is seen, kept free above and below
FINE = 5.0  # parts of a tick's step that the axis ends at
TAIL = 0.5  # a curve that is above it all along is seen with its final value, not from 0 on
LEAST = 1e-9  # that an axis spans
APART = 0.002  # of the final value: curves that are nearer are one to the eye
_LOOKS = {True: "good", False: "bad", None: "dim"}
_LABELS = {"within 1 %": "1 %", "within 0.1 %": "0.1 %"}


def figures(scene: Scene) -> tuple[str, ...]:
    """The chosen figure."""
    found = listed(scene.figures, scene.view.upper)
    return (found[chosen(scene)].name,) if found else ()


def hints(scene: Scene) -> tuple[Hint, ...]:
    """What can be pressed where there is no curve; () where there is one."""
    if scene.ledger is None or not why(scene.figures, scene.view.upper):
        return ()
    enter = (("Enter", "set the pulse"),) if told.lengthless(scene) else ()
    other = "the sag" if scene.view.upper else "the step response"
    return (*enter, ("b", other), ("Tab", "sheet"), ("?", "help"))


def reach(of: Ledger, upper: bool) -> Reach:
    """What there is to look at of the end that is shown."""
    return curves.step_reach(of) if upper else curves.sag_reach(of)


def place(scene: Scene) -> Times:
    """Where the user is on the plot of the end that is shown."""
    return scene.view.step if scene.view.upper else scene.view.sag


def page(scene: Scene, room: int, rows: int, focus: str = "") -> list[Line]:
    """At most `rows` lines of at most `room` cells: the plot, and below it as much of the figures as there is room."""
    reason = why(scene.figures, scene.view.upper)
    if reason:
        return told.absent(scene, reason, room)[:rows]
    spare = rows - AXIS_ROWS
    t = cursor(place(scene), reach(scene.figures, scene.view.upper))
    most = max(min(spare - LEAST_PLOT, MOST_TOLD), spare > 1)
    below = told.rows(scene, t, room, most, spare - PLOT_FOR_TABLES, focus)
    plot = painted(chart(scene, t, room, rows - AXIS_ROWS - len(below)), room, rows - len(below), scene.pen)
    return [*plot, *below][:rows]


def chart(scene: Scene, t: float, room: int, rows: int) -> Chart:
    """What the plot shows."""
    of, upper = scene.figures, scene.view.upper
    low, high = window(place(scene), reach(of, upper))
    sampled = curves.step if upper else curves.sag
    drawn = [Curve(*sampled(of, low, high, 2 * room))]
    base = scene.session.baseline
    if base is not None and base is not of and not why(base, upper):
        drawn = [*_pinned(Curve(*sampled(base, low, high, 2 * room), "dim", "dashed", "-"), drawn[0]), *drawn]
    ends = _ends([one.y for one in drawn], _limit(of, upper))
    x = Axis(low, high, ticks=evenly(low, high, max(room // 12, 2)), unit="s")
    empty = Chart(x, _axis(*ends, rows), curves=tuple(drawn), cursor=t)
    return _step(of, empty) if upper else _sag(of, empty)


def _pinned(then: Curve, now: Curve) -> list[Curve]:
    """The pinned curve, and its letter where it is furthest from today's: at their ends they lie on each other."""
    with np.errstate(all="ignore"):
        off = np.nan_to_num(np.abs(np.interp(then.x, now.x, now.y) - then.y))
    at = int(off.argmax())
    if off[at] < APART:
        return [then]
    return [then, replace(then, x=then.x[at:at + 1], y=then.y[at:at + 1], letter="b")]


def _step(of: Ledger, empty: Chart) -> Chart:
    """With the final value, 10 and 90 %, the figures' marks and the targets' limits."""
    found = {name: (t, height) for name, t, height in marks(of, True)}
    levels = [Level(1.0)]
    for name, height in (("10 %", LOW), ("90 %", HIGH)):
        levels.append(Level(height, high=found[name][0] if name in found else None, label=name))
    uprights = []
    rise, over = (target_of(of, one) for one in STEP[:2])
    if rise is not None and "10 %" in found:
        uprights.append(Upright(found["10 %"][0] + rise.want, HIGH, _LOOKS[rise.met]))
    if over is not None:
        levels.append(Level(1.0 + over.want, style=_LOOKS[over.met], label=f"≤{100.0 + 100.0 * over.want:.3g}"))
    spots = tuple(Spot(*at) for at in found.values())
    labels = tuple(Curve(np.array([t]), np.array([height]), "head", letter=f"{_LABELS[name]} ")
                   for name, (t, height) in found.items() if name in _LABELS and empty.x.low < t <= empty.x.high)
    return replace(empty, levels=tuple(levels), uprights=tuple(uprights), spots=spots,
                   curves=(*empty.curves, *labels))


def _sag(of: Ledger, empty: Chart) -> Chart:
    """With the height that the pulse begins with, its end and what of it the target leaves."""
    target, length = target_of(of, SAG[0]), of.sag.pulse_s or 0.0
    levels = [Level(1.0)]
    look = _LOOKS[None if target is None else target.met]
    if target is not None:
        levels.append(Level(1.0 - target.want, high=length, style=look, label=f"≥{100.0 - 100.0 * target.want:.3g}"))
    spots = tuple(Spot(t, height) for _, t, height in marks(of, False))
    return replace(empty, levels=tuple(levels), uprights=(Upright(length, None, look),), spots=spots)


def _limit(of: Ledger, upper: bool) -> float | None:
    """The height that a target allows; None for none."""
    target = target_of(of, STEP[1] if upper else SAG[0])
    if target is None:
        return None
    return 1.0 + target.want if upper else 1.0 - target.want


def _ends(values: list[Array], limit: float | None) -> Window:
    """Least and greatest height that is seen: of the curves, with 0 and the final value, and a limit that is near."""
    known = [found for found in (value[np.isfinite(value)] for value in values) if found.size]
    low = min((float(v.min()) for v in known), default=0.0)
    high = max((float(v.max()) for v in known), default=1.0)
    low, high = (min(low, 0.0) if low < TAIL else low), max(high, 1.0)
    low = min(low, 1.0)
    size = max(high - low, LEAST)
    if limit is not None and low - NEAR * size <= limit <= high + NEAR * size:
        low, high = min(low, limit), max(high, limit)
    return low, high


def _axis(low: float, high: float, rows: int) -> Axis:
    """Heights in per cent, its ends on round values that hold still."""
    size = max(high - low, LEAST)
    low, high = low - (ROOM * size if low else 0.0), high + ROOM * size
    by = step_of(100.0 * (high - low), max(rows // 2, 1))
    fine = by / FINE
    first, last = floor(100.0 * low / fine + 1e-9), ceil(100.0 * high / fine - 1e-9)
    ends = 0.01 * fine * first, 0.01 * fine * max(last, first + 1)
    return Axis(*ends, ticks=_ticks(*ends, by))


def _ticks(low: float, high: float, by: float) -> Ticks:
    """Multiples of `by` per cent, the unit with the topmost."""
    first, last = ceil(100.0 * low / by - 1e-9), floor(100.0 * high / by + 1e-9)
    values = [k * by for k in range(first, min(last, first + 99) + 1)]
    return tuple((0.01 * value, f"{value:.6g}{' %' if value == values[-1] else ''}") for value in values)
