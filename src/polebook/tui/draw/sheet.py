"""The sheet in a few lines: a head that tells where the line stands, its keys in columns, the focused one marked."""

from __future__ import annotations

from polebook.report.look import cells
from polebook.session.state import KeyRow
from polebook.tui.draw.head import head
from polebook.tui.draw.pen import Pen, left
from polebook.tui.draw.scene import Scene
from polebook.tui.lines import Line, Span
from polebook.tui.view import Field

GAP = 2
MOST_VALUE = 16
LEAST_FIELD = 8


def sheet(scene: Scene, room: int, rows: int) -> list[Line]:
    """At most `rows` lines of at most `room` cells."""
    if rows < 1:
        return []
    return [head(scene, room), *_keys(scene, room, rows - 1)]


def rows_for_all(scene: Scene, room: int, most: int) -> int:
    """Lines that the sheet takes with every key in sight; `most` where it would be more."""
    sizes = _sizes(scene)
    for rows in range(1, most - 1):
        if sum(wide + GAP for *_, wide in _columns(sizes, rows)) <= room - 1:
            return rows + 1
    return most


def _sizes(scene: Scene) -> list[tuple[int, int]]:
    """Cells of each key's name and of its value."""
    return [(cells(scene.pen.text(row.key)), value_cells(scene, row)) for row in scene.keys]


def _columns(sizes: list[tuple[int, int]], rows: int) -> list[tuple[int, int, int, int]]:
    """(first key, cells of a key's name, cells of a value, cells of both with the mark) of each column."""
    found = []
    for first in range(0, len(sizes), rows):
        column = sizes[first:first + rows]
        name, size = (max(one[at] for one in column) for at in (0, 1))
        found.append((first, name, size, name + size + 3))
    return found


def _keys(scene: Scene, room: int, rows: int) -> list[Line]:
    if rows < 1 or not scene.keys:
        return []
    columns = _columns(_sizes(scene), rows)
    seen = _in_sight(columns, scene.key // rows, room - 1)
    lines: list[list[Span]] = [[Span(" ")] for _ in range(rows)]
    for first, name, size, wide in seen:
        for number, line in enumerate(lines):
            at = first + number
            if at >= min(first + rows, len(scene.keys)):
                line.append(Span(" " * (wide + GAP)))
                continue
            line += key_spans(scene, at, name, min(size, max(room - name - 5, 1)))
            line.append(Span(" " * GAP))
    return [tuple(line) for line in lines]


def _in_sight(columns: list[tuple[int, int, int, int]], at: int, room: int) -> list[tuple[int, int, int, int]]:
    """The page of columns that holds column `at`; the last page is as full as it can be."""
    pages: list[list[tuple[int, int, int, int]]] = []
    used = room + 1
    for column in columns:
        wide = column[3] + GAP
        if used + wide > room:
            pages.append([])
            used = 0
        pages[-1].append(column)
        used += wide
    page = next((page for page in pages if any(column is columns[min(at, len(columns) - 1)] for column in page)), [])
    if page and page is pages[-1] and len(pages) > 1:
        start = columns.index(page[0])
        used = sum(column[3] + GAP for column in page)
        while start and used + columns[start - 1][3] + GAP <= room:
            start -= 1
            used += columns[start][3] + GAP
        return columns[start:]
    return page


def open_field(scene: Scene, row: KeyRow) -> Field | None:
    """The open field where it is that of this key."""
    field = scene.view.field
    return field if field is not None and field.path == row.path else None


def value_cells(scene: Scene, row: KeyRow) -> int:
    """Cells that a key's value takes, an open field's text with its cursor."""
    field = open_field(scene, row)
    if field is not None:
        return max(min(cells(scene.pen.text(field.typed)) + 1, 40), LEAST_FIELD)
    return min(max(cells(value(scene.pen, row)[0]), 2), MOST_VALUE)


def value(pen: Pen, row: KeyRow) -> tuple[str, str]:
    """A key's value as shown, and its style: what stands in the file, else the default, else a dash."""
    if row.text:
        return pen.text(" ".join(row.text.split())), ""
    if row.default:
        return pen.text(row.default), "dim"
    return ("needed", "bad") if row.required else (pen.text("–"), "dim")


def key_spans(scene: Scene, at: int, name: int, size: int) -> list[Span]:
    """A key and its value, in name + size + 3 cells: a mark, the name, a blank, the value, a blank or a mark."""
    row, pen = scene.keys[at], scene.pen
    chosen = at == scene.key
    lit = chosen and scene.view.focus == "sheet"
    mark, end = (pen.sign("▸"), pen.sign("◂")) if lit else (pen.sign("▸") if chosen else " ", " ")
    key = left(pen.cut(pen.text(row.key), name), name)
    field = open_field(scene, row)
    if field is not None:
        return [Span(f"{mark}{key} ", "select"), *field_spans(pen, field.typed, field.cursor, size), Span(" ")]
    text, style = value(pen, row)
    text = pen.cut(text, size)
    pad = " " * (size - cells(text))
    if lit:
        return [Span(f"{mark}{key} ", "select"), Span(text, "focus"), Span(end, "select"), Span(pad)]
    return [Span(f"{mark}{key} ", "select" if chosen else "dim"), Span(f"{text}{pad}{end}", style)]


def field_spans(pen: Pen, typed: str, cursor: int, size: int) -> list[Span]:
    """Typed text with the cursor in sight, in exactly `size` cells."""
    size = max(size, 1)
    cursor = min(max(cursor, 0), len(typed))
    shown = [pen.text(char) or " " for char in typed] + [" "]
    first = 0
    while first < cursor and sum(map(cells, shown[first:cursor + 1])) > size:
        first += 1
    before = "".join(shown[first:cursor])
    here = shown[cursor]
    used = cells(before) + cells(here)
    if used > size:  # one character wider than the field
        return [Span(" " * size, "focus")]
    after = ""
    for char in shown[cursor + 1:]:
        if used + cells(char) > size:
            break
        after += char
        used += cells(char)
    return [Span(before, "field"), Span(here, "focus"), Span(after + " " * (size - used), "field")]
