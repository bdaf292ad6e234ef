"""The sheet as a panel beside the page: a line a key with what it does; the focused one explained below."""

from __future__ import annotations

from polebook.report.look import cells
from polebook.session.state import KeyRow
from polebook.tui.draw.head import pieces
from polebook.tui.draw.message import neighbours
from polebook.tui.draw.pen import BLANK, window
from polebook.tui.draw.scene import Scene
from polebook.tui.draw.sheet import key_spans, value_cells
from polebook.tui.lines import Line, Span

USUAL_NAME, MOST_NAME = 14, 24  # what is longer moves what stands behind it
LEAST_VALUE = 6
_WORDS = {"low": "acts at the low end", "high": "acts at the high end"}


def panel(scene: Scene, room: int, rows: int) -> list[Line]:
    """At most `rows` lines of at most `room` cells."""
    head = _head(scene, room)
    foot = _foot(scene, room, max(rows // 3, 1))
    size = rows - len(head) - 1 - len(foot) - 1
    if size < 3:
        foot, size = [], rows - len(head) - 1
    keys = _keys(scene, room, max(size, 0))
    gap = [BLANK] * max(size - len(keys), 0) if foot else []
    return [*head, BLANK, *keys, *gap, BLANK, *foot][:rows] if foot else [*head, BLANK, *keys][:rows]


def _head(scene: Scene, room: int) -> list[Line]:
    """All pieces of the head, in as many lines as they take."""
    lines: list[list[Span]] = [[Span(" ")]]
    used = 1
    for number, (raw, style) in enumerate(pieces(scene)):
        text = scene.pen.cut(scene.pen.text(raw), max(room - 2, 1))
        gap = 2 if number and used > 1 else 0
        if used > 1 and used + gap + cells(text) > room - 1:
            lines.append([Span(" ")])
            used, gap = 1, 0
        lines[-1] += [Span(" " * gap), Span(text, style)]
        used += gap + cells(text)
    return [tuple(line) for line in lines]


def _keys(scene: Scene, room: int, rows: int) -> list[Line]:
    count = len(scene.keys)
    if rows < 1 or not count:
        return []
    first = window(count, rows, scene.key)
    seen = range(first, min(first + rows, count))
    names = [cells(scene.pen.text(row.key)) for row in scene.keys]
    usual = max((size for size, row in zip(names, scene.keys, strict=True)
                 if size <= USUAL_NAME and "." not in row.key), default=USUAL_NAME)
    lines = []
    for at in seen:
        name = min(max(names[at], usual), MOST_NAME, max(room - 8, 1))
        least = max(LEAST_VALUE + usual - name, 1)
        size = min(max(value_cells(scene, scene.keys[at]), least), max(room - name - 5, 1))
        spans = [Span(" "), *key_spans(scene, at, name, size)]
        left = room - (1 + name + size + 3) - 1
        if left > 8:
            about = scene.pen.clause(scene.pen.text(scene.keys[at].about), left - 1)
            spans.append(Span(f" {about}", "" if at == scene.key else "dim"))
        lines.append(tuple(spans))
    return lines


def _foot(scene: Scene, room: int, rows: int) -> list[Line]:
    """The focused key whole: what it does, its unit, its default, whether figures lean on it, its next values."""
    if not scene.keys:
        return []
    row, pen = scene.keys[scene.key], scene.pen
    lines: list[Line] = [pen.rule(room), (Span(f" {pen.cut(pen.text(row.key), room - 2)}", "head"),)]
    for text in _facts(scene, row):
        lines += [(Span(f" {part}"),) for part in pen.wrapped(text, room - 2)]
    note = next((one.text for one in scene.keys if one.key == "note" and one.text), "")
    if note and row.key != "note":
        lines += [BLANK, *((Span(f" {part}", "dim"),) for part in pen.wrapped(" ".join(note.split()), room - 2))]
    return lines[:rows] if len(lines) > rows else lines


def _facts(scene: Scene, row: KeyRow) -> list[str]:
    facts = [row.about]
    if row.key == "note" and row.text:
        return [" ".join(row.text.split())]
    if row.choices:
        facts.append(f"one of {', '.join(row.choices)}")
    elif row.unit:
        facts.append(f"in {row.unit}" + (f", {_WORDS[row.role]} of the band".replace(" end of the band", " end")
                                         if row.role in _WORDS else ""))
    if row.default:
        facts.append(f"without it: {row.default}")
    if row.leans is not None:
        facts.append("the figures lean on it" if row.leans else "no figure leans on it")
    near = neighbours(scene, row)
    if near:
        facts.append(f"+ {near[1]}   - {near[0]}")
    return facts
