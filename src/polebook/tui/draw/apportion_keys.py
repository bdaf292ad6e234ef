"""The left of the apportion page: every key that could change, whether it may, and where the shown plan puts it."""

from __future__ import annotations

from dataclasses import replace

from polebook.report import figures as show
from polebook.report.apportion import way
from polebook.report.look import fit
from polebook.tui.apportions import Row as Of
from polebook.tui.apportions import at, chosen, known, rows, standing
from polebook.tui.draw.apportion_told import running
from polebook.tui.draw.grid import NOTHING, Cell, Column, Row, grid
from polebook.tui.draw.pen import window
from polebook.tui.draw.scene import Scene
from polebook.tui.lines import Line

LEAST_NAME, MOST_NAME = 10, 24
TITLED = 5  # rows from which on there is a heading
MAY, STAYS = "●", "·"


def keys(scene: Scene, room: int, size: int) -> list[Line]:
    """At most `size` lines of at most `room` cells: the heading and the rows about the chosen one."""
    state, pen = scene.state, scene.pen
    found, may, how = rows(state), chosen(state), standing(state)
    shown = size - 1 if size >= TITLED else size
    if not found or shown < 1:
        return []
    here = at(found, state.view.apportion, scene.keys[scene.key].path if scene.keys else "")
    first = window(len(found), shown, here)
    lit = scene.view.focus == "page"
    planned = how != "none" and not running(state)
    cells = {one.path: _planned(one, how) if planned else [Cell(one.text or show.NONE)] for one in found}
    titles = (("was", "today") if how == "accepted" else ("today", "proposed")) if planned else ("today",)
    others = sum(1 + max(len(title), *(len(of[at].text) for of in cells.values()))
                 for at, title in enumerate((*titles, "")[:len(titles) + planned]))
    names = min(max(room - 3 - others, LEAST_NAME), MOST_NAME)
    body = []
    for number, one in enumerate(found[first:first + shown], start=first):
        free = one.path in may
        style = "" if free else "dim"
        body.append(Row([
            Cell(pen.sign("▸") if number == here and lit else ""),
            Cell(pen.sign(MAY if free else STAYS) if one.handle is not None else "", style),
            Cell(fit(pen.text(one.path), names, pen.text("…")), style),
            *(replace(cell, style=cell.style or style) for cell in cells[one.path]),
        ], "select" if one.owner == scene.sheet else ""))
    count = f"{len(may)}/{len(known(state).handles)} free"
    columns = [Column(least=1, gap=0), Column(least=1, gap=0), Column(count, LEAST_NAME, right=False),
               *(Column(title, 5) for title in titles), *([Column(right=False, drop=1)] if planned else [])]
    lines = grid(columns, body, room, pen)
    return lines if shown < size else lines[1:]


def _planned(one: Of, how: str) -> list[Cell]:
    """Value of now, value of the plan, and how far that is; of an accepted plan the value before and that of now."""
    here, key = Cell(one.text or show.NONE), one.key
    if key is None:
        return [here, NOTHING, NOTHING] if how != "accepted" else [NOTHING, here, NOTHING]
    there = key["text"] or show.NONE
    if how == "old":
        return [here, Cell(there, "dim"), NOTHING]
    change = Cell(way(key), "dim")
    if how == "accepted":
        return [Cell(key["now_text"] or show.NONE, "dim"), Cell(one.text or show.NONE, "moved"), change]
    return [here, Cell(there, "moved"), change]
