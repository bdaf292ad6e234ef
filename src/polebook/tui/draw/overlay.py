"""What lies over the page: a list to choose from, a text to read, a note or a name to write."""

from __future__ import annotations

import re

from polebook.report.look import cells
from polebook.tui.draw.difference import difference
from polebook.tui.draw.pen import BLANK, Pen, left, window
from polebook.tui.draw.scene import Scene
from polebook.tui.draw.sheet import field_spans
from polebook.tui.lines import Line, Span, width
from polebook.tui.view import Overlay

TYPED = frozenset(("find", "card", "cards", "rename", "take", "add", "kind", "choice", "sheets", "new", "post"))
"""Purposes that have a line to type in beside their title."""
MOST_LABEL = 34
LEAST_FIELD = 12
_COLUMN = re.compile(r" *\S+(?: \S+)* {2,}(?=\S)")


def overlay(scene: Scene, over: Overlay, room: int, rows: int) -> list[Line]:
    """At most `rows` lines: as many as it takes."""
    pen = scene.pen
    refused: list[Line] = [(Span(f" {part}", "bad"),) for part in pen.wrapped(over.refusal, room - 2)[:3]]
    rest = max(rows - 1 - len(refused), 1)
    hidden = len(over.choices) > rest
    lines: list[Line] = [_title(pen, over, room, f"{over.row + 1} of {len(over.choices)}" if hidden else ""), *refused]
    if over.purpose == "note":
        lines += _note(pen, over, room, rest)
    elif over.purpose == "start":
        lines += _form(pen, over, room, rest)
    elif over.purpose == "cautions":
        lines += _problems(pen, over, room, rest)
    elif over.choices:
        lines += _choices(pen, over, room, rest)
    elif over.purpose == "difference":
        lines += difference(pen, over, room, rest)
    elif over.text:
        lines += _text(pen, over, room, rest)
    return lines[:max(rows, 0)]


def _title(pen: Pen, over: Overlay, room: int, place: str) -> Line:
    """A rule with the title in it, what was typed to narrow the list, and where one is in a long one."""
    title = pen.name(pen.text(" ".join(over.title.split())), max(room - 20, 1))
    dash = pen.sign("─")
    spans: list[Span] = [Span(f"{dash}{dash} ", "dim"), Span(title, "head"), Span(" ")]
    size = max(min(room - width(tuple(spans)) - 4, 50), 1)
    if over.purpose in TYPED:
        wide = min(max(cells(pen.text(over.typed)) + 1, LEAST_FIELD), size)
        spans += [*field_spans(pen, over.typed, over.cursor, wide), Span(" ")]
    tail = f" {place} {dash}{dash}" if place else ""
    spans.append(Span(dash * max(room - width(tuple(spans)) - len(tail), 0) + tail, "dim"))
    return tuple(spans)


def _choices(pen: Pen, over: Overlay, room: int, rows: int) -> list[Line]:
    """One line a choice; the chosen one's explanation whole below where it is cut in its row."""
    count = len(over.choices)
    at = min(max(over.row, 0), count - 1)
    labels = [pen.text(choice.label) for choice in over.choices]
    size = min(max(map(cells, labels)), MOST_LABEL, max(room - 4, 1))
    if not any(choice.about for choice in over.choices):
        size = max(room - 4, 1)
    about = pen.text(" ".join(over.choices[at].about.split()))
    space = room - size - 6
    tail: list[Line] = []
    if about and cells(about) > space and rows > 6:
        tail = [BLANK, *((Span(f"   {part}", "dim"),) for part in pen.wrapped(about, room - 4)[:rows // 2])]
    fits = max(rows - len(tail), 1)
    first = window(count, fits, at)
    lines: list[Line] = []
    for number in range(first, min(first + fits, count)):
        chosen = number == at
        label = pen.cut(labels[number], size)
        spans = [Span(f" {pen.sign('▸') if chosen else ' '} ", "select"),
                 Span(label, "focus" if chosen else "")]
        told = pen.text(" ".join(over.choices[number].about.split()))
        if told and space > 3:
            spans += [Span(" " * (size - cells(label) + 2)), Span(pen.cut(told, space), "" if chosen else "dim")]
        lines.append(tuple(spans))
    return lines + tail


def _problems(pen: Pen, over: Overlay, room: int, rows: int) -> list[Line]:
    """One line a problem; below, the chosen one whole: what is wrong, why, and how to mend it."""
    count = len(over.choices)
    if not count:
        return []
    at = min(max(over.row, 0), count - 1)
    one = over.choices[at]
    told = pen.wrapped(one.about, room - 4)
    if cells(pen.text(one.label)) > room - 4:
        told = [*pen.wrapped(one.label, room - 4), *told]
    told = told[:max(rows - min(count, 3) - 1, 0)]
    fits = max(rows - len(told) - 1, 1)
    first = window(count, fits, at)
    lines: list[Line] = [(Span(f" {pen.sign('▸') if k == at else ' '} ", "select"),
                          Span(pen.cut(pen.text(over.choices[k].label), room - 4), "focus" if k == at else ""))
                         for k in range(first, min(first + fits, count))]
    return [*lines, *([BLANK] if told else []), *((Span(f"   {part}", "dim"),) for part in told)]


def _form(pen: Pen, over: Overlay, room: int, rows: int) -> list[Line]:
    """Rows of a name, a text to type over and what it is; the last one does it."""
    names = max((cells(pen.text(choice.value)) for choice in over.choices[:-1]), default=0)
    lines: list[Line] = []
    last = len(over.choices) - 1
    for number, choice in enumerate(over.choices):
        chosen = number == over.row
        mark = Span(f" {pen.sign('▸') if chosen else ' '} ", "select")
        if number == last:
            lines += [BLANK, (mark, Span(pen.text(choice.about), "focus" if chosen else "head"))]
            continue
        cursor = over.cursor if over.typed else len(choice.label)
        shown = field_spans(pen, choice.label, cursor, LEAST_FIELD) if chosen else \
            [Span(left(pen.cut(pen.text(choice.label), LEAST_FIELD), LEAST_FIELD), "field")]
        about = pen.cut(pen.text(choice.about), max(room - names - LEAST_FIELD - 8, 1))
        lines.append((mark, Span(left(pen.text(choice.value), names)), Span("  "), *shown, Span(f"  {about}", "dim")))
    return lines[:rows]


def _text(pen: Pen, over: Overlay, room: int, rows: int) -> list[Line]:
    """The text from its first shown line on; lines that are too long go on under their own beginning."""
    lines: list[Line] = []
    starts: list[int] = []
    for raw in over.text:
        starts.append(len(lines))
        lines += [(Span(f" {part}"),) for part in _flowed(pen, raw, room - 2)]
    first = starts[min(max(over.row, 0), len(starts) - 1)]
    return lines[min(first, max(len(lines) - rows, 0)):][:rows]


def _flowed(pen: Pen, raw: str, room: int) -> list[str]:
    shown = pen.text(raw)
    if cells(shown) <= room:
        return [shown]
    column = _COLUMN.match(shown)
    hang = len(column[0]) if column else len(shown) - len(shown.lstrip())
    if hang > room // 2:
        hang = 0
    parts = pen.wrapped(shown[hang:], max(room - hang, 1))
    return [(shown[:hang] if number == 0 else " " * hang) + part for number, part in enumerate(parts)]


def _note(pen: Pen, over: Overlay, room: int, rows: int) -> list[Line]:
    """The text of a note as it is written, its cursor in sight."""
    size = max(room - 4, 1)
    cursor = min(max(over.cursor, 0), len(over.typed))
    lines: list[Line] = []
    seen = begin = 0
    for raw in over.typed.split("\n"):
        for part, last in _pieces(pen, raw, size):
            end = begin + len(part)
            here = begin <= cursor and (cursor < end or (last and cursor == end))
            if here:
                seen = len(lines)
            spans = field_spans(pen, part, cursor - begin, size) if here else \
                [Span(left("".join(pen.text(char) for char in part), size), "field")]
            lines.append((Span("  "), *spans))
            begin = end
        begin += 1
    lines += [(Span("  "), Span(" " * size, "field"))] * max(min(4, rows) - len(lines), 0)
    first = window(len(lines), rows, seen)
    return lines[first:first + rows]


def _pieces(pen: Pen, raw: str, size: int) -> list[tuple[str, bool]]:
    """A line of a note in pieces that fit, broken after blanks; with each whether it is the line's last."""
    pieces: list[str] = []
    piece, used, blank = "", 0, 0
    for char in raw:
        wide = max(cells(pen.text(char)), 0)
        if piece and used + wide > size - 1:
            cut = blank if blank > size // 3 else len(piece)
            pieces.append(piece[:cut])
            piece = piece[cut:]
            used = sum(cells(pen.text(one)) for one in piece)
            blank = 0
        piece += char
        used += wide
        if char == " ":
            blank = len(piece)
    pieces.append(piece)
    return [(one, number == len(pieces) - 1) for number, one in enumerate(pieces)]
