"""What differs between two texts: its rows, of which those in sight are drawn."""

from __future__ import annotations

import re

from polebook.report.look import cells
from polebook.tui.draw.pen import Pen
from polebook.tui.lines import Line, Span, line
from polebook.tui.view import Overlay

_BEGIN = re.compile(r"[-+ ] *[0-9]*  ")  # mark and number, under which a long line goes on
_STYLES = {"-": "bad", "+": "good"}
NONE = "nothing differs"


def difference(pen: Pen, over: Overlay, room: int, rows: int) -> list[Line]:
    """At most `rows` lines from the first row in sight on; earlier ones too where there are no more."""
    if not over.text:
        return [line(Span(f" {NONE}", "dim"))][:rows]
    at = min(max(over.row, 0), len(over.text) - 1)
    lines: list[Line] = []
    for raw in over.text[at:]:
        if len(lines) >= rows:
            break
        lines += _row(pen, raw, room)
    while len(lines) < rows and at > 0:
        at -= 1
        lines = [*_row(pen, over.text[at], room), *lines][-rows:]
    return lines[:rows]


def _row(pen: Pen, raw: str, room: int) -> list[Line]:
    style = _STYLES.get(raw[:1], "")
    shown = pen.text(raw)
    begin = _BEGIN.match(shown)
    hang = len(begin[0]) if begin is not None and len(begin[0]) < room // 2 else 0
    fits = cells(shown) <= room - 2
    parts = [shown[hang:]] if fits else pen.wrapped(shown[hang:], max(room - 2 - hang, 1))
    begins = [shown[:hang], *[" " * hang] * len(parts)]
    return [line(Span(f" {begin}{part}", style)) for begin, part in zip(begins, parts, strict=False)]
