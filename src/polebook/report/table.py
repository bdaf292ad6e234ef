"""Tables that fit: columns as wide as their widest cell, the roomiest text column cut where the line is full."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from polebook.report.look import Look, cells, fit
from polebook.report.markdown import Markup, piped

GAP = 2
LEAST = 4  # what a cut column keeps


@dataclass(frozen=True, slots=True)
class Cell:
    """Text in a style of `Look.paint`."""

    text: str
    style: str = ""


@dataclass(frozen=True, slots=True)
class Column:
    """`title` may hold line breaks. `right`: figures. A column that is not `right` may be cut to fit."""

    title: str
    right: bool = True


Row = Sequence[Cell | str]


def table(columns: Sequence[Column], rows: Sequence[Row], look: Look, gap: int = GAP) -> list[str]:
    """The heading and the rows as lines, indented by one, each within `look.width` columns."""
    body = [[_shown(cell, look) for cell in row] for row in rows]
    if isinstance(look, Markup):
        return piped([look.text(" ".join(column.title.split("\n"))) for column in columns],
                     [column.right for column in columns],
                     [[look.paint(cell.text, cell.style) for cell in row] for row in body])
    heads = [[look.text(part) for part in column.title.split("\n")] for column in columns]
    widths = [
        max([*map(cells, heads[at]), *(cells(row[at].text) for row in body)], default=0) for at in range(len(columns))
    ]
    _narrow(columns, widths, look.width - 1 - gap * (len(columns) - 1))
    tall = max(map(len, heads))
    lines = []
    for level in range(tall):
        parts = [head[level - tall + len(head)] if level >= tall - len(head) else "" for head in heads]
        lines.append(_line(columns, widths, [Cell(part, "dim") for part in parts], look, gap))
    return lines + [_line(columns, widths, row, look, gap) for row in body]


def _shown(cell: Cell | str, look: Look) -> Cell:
    cell = cell if isinstance(cell, Cell) else Cell(cell)
    return Cell(look.text(cell.text), cell.style)


def _narrow(columns: Sequence[Column], widths: list[int], room: int) -> None:
    """Take cells from the widest text column until the line fits; figures are never cut."""
    while sum(widths) > room:
        texts = [at for at, column in enumerate(columns) if not column.right and widths[at] > LEAST]
        if not texts:
            return
        widths[max(texts, key=lambda at: widths[at])] -= 1


def _line(columns: Sequence[Column], widths: Sequence[int], row: Sequence[Cell], look: Look, gap: int) -> str:
    done = []
    for column, width, cell in zip(columns, widths, row, strict=True):
        text = cell.text if column.right else fit(cell.text, width, look.text("…"))
        blank = " " * (width - cells(text))
        painted = look.paint(text, cell.style)
        done.append(blank + painted if column.right else painted + blank)
    return (" " + (" " * gap).join(done)).rstrip()
