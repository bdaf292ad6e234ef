"""Page 7, leverage: what one per cent of each part moves, ranked; below or in its place the sweep of a part."""

from __future__ import annotations

from polebook.report import figures as show
from polebook.report.leverage import LEAST, signed
from polebook.tui.draw import swept
from polebook.tui.draw.grid import Cell, Column, Row, grid
from polebook.tui.draw.levers import AIMS, Mover, aim, chosen, ranked
from polebook.tui.draw.pen import BLANK, Pen, window
from polebook.tui.draw.scene import Scene
from polebook.tui.keys import Hint
from polebook.tui.lines import Line

MOST_NAME = 18
FRAME_ROWS = 1  # the heading
RANKING = 11  # rows of the ranking above a plot
BOTH = RANKING + 1 + swept.LEAST_ROWS
LEAST_HALF, MOST_HALF = 3, 12  # cells of a bar on either side


def figures(scene: Scene) -> tuple[str, ...]:
    """The chosen leverage of the chosen row, where `working` can account for it."""
    movers = ranked(scene)
    if not movers or not (mover := movers[chosen(scene, movers)]).known:
        return ()
    return (f"{mover.name}.leverage.{aim(scene.view.lever.figure).key}",)


def page(scene: Scene, room: int, rows: int, focus: str = "") -> list[Line]:
    """At most `rows` lines of at most `room` cells."""
    sweep, shown = scene.view.lever.sweep, scene.view.lever.open
    if sweep is None or (rows < BOTH and not shown):
        return ranking(scene, room, rows, focus)
    if rows < BOTH:
        return swept.plot(scene, sweep, room, rows)
    above = [*ranking(scene, room, RANKING, "" if shown else focus), BLANK]
    return [*above, *swept.plot(scene, sweep, room, rows - len(above))]


def hints(scene: Scene) -> tuple[Hint, ...]:
    """What can be pressed on the plot; () where the keys are those of the ranking."""
    lever = scene.view.lever
    return swept.hints(scene, lever.sweep) if lever.open and lever.sweep is not None else ()


def ranking(scene: Scene, room: int, rows: int, focus: str) -> list[Line]:
    """The rows around the chosen one."""
    movers, pen = ranked(scene), scene.pen
    size = max(rows - FRAME_ROWS, 1)
    at = chosen(scene, movers)
    first = window(len(movers), size, at)
    figure = aim(scene.view.lever.figure)
    most = max((abs(mover.on(figure.key) or 0.0) for mover in movers[:1]), default=0.0)
    lit = scene.view.focus == "page"
    half = min(max((room - 69) // 2, LEAST_HALF), MOST_HALF)
    body = []
    for number, mover in enumerate(movers[first:first + size], start=first):
        own = mover.sheet == scene.sheet
        body.append(Row([
            Cell(pen.sign("▸") if number == at and lit else ""),
            Cell(pen.cut(pen.text(mover.label), MOST_NAME)),
            Cell(show.eng(mover.value, mover.unit)),
            Cell(mover.role, "dim"),
            *(_figure(mover, one.key, figure.key) for one in AIMS),
            Cell(_bar(pen, mover.on(figure.key), most, half), "bar"),
        ], "select" if own else ""))
    title = f"{figure.word:^{2 * half - 1}}"
    columns = [Column(least=1, gap=0), Column("1 % more of", 11, right=False), Column("value", 8),
               Column("role", 4, right=False, drop=3),
               *(Column(f"{one.short} %", 7, drop=0 if one is figure else 2) for one in AIMS),
               Column(f"-{title}+" if len(title) <= 2 * half - 1 else title[:2 * half + 1], 2 * half + 1, right=False,
                      drop=1, gap=2)]
    return grid(columns, body, room, pen, focus)[:rows]


def _figure(mover: Mover, key: str, ranks: str) -> Cell:
    value = mover.on(key)
    if value is None:
        return Cell(show.NONE, "dim", figure=f"{mover.name}.leverage.{key}")
    felt = abs(value) >= LEAST
    return Cell(signed(value) if felt else "0", "" if felt and key == ranks else "dim",
                figure=f"{mover.name}.leverage.{key}")


def _bar(pen: Pen, value: float | None, most: float, half: int) -> str:
    """A bar from the middle: to the left for less, to the right for more."""
    share = (value or 0.0) / most if most else 0.0
    right = pen.look.bar(share, half) if share > 0 else ""
    return f"{_leftward(pen, -share, half):>{half}}{pen.sign('│')}{right}"


def _leftward(pen: Pen, share: float, room: int) -> str:
    """A bar that begins at the right; whatever is above 0 shows."""
    if share <= 0:
        return ""
    halves = max(round(min(share, 1.0) * room * 2), 1)
    if pen.plain:
        return "#" * ((halves + 1) // 2)
    return "▐" * (halves % 2) + "█" * (halves // 2)
