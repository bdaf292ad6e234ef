"""The screen of two columns: the page, verdict and rankings at the left, the sheet of the selected line beside them."""

from __future__ import annotations

from polebook.tui.draw import ledger, nodes, response
from polebook.tui.draw.message import message
from polebook.tui.draw.narrow import key_line, page_rule, shown_page, without_figures
from polebook.tui.draw.overlay import overlay
from polebook.tui.draw.owners import owners
from polebook.tui.draw.pages import drawn
from polebook.tui.draw.panel import panel
from polebook.tui.draw.pen import BLANK, Pen
from polebook.tui.draw.scene import Scene
from polebook.tui.draw.strip import strip
from polebook.tui.draw.title import title
from polebook.tui.draw.verdict import verdict
from polebook.tui.lines import Line, Span

LEAST_LEFT, MOST_LEFT, PANEL = 80, 100, 53
LEAST_OWNERS = 9
LEAST_SHEET, MOST_PLOT = 8, 12
TEXTS = frozenset(("help", "working", "cautions", "changed", "recovered", "difference"))
"""Purposes that are read at the left, in the width that they were written for."""


def screen(scene: Scene, columns: int, rows: int) -> list[Line]:
    """All lines of the screen, without the blanks at their ends."""
    last = [*message(scene, columns), key_line(scene, columns)]
    top = [title(scene, columns)]
    rule = scene.pen.rule(columns)
    if scene.ledger is None:
        return [*top, *without_figures(scene, columns, rows - 2 - len(last)), rule, *last]
    top += [BLANK, *strip(scene, columns), page_rule(scene, columns)]
    size = rows - len(top) - 1 - len(last)
    side = min(max(columns - PANEL, LEAST_LEFT), MOST_LEFT)
    width = columns - side - 1
    over = scene.view.overlay
    left = overlay(scene, over, side, size) if over is not None and over.purpose in TEXTS else \
        _left(scene, side - 1, size)  # a blank before the wall
    right = overlay(scene, over, width, size) if over is not None and over.purpose not in TEXTS else \
        _right(scene, width, size)
    body = [beside(scene.pen, _at(left, row), _at(right, row), side) for row in range(size)]
    top[-1] = crossed(top[-1], side, scene.pen.sign("┬"))
    return [*top, *body, crossed(rule, side, scene.pen.sign("┴")), *last]


def beside(pen: Pen, left: Line, right: Line, side: int) -> Line:
    """Both sides with the wall between them; a rule of either side joins it."""
    ends = _is_rule(pen, left), _is_rule(pen, right)
    wall = {(False, False): "│", (True, False): "┤", (False, True): "├", (True, True): "┼"}[ends]
    return (*pen.fitted(left, side), Span(pen.sign(wall), "dim"), *right)


def _is_rule(pen: Pen, line: Line) -> bool:
    return len(line) == 1 and bool(line[0].text) and not line[0].text.strip(pen.sign("─"))


def crossed(rule: Line, at: int, sign: str) -> Line:
    """A rule with the wall's end on it."""
    spans: list[Span] = []
    for span in rule:
        if 0 <= at < len(span.text):
            spans.append(Span(span.text[:at] + sign + span.text[at + 1:], span.style))
        else:
            spans.append(span)
        at -= len(span.text)
    return tuple(spans)


def _at(lines: list[Line], row: int) -> Line:
    return lines[row] if row < len(lines) else BLANK


def _right(scene: Scene, room: int, rows: int) -> list[Line]:
    """The sheet, and below it the response where the page is not that already."""
    plot = min(rows // 5 + 3, MOST_PLOT)
    if scene.view.page == "response" or rows - plot < LEAST_SHEET + 1:
        return panel(scene, room, rows)
    above = panel(scene, room, rows - plot - 1)
    above += [BLANK] * (rows - plot - 1 - len(above))
    return [*above, scene.pen.rule(room), *response.small(scene, room - 1, plot)]


def _left(scene: Scene, room: int, rows: int) -> list[Line]:
    """The page, the verdict, and below it what fills the rows: the other figures that tell what to do next."""
    told = verdict(scene, room)
    space = rows - len(told) - 2
    want = drawn(scene).wide(scene, space)
    page = shown_page(scene, room, max(min(want, space), 4))
    lines = [*page, BLANK, scene.pen.rule(room + 1), *told]
    rest = rows - len(lines) - 1
    if rest < 5:
        return lines
    lines.append(scene.pen.rule(room + 1))
    if scene.view.page == "nodes":
        lines += ledger.page(scene, room, rest)
        rest = rows - len(lines) - 1
        return [*lines, BLANK, *owners(scene, room, rest)] if rest >= 5 else lines
    lines += owners(scene, room, min(rest, max(rest - nodes.rows_for_all(scene) - 1, LEAST_OWNERS)))
    rest = rows - len(lines) - 1
    if rest >= 5:
        lines += [BLANK, *nodes.page(scene, room, rest)]
    return lines
