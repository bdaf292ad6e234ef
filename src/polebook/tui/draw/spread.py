"""Page 8, spread: will the built chains hold. Yield, histograms with their targets, what each tolerance costs."""

from __future__ import annotations

from polebook.tui.draw.pen import BLANK
from polebook.tui.draw.plot.paint import AXIS_ROWS
from polebook.tui.draw.scene import Scene
from polebook.tui.draw.spread_chart import NOMINAL, histogram
from polebook.tui.draw.spread_empty import empty
from polebook.tui.draw.spread_rank import ranking
from polebook.tui.draw.spread_text import limits, value
from polebook.tui.draw.spread_told import about, flowing, head, notes, running, table, yields
from polebook.tui.keys import Hint
from polebook.tui.lines import Line, Span
from polebook.tui.spreads import TABLE, Figure, Run, fresh, looked_at, rows
from polebook.tui.spreads import figures as known

WANT = 14
LEAST_CHART = AXIS_ROWS + 3
BESIDE = 36  # cells of the ranking beside a histogram
ALL_ROOM, ALL_ROWS = 79, 24  # from which on all is in sight at once
LEAST_RANKING, MOST_RANKING = 6, 16
MOST_CHART = 14
_OVERALL = {"gain_db": "overall.gain_db", "gain_at_reference_db": "overall.gain_at_reference",
            "lower_edge_hz": "overall.lower_edge_hz", "upper_edge_hz": "overall.upper_edge_hz",
            "peaking_db": "overall.peaking_db", "noise_density": "overall.noise_density"}


def figures(scene: Scene) -> tuple[str, ...]:
    """The figure that is looked at, of the chain as it is now."""
    spread = scene.view.spread
    of = looked_at(spread) if spread.figure != TABLE else None
    return (_OVERALL[of.name],) if of is not None and of.name in _OVERALL and fresh(scene.state) else ()


def page(scene: Scene, room: int, rows: int, focus: str = "") -> list[Line]:
    """At most `rows` lines of at most `room` cells."""
    spread = scene.view.spread
    run, of = spread.run, looked_at(spread)
    if run is None:
        return empty(scene, room, rows)[:rows]
    above = [head(scene, run, room), yields(scene, run, room)]
    if rows >= ALL_ROWS and room >= ALL_ROOM:
        lines = [*above, BLANK, *table(scene, run, room), *notes(scene, run, room)[:3], BLANK]
        lines += _all(scene, run, of, room, rows - len(lines))
    elif of is None or spread.figure == TABLE:
        lines = [*above, BLANK, *table(scene, run, room), BLANK, *notes(scene, run, room)]
        lines += [BLANK, *ranking(scene, room, rows - len(lines) - 1)] if rows - len(lines) > LEAST_RANKING else []
    else:
        lines = [*above, *about(scene, run, of, room, focus)]
        lines += _one(scene, of, room, rows - len(lines))
    return lines[:rows]


def _one(scene: Scene, of: Figure, room: int, size: int) -> list[Line]:
    """A histogram and beside it the ranking; the ranking alone where there is no room for both."""
    beside = min(BESIDE, room * 9 // 20)
    if size < LEAST_CHART:
        return ranking(scene, min(room, 2 * BESIDE), size)
    return _beside(scene, histogram(scene, of, room - beside - 2, size), ranking(scene, beside, size), room - beside)


def _all(scene: Scene, run: Run, of: Figure | None, room: int, size: int) -> list[Line]:
    """Histograms two abreast; the ranking below them, or in the place that is left."""
    shown, side = known(run), room // 2
    below = 0 if len(shown) % 2 else min(len(rows(scene.view.spread)) + 1, LEAST_RANKING)
    tall = min((size - below - 1) // max(-(-len(shown) // 2), 1), MOST_CHART)
    if tall <= LEAST_CHART:
        return ranking(scene, room, min(size, MOST_RANKING))
    blocks = [[_title(scene, one, one is of, side - 2), *histogram(scene, one, side - 2, tall - 1)] for one in shown]
    if not below:
        blocks.append(ranking(scene, room - side, tall))
    lines: list[Line] = []
    for first in range(0, len(blocks), 2):
        lines += _beside(scene, blocks[first], blocks[first + 1], side)
    return [*lines, BLANK, *ranking(scene, room, min(size - len(lines) - 1, MOST_RANKING))] if below else lines


def _title(scene: Scene, of: Figure, chosen: bool, room: int) -> Line:
    """What stands over a histogram."""
    pen = scene.pen
    told: list[Line] = [(Span(f" {of.word}", "select" if chosen else "head"),),
                        (Span(pen.text(f"{pen.sign(NOMINAL)} {value(scene, of, of.nominal)}"), "dim"),)]
    if of.limits:
        told.append((Span(f"{pen.sign('┊')} ", "warn"), Span(pen.text(limits(scene, of)), "dim")))
    return flowing(told, room)


def _beside(scene: Scene, one: list[Line], other: list[Line], side: int) -> list[Line]:
    """Two blocks of lines side by side, the second from cell `side` on."""
    tall = max(len(one), len(other))
    one, other = one + [BLANK] * (tall - len(one)), other + [BLANK] * (tall - len(other))
    return [(*scene.pen.fitted(first, side), *second) for first, second in zip(one, other, strict=True)]


def hints(scene: Scene) -> tuple[Hint, ...]:
    """What can be pressed on the page, by what it would do."""
    spread, busy = scene.view.spread, running(scene.state)
    holds = fresh(scene.state) and bool(rows(spread))
    first: list[Hint] = [("Esc", "stop")] if busy else [] if holds else [("Enter", "run" if spread.run is None else
                                                                          "run again")]
    if holds and not busy:
        first += [("Enter", "to its key"), ("s", "run again")]
    if spread.run is not None:
        first += [("v V", "figure"), ("↑ ↓", "row")]
    return (*first, ("* /", "builds"), ("[ ]", "seed"), ("Tab", "sheet"), ("?", "help"))
