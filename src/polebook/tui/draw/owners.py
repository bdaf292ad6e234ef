"""Who owns the edges: the parts ranked, both ends of the band beside each other. For wide screens."""

from __future__ import annotations

from collections.abc import Mapping

from polebook.book.verdict_words import UNITS
from polebook.report import figures as show
from polebook.tui.draw.grid import NOTHING, Cell, Column, Row, grid
from polebook.tui.draw.pen import BLANK
from polebook.tui.draw.scene import Scene
from polebook.tui.lines import Line, Span

MOST_NAME = 18
FAINT = 0.005  # a share that would be shown as 0


def owners(scene: Scene, room: int, rows: int) -> list[Line]:
    """At most `rows` lines of at most `room` cells: both rankings."""
    of = scene.figures
    half = (room - 3) // 2
    sides = [_ranking(scene, half, rows, name, hz, shares) for name, hz, shares in (
        ("upper", of.upper_hz, of.owns_upper), ("lower", of.lower_hz, of.owns_lower))]
    tall = max(map(len, sides))
    left, right = ([*side, *[BLANK] * (tall - len(side))] for side in sides)
    fitted = scene.pen.fitted
    return [(Span(" "), *fitted(a, half), Span("  "), *fitted(b, half)) for a, b in zip(left, right, strict=True)]


def _ranking(scene: Scene, room: int, rows: int, name: str, hz: float | None,
             shares: Mapping[int, float]) -> list[Line]:
    layout, net = scene.figures.solution.circuit.layout, scene.figures.solution.circuit.network
    if hz is None or not shares:
        return [(Span(f"the band has no {name} edge", "dim"),)]
    listed = sorted(shares.items(), key=lambda item: -item[1])
    size = max(rows - 2, 1)
    telling = sum(share >= FAINT for _, share in listed)
    shown = listed if len(listed) <= min(size, telling) else listed[:max(min(size - 1, telling), 1)]
    most = listed[0][1]
    body = []
    for number, (k, share) in enumerate(shown):
        part = layout.parts[k]
        body.append(Row([
            Cell(scene.pen.cut(scene.pen.text(f"{part.stage}.{part.name}"), MOST_NAME)),
            Cell(show.eng(net.values[k], UNITS.get(part.type, ""))),
            Cell(bar=share / most, style="bar") if share > 0 and most > 0 else NOTHING,
            Cell(show.about(share).removesuffix(" %")),
        ], "head" if number == 0 else ""))
    if len(shown) < len(listed):
        rest = sum(share for _, share in listed[len(shown):])
        body.append(Row([Cell(f"{len(listed) - len(shown)} more"), NOTHING, NOTHING,
                         Cell(show.about(rest).removesuffix(" %"))], "dim"))
    columns = [Column("part", 8, right=False, gap=0), Column("value", 7), Column("", 3, right=False, most=10),
               Column("%", 3)]
    head: Line = (Span(f"{name} edge ", "dim"), Span(show.eng(hz, "Hz"), "head"), Span(" owned by", "dim"))
    return [head, *grid(columns, body, room, scene.pen)][:rows]
