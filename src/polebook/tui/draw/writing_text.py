"""The rows of a text that is being written: line numbers, marks of faults, the cursor.

One line of the file is one row. A line that goes on beyond the row ends in a sign; the cursor's line moves sideways
by itself, so that the cursor is in sight. The text is shown, never interpreted.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from itertools import pairwise

from polebook.report.look import cells
from polebook.text.tokens import ROUGH
from polebook.tui.draw.pen import Pen, window
from polebook.tui.lines import Line, Span
from polebook.tui.written import line_of

Mark = tuple[int, int, str]
"""Characters of a line, from and up to, and their style; a later mark lies over an earlier one."""

_WIDEST = 4  # of a line no more characters are looked at than so many times its room: some take no cell
LEAST_NUMBER = 3


def rows(pen: Pen, text: str, cursor: int, room: int, height: int, faults: Mapping[int, Sequence[Mark]],
         sought: int = 0) -> list[Line]:
    """At most `height` rows of `room` cells, the cursor's among them.

    faults  line -> the marks of its faults;  sought  characters from the cursor on that were looked for
    """
    lines = text.split("\n")
    here = line_of(text, cursor)
    first = window(len(lines), height, here - 1)
    seen = range(first + 1, min(first + height, len(lines)) + 1)
    number = max(len(str(len(lines))) + 1, LEAST_NUMBER)
    begin = sum(len(one) + 1 for one in lines[:first])
    looks = _looks(text, begin, begin + sum(len(one) + 1 for one in lines[first:first + height]))
    result: list[Line] = []
    for at in seen:
        source = lines[at - 1].removesuffix("\r") if at < len(lines) else lines[at - 1]
        marks = [*_within(looks, begin, len(source)), *faults.get(at, ())]
        lead = (Span("!" if at in faults else " ", "bad"), Span(f"{at:>{number}}", "select" if at == here else "dim"),
                Span(pen.sign("▸") if at == here else " ", "select"))
        column = cursor - begin if at == here else -1
        if column >= 0:
            marks += [(column, column + sought, "field"), (column, column + 1, "focus")]
            source += " " * (column >= len(source))
        result.append((*lead, *_shown(pen, source, marks, column, room - number - 2)))
        begin += len(lines[at - 1]) + 1
    return result


def _looks(text: str, begin: int, end: int) -> list[Mark]:
    """How headers and comments between two characters look, as marks of the whole text."""
    marks: list[Mark] = []
    depth = 0
    for match in ROUGH.finditer(text, 0, end):
        if match.lastgroup == "open":
            start = match.start()
            if not depth and match[0] == "[" and not text[text.rfind("\n", 0, start) + 1:start].strip():
                stop = text.find("\n", start)
                marks.append((start, stop if stop >= 0 else len(text), "head"))
            depth += 1
        elif match.lastgroup == "close":
            depth = max(depth - 1, 0)
        elif match[0][0] == "#" and match.lastgroup is None:
            marks.append((match.start(), match.end(), "dim"))
    return [mark for mark in marks if mark[1] > begin]


def _within(marks: list[Mark], begin: int, length: int) -> list[Mark]:
    return [(max(start - begin, 0), min(end - begin, length), style) for start, end, style in marks
            if start - begin < length and end > begin]


def _shown(pen: Pen, source: str, marks: Sequence[Mark], column: int, room: int) -> list[Span]:
    """A line from its beginning, or so that its character `column` is in sight, within `room` cells."""
    first = _first(pen, source, column, room)
    last = min(len(source), first + _WIDEST * room)
    spans = [Span(pen.sign("‹"), "key")] if first else []
    pieces = _pieces(source, marks, first, last)
    texts = [(pen.text(source[start:end]), style) for start, end, style in pieces]
    left = room - len(spans)
    if last == len(source) and sum(cells(shown) for shown, _ in texts) <= left:
        return [*spans, *(Span(shown, style) for shown, style in texts)]
    left -= 1
    for (start, end, style), (shown, _) in zip(pieces, texts, strict=True):
        if cells(shown) > left:
            shown = _begin(pen, source[start:end], left)
            spans.append(Span(shown, style))
            break
        spans.append(Span(shown, style))
        left -= cells(shown)
    return [*spans, Span(pen.sign("›"), "key")]


def _begin(pen: Pen, source: str, room: int) -> str:
    """As many characters as there is room for."""
    kept = ""
    for char in source:
        shown = pen.text(char)
        if cells(shown) > room:
            break
        kept += shown
        room -= cells(shown)
    return kept


def _first(pen: Pen, source: str, column: int, room: int) -> int:
    """The first character in sight: it moves by half the room, not with every step of the cursor."""
    half = max(room // 2, 1)
    first = max(column // half - 1, 0) * half if column >= 0 else 0
    wide = cells(pen.text(source[first:column + 1]))
    while wide > room - 2 and first < column and (first or wide >= room):
        wide -= cells(pen.text(source[first]))
        first += 1
    return first


def _pieces(source: str, marks: Sequence[Mark], first: int, last: int) -> list[Mark]:
    """The characters from first to last in pieces of one style."""
    ends = {first, last}
    for start, end, _ in marks:
        ends |= {min(max(start, first), last), min(max(end, first), last)}
    places = sorted(ends)
    pieces: list[Mark] = []
    for start, end in pairwise(places):
        style = next((one for begin, stop, one in reversed(marks) if begin <= start < stop), "")
        pieces.append((start, end, style))
    return pieces
