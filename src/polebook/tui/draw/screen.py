"""The whole screen: which rows go to what, at any size."""

from __future__ import annotations

from polebook.book.reach import within_reach
from polebook.problem import ProblemsFound
from polebook.tui.draw import narrow, wide, writing
from polebook.tui.draw.pen import BLANK, Pen, pen
from polebook.tui.draw.scene import Scene
from polebook.tui.lines import Line, Span
from polebook.tui.view import State

LEAST_COLUMNS, LEAST_ROWS = 60, 16
WIDE_COLUMNS, WIDE_ROWS = 120, 24


def screen(state: State, columns: int, rows: int) -> list[Line]:
    """Exactly `rows` lines of exactly `columns` cells. Never raises, for no state and no size."""
    if columns < 1 or rows < 1:
        return [BLANK] * max(rows, 0)
    if columns < LEAST_COLUMNS or rows < LEAST_ROWS:
        lines = _notice(pen(state.plain), columns, rows)
    else:
        lines = _drawn(state, columns, rows)
    lines = [*lines[:rows], *[BLANK] * (rows - len(lines))]
    return [pen(state.plain).fitted(line, columns) for line in lines]


def _drawn(state: State, columns: int, rows: int) -> list[Line]:
    """The screen; without figures where they turn out to be beyond what can be computed."""
    draw = wide.screen if columns >= WIDE_COLUMNS and rows >= WIDE_ROWS else narrow.screen
    scene = Scene(state)
    if state.view.writing is not None and state.view.overlay is None:
        return writing.screen(scene, state.view.writing, columns, rows)
    if scene.ledger is None:
        return draw(scene, columns, rows)
    try:
        with within_reach(scene.ledger.chain):
            return draw(scene, columns, rows)
    except ProblemsFound as found:
        return draw(Scene(state, found.problems), columns, rows)


def _notice(pen: Pen, columns: int, rows: int) -> list[Line]:
    """What is said below the least size, in the middle of what there is."""
    told = f"This needs {LEAST_COLUMNS} columns by {LEAST_ROWS} rows; the terminal has {columns} by {rows}."
    lines = [*pen.wrapped(told, columns - 2), *pen.wrapped("Make it larger, or q leaves.", columns - 2)]
    above = max((rows - len(lines)) // 2, 0)
    return [BLANK] * above + [(Span(f" {text}"),) for text in lines]
