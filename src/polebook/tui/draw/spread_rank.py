"""What each tolerance does: the yield that half of it would bring, its share of a figure's spread, its worst end."""

from __future__ import annotations

from polebook.report.look import fit
from polebook.tui.draw.grid import Cell, Column, Row, grid
from polebook.tui.draw.pen import window
from polebook.tui.draw.scene import Scene
from polebook.tui.draw.spread_text import more, percent, reach
from polebook.tui.lines import Line
from polebook.tui.spreads import chosen, fresh, looked_at, rows

MOST_NAME = 18
BARS_FROM = 60  # cells from which the shares have bars too


def ranking(scene: Scene, room: int, size: int) -> list[Line]:
    """At most `size` lines of at most `room` cells: the heading and the rows about the chosen one."""
    spread, pen = scene.view.spread, scene.pen
    run, figure = spread.run, looked_at(spread)
    if run is None or size < 2:
        return []
    found, name = rows(spread), figure.name if figure is not None else ""
    at = chosen(spread, found)
    first = window(len(found), size - 1, at)
    lit = scene.view.focus == "page" and fresh(scene.state)
    dear = run.told.dear and bool(run.told.yields)
    most = max((row.shares.get(name, 0.0) for row in found), default=0.0)
    body = []
    for number, row in enumerate(found[first:first + size - 1], start=first):
        share = row.shares.get(name)
        half = more(row.half, row.solved)
        body.append(Row([
            Cell(pen.sign("▸") if number == at and lit else ""),
            Cell(fit(pen.text(row.label), MOST_NAME if room >= BARS_FROM else max(room - 23, 8), pen.text("…"))),
            Cell(half, "" if half not in ("", "0") else "dim"), Cell(more(row.none, solved=False), "dim"),
            Cell(reach(row, name)),
            Cell("" if share is None else percent(share, unit=False) if share >= 5e-4 else "0", "dim"),
            Cell(bar=share / most if share and most else None, style="bar"),
        ], "select" if row.path.startswith(f"{scene.sheet}.") else ""))
    word = figure.word if figure is not None else ""
    columns = [Column(least=1, gap=0), Column("tolerance", 9, right=False),
               Column("halved, %" if room >= BARS_FROM else "halved", 6, drop=0 if dear else 9),
               Column("none, %", 7, drop=4 if dear else 9),
               Column("worst" if found and found[0].ends else "", 6, drop=2),
               Column(f"of {word}, %" if room >= BARS_FROM else "of it", 5, drop=1),
               Column("", 3, right=False, most=16, drop=3)]
    wide = room >= BARS_FROM
    kept = [at for at, column in enumerate(columns) if column.drop != 9 and (wide or at not in (3, 6))]
    return grid([columns[at] for at in kept], [Row([row.cells[at] for at in kept], row.style) for row in body], room,
                pen)[:size]
