"""Page 5, noise: its density over frequency, the figures of the whole chain, and who makes it, ranked."""

from __future__ import annotations

from dataclasses import replace
from itertools import zip_longest

import numpy as np

from polebook.book.response import begin_hz, whole_band
from polebook.book.targets import Target
from polebook.report.look import cells
from polebook.tui.draw import noise_curves as curves
from polebook.tui.draw import noise_told as told
from polebook.tui.draw.noise_makers import FIGURES, Maker, baseline, chosen, listed, unit_of, why
from polebook.tui.draw.noise_makers import told as maker_told
from polebook.tui.draw.pen import BLANK
from polebook.tui.draw.plot import scale
from polebook.tui.draw.plot.axis import Array, Axis, decades, short
from polebook.tui.draw.plot.chart import Chart, Curve, Level, Spot, Upright
from polebook.tui.draw.plot.paint import AXIS_ROWS, LEAST_GUTTER, painted
from polebook.tui.draw.plot.sight import cursor, window
from polebook.tui.draw.scene import Scene
from polebook.tui.keys import Hint
from polebook.tui.lines import Line, width

TALL = 24  # rows from which on the plot has the whole width
PANEL, GAP = 38, 2  # cells of figures and ranking beside the plot
LEAST_PLOT, MOST_TABLE = 12, 12  # rows of the plot above the tables, of the tables
DECADES_A_ROW, LEAST_DECADES = 1 / 6, 1.5
NEAR = 3.0  # a limit, or a part of the whole, so many times off what is seen is out of sight
_LOOKS = {True: "good", False: "bad", None: "dim"}
MOST_LETTERS = 8
NOTE_ROWS = 1.5  # over the density at the output, which is flat where it is greatest: what is shown is told there


def figures(scene: Scene) -> tuple[str, ...]:
    """The chosen figure, or the share of who is chosen."""
    found, at = listed(scene), chosen(scene)
    if not found:
        return ()
    return (FIGURES[at].name,) if at < len(FIGURES) else (f"{found[at - len(FIGURES)].name}.noise_share",)


def hints(scene: Scene) -> tuple[Hint, ...]:
    """What can be pressed where there is nothing to show; () where there is."""
    if scene.ledger is None or not why(scene.figures):
        return ()
    noise = scene.figures.noise
    enter = (("Enter", "to its stage"),) if noise is not None and noise.untold else ()
    return (*enter, ("Tab", "sheet"), ("?", "help"))


def at_hz(scene: Scene) -> float:
    """Where the cursor is."""
    return cursor(scene.view.noise, whole_band(scene.figures), begin_hz(scene.figures))


def page(scene: Scene, room: int, rows: int, focus: str = "") -> list[Line]:
    """At most `rows` lines of at most `room` cells: the density, beside or above the figures and the ranking."""
    reason = why(scene.figures)
    if reason:
        return told.absent(scene, reason, room)[:rows]
    hz = at_hz(scene)
    below = told.lines(scene, hz, room, rows >= TALL)
    if rows >= TALL:
        table = told.figure_table(scene, room // 2, focus)
        size = min(rows - len(below) - 1 - LEAST_PLOT, max(len(listed(scene)) + 1, len(table)), MOST_TABLE)
        left = max(map(width, table)) + GAP
        return [*_plot(scene, room, rows - len(below) - 1 - size), *below, BLANK,
                *_beside(scene, table, left, told.maker_table(scene, hz, room - left, size, focus))][:rows]
    size = rows - len(below)
    panel = told.figure_table(scene, PANEL, focus)
    if size < len(panel) + 3:  # the ranking alone, where the figures would leave it no room
        panel = []
    panel += told.maker_table(scene, hz, PANEL, size - len(panel), focus)
    left = room - PANEL - GAP
    return [*_beside(scene, _plot(scene, left, size), left + GAP, panel), *below][:rows]


def _beside(scene: Scene, left: list[Line], size: int, right: list[Line]) -> list[Line]:
    return [(*scene.pen.fitted(a, size), *b) if b else a for a, b in zip_longest(left, right, fillvalue=BLANK)]


def _plot(scene: Scene, room: int, rows: int) -> list[Line]:
    return painted(chart(scene, room, rows - AXIS_ROWS), room, rows, scene.pen)


def chart(scene: Scene, room: int, rows: int) -> Chart:
    """What the plot shows."""
    of, plot = scene.figures, scene.view.noise
    low, high = window(plot, whole_band(of))
    output = plot.what == "output"
    unit = "V/√Hz at the output" if output else f"{unit_of(scene, 'density')} at the input"
    empty = Chart(Axis(low, high, log=True, ticks=decades(low, high, room - 14), unit="Hz"), Axis(0.1, 10.0, log=True),
                  cursor=at_hz(scene), note=unit)
    found = curves.over(of, low, high, 2 * room)
    if found is None:
        return empty
    whole = found.output if output else found.input
    drawn, wholes, maker, base = [Curve(found.hz, whole, letter="n")], [whole], maker_told(scene), baseline(scene)
    if maker is not None:
        own = curves.own(found, maker.places, output)
        drawn.insert(0, Curve(found.hz, own, "select", "dashed", "o", _letter(maker)))
    then = None if base is None or why(base) else curves.over(base, low, high, 2 * room)
    if then is not None:
        drawn.insert(0, Curve(then.hz, then.output if output else then.input, "dim", "dotted", "-", "b"))
        wholes.append(drawn[0].y)
    target = None if output else next((one for one in of.targets if one.name == "noise"), None)
    axis = _axis(wholes, [one.y for one in drawn], target, output, rows)
    return _marked(scene, replace(empty, y=axis, curves=tuple(drawn)), target, output)


def _marked(scene: Scene, drawn: Chart, target: Target | None, output: bool) -> Chart:
    """With the density at the reference, the ends of the noise band, the target."""
    noise, spots = scene.figures.noise, tuple[Spot, ...]()
    spot = noise.at_reference if noise is not None else None
    if spot is not None and spot.square > 0:
        spots = (Spot(spot.hz, spot.square**0.5 * (abs(spot.gain) if output else 1.0)),)
    ends = (noise.from_hz, noise.to_hz) if noise is not None else ()
    levels = tuple[Level, ...]()
    if target is not None and target.want > 0:
        label = scene.pen.text(f"≤{short(target.want)}")
        levels = (Level(target.want, style=_LOOKS[target.met], label=label if cells(label) <= LEAST_GUTTER else ""),)
    return replace(drawn, spots=spots, levels=levels, uprights=tuple(Upright(hz) for hz in ends if hz))


def _axis(wholes: list[Array], each: list[Array], target: Target | None, output: bool, rows: int) -> Axis:
    """Equal ratios around what matters: of the input the least density, of the output the greatest."""
    most = max(LEAST_DECADES, rows * DECADES_A_ROW)
    with np.errstate(all="ignore"):
        known = [y[np.isfinite(y) & (y > 0)] for y in wholes]
        known = [y for y in known if y.size]
        if not known:
            return Axis(0.1, 10.0, log=True)
        end = max(float(y.max()) for y in known) if output else min(float(y.min()) for y in known)
        low, high = (end / 10**most, end) if output else (end / NEAR, end * 10**most)
        seen = [np.where((y >= low) & (y <= high), y, np.nan) for y in each]
    if output:
        seen.append(np.array([end * 10 ** (NOTE_ROWS * most / max(rows, 1))]))
    if target is not None and low / NEAR <= target.want <= high:
        seen.append(np.array([target.want]))
    return scale.sizes(seen, rows, "", most + 0.5)


def _letter(maker: Maker) -> str:
    """A maker's name, as far as it is short."""
    for name in (maker.name, maker.stage):
        if len(name) <= MOST_LETTERS:
            return name
    return maker.stage[:MOST_LETTERS - 1]
