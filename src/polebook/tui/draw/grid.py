"""Tables of figures: columns with widths of their own, dropped in a stated order where the line is full."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from polebook.report.look import cells
from polebook.tui.draw.pen import Pen, left, right
from polebook.tui.lines import Line, Span


@dataclass(frozen=True, slots=True)
class Column:
    """A column.

    least  cells that it has at the least, so that it does not jump as figures change
    drop   0 stays; where the line is full the column with the greatest goes first
    gap    blanks before it
    most   for a column of bars: the most that it takes of what is left over; then `least` is its least
    """

    title: str = ""
    least: int = 0
    right: bool = True
    drop: int = 0
    gap: int = 1
    most: int = 0


@dataclass(frozen=True, slots=True)
class Cell:
    """Text, or a bar of a share of 1. `figure` names the ledger's figure that it shows."""

    text: str = ""
    style: str = ""
    bar: float | None = None
    figure: str = ""


NOTHING = Cell()
_TELLING = frozenset(("bad", "warn", "moved", "bar"))


@dataclass(frozen=True, slots=True)
class Row:
    """Cells in the order of the columns; a style of the row stands in where a cell has none that tells something."""

    cells: Sequence[Cell]
    style: str = ""


def grid(columns: Sequence[Column], rows: Sequence[Row], room: int, pen: Pen, focus: str = "") -> list[Line]:
    """The heading and the rows, each within `room` cells. The figure named `focus` of the selected row stands out."""
    head = Row([Cell(column.title, "dim") for column in columns])
    texts = [[pen.text(cell.text) for cell in row.cells] for row in (head, *rows)]
    widths = [
        max([column.least, *(cells(row[at]) for row in (texts[1:] if column.most else texts))])
        for at, column in enumerate(columns)
    ]
    kept = _kept(columns, widths, room)
    for at in kept:
        if columns[at].most:
            over = room - sum(columns[k].gap + widths[k] for k in kept if k != at) - columns[at].gap
            widths[at] = max(min(over, columns[at].most), widths[at])
            texts[0][at] = pen.cut(texts[0][at], widths[at])
            for row, shown in zip(rows, texts[1:], strict=True):
                if (share := row.cells[at].bar) is not None:
                    shown[at] = pen.look.bar(share, widths[at])
    return [_line(columns, widths, kept, row, shown, focus)
            for row, shown in zip((head, *rows), texts, strict=True)]


def _kept(columns: Sequence[Column], widths: Sequence[int], room: int) -> list[int]:
    kept = list(range(len(columns)))
    while sum(columns[at].gap + widths[at] for at in kept) > room:
        loose = [at for at in kept if columns[at].drop]
        if not loose:
            break
        worst = max(columns[at].drop for at in loose)
        kept = [at for at in kept if columns[at].drop != worst]
    return kept


def _line(columns: Sequence[Column], widths: Sequence[int], kept: Sequence[int], row: Row, texts: Sequence[str],
          focus: str) -> Line:
    """One row; neighbours of one style are one span."""
    spans: list[Span] = []
    for at in kept:
        cell, size = row.cells[at], widths[at]
        shown = right(texts[at], size) if columns[at].right else left(texts[at], size)
        if focus and cell.figure == focus:
            _put(spans, " " * columns[at].gap, row.style)
            _put(spans, shown, "focus")
        else:
            _put(spans, " " * columns[at].gap, row.style)
            _put(spans, shown, cell.style if cell.style in _TELLING else row.style or cell.style)
    return tuple(spans)


def _put(spans: list[Span], text: str, style: str) -> None:
    """Adds text, joined to what stands before it where the style is the same or the text is blank."""
    if not text:
        return
    if spans and (spans[-1].style == style or (not text.strip() and spans[-1].style in ("", "dim") and not style)):
        spans[-1] = Span(spans[-1].text + text, spans[-1].style)
    else:
        spans.append(Span(text, style))
