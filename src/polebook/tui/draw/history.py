"""Page 0, history: posts and revisions of the file by date; of the chosen one the figures then against now."""

from __future__ import annotations

from polebook.problem import Problem
from polebook.report.look import cells
from polebook.session.state import stands
from polebook.tui.draw import against
from polebook.tui.draw.grid import Cell, Column, grid
from polebook.tui.draw.grid import Row as Cells
from polebook.tui.draw.history_told import LEAST, brief, told
from polebook.tui.draw.pen import BLANK, window
from polebook.tui.draw.scene import Scene
from polebook.tui.histories import SHOWN, Row, chosen, rows
from polebook.tui.keys import Hint
from polebook.tui.lines import Line, Span, width

FRAME_ROWS = 2  # what is known, the heading
LEAST_ROWS, MOST_ROWS = 3, 12
NAME, SAME, LEAST_TEXT = 8, 20, 18
MOST_WANT = 18


def figures(scene: Scene) -> tuple[str, ...]:
    """None: `=` accounts for figures of now, and they stand on the other pages."""
    return ()


def want(scene: Scene) -> int:
    """Rows for the list and what is told of the chosen one."""
    return min(FRAME_ROWS + len(rows(scene.state)) + 1 + LEAST + 3, MOST_WANT)


def page(scene: Scene, room: int, tall: int, focus: str = "") -> list[Line]:
    """At most `tall` lines of at most `room` cells."""
    found = rows(scene.state)
    row = chosen(scene.state, found)
    if tall < FRAME_ROWS + LEAST_ROWS + LEAST:
        return [*_list(scene, found, row, room, tall - 1)[1:], brief(scene, row, room)][:tall]
    faults = _faults(scene, room)
    size = tall - FRAME_ROWS - len(faults)
    listed = min(len(found), max(size - LEAST, LEAST_ROWS), max(MOST_ROWS, tall // 2), max(size, 0))
    lines = [_head(scene, room), *_list(scene, found, row, room, listed), *faults]
    below = told(scene, row, room, tall - len(lines))
    loose = tall - len(lines) > len(below)
    return [*lines, *[BLANK] * loose, *below][:tall]


def hints(scene: Scene) -> tuple[Hint, ...]:
    """What can be pressed, by what it would do."""
    row, here = chosen(scene.state, rows(scene.state)), scene.session.against
    mine = here is not None and here.row == row.key
    first: list[Hint] = [] if row.post is None and row.revision is None else [
        ("Enter", "no baseline" if mine else "baseline")]
    if row.revision is not None:
        first.append(("v V", "figures" if scene.view.past.spread else "changes"))
    return (("↑ ↓", "row"), *first, ("P", "post"), ("s", "look again"), ("1 … 0", "page"), ("Tab", "sheet"),
            ("?", "help"))


def _head(scene: Scene, room: int) -> Line:
    """How many there are, what is still being read, and which baseline stands."""
    pen, past = scene.pen, scene.view.past
    known = past.known
    pieces: list[Line] = []
    if known is None:
        pieces.append((Span(pen.text("looking for posts and revisions …"), "dim"),))
    else:
        if known.unposted is None:
            pieces.append((Span(_count(len(known.posts), "post"), "head"),))
        if known.ungit is None:
            pieces.append((Span(_count(len(known.revisions), "revision"), "head"),))
        texts, unread = len({one.blob for one in known.revisions}), len(known.unread)
        if unread:
            pieces.append((Span(f"read {texts - unread} of {texts}", "dim"),))
        elif known.of != (past.asked, scene.session.identity):
            pieces.append((Span("looking again", "dim"),))
    if past.post is not None:
        pieces.append((Span(pen.text("posting …"), "warn"),))
    if stands(scene.session):
        pieces.append((Span(pen.text(f"baseline: {_named(scene)}"), "moved"),))
    line: Line = (Span(" "),)
    for number, piece in enumerate(pieces):
        gap = "   " if number else ""
        if width(line) + len(gap) + width(piece) > room:
            break
        line = (*line, *([Span(gap)] if gap else []), *piece)
    return line


def _named(scene: Scene) -> str:
    return "pinned figures" if scene.session.against is None else against.name(scene.session)


def _count(number: int, noun: str) -> str:
    return f"{number} {noun}{'' if number == 1 else 's'}" if number else f"no {noun}"


def _faults(scene: Scene, room: int) -> list[Line]:
    """Why posts or revisions can't be told: a line each, two where it does not fit."""
    known = scene.view.past.known
    lines: list[Line] = []
    for word, problem in (("record", known.unposted), ("git", known.ungit)) if known is not None else ():
        if problem is not None:
            style = "bad" if word == "record" else "dim"
            text = scene.pen.wrapped(_words(word, problem), room - 2)[:2]
            lines += [(Span(f" {part}", style),) for part in text]
    return lines


def _words(word: str, problem: Problem) -> str:
    """A problem with the line that it stands on."""
    line = problem.place.line if problem.place is not None else 0
    where = f", line {line}" if line else ""
    return f"{word}{where}: {problem.what}; {problem.why}" if problem.why else f"{word}{where}: {problem.what}"


def _alike(row: Row) -> str:
    """What has the same chain: "= post 1, now"."""
    return f"= {', '.join(row.same)}" if row.same else ""


def _list(scene: Scene, found: list[Row], row: Row, room: int, size: int) -> list[Line]:
    """The rows around the chosen one."""
    pen, at = scene.pen, found.index(row)
    first = window(len(found), size, at)
    lit, here = scene.view.focus == "page", scene.session.against
    digests = room >= 2 + 2 + NAME + 12 + LEAST_TEXT + SAME + 2 + SHOWN
    alike = max((cells(_alike(one)) for one in found), default=0)
    same = min(alike, SAME) if room >= 2 + NAME + 12 + LEAST_TEXT + SAME else 0
    left = room - 4 - NAME - 12 - (SHOWN + 2) * digests - (same + 2 if same else 0) - 1
    body = []
    for number, one in enumerate(found[first:first + size], start=first):
        base = here is not None and here.row == one.key
        text = " ".join(one.text.split()) or ("without a message" if one.post else "without a subject")
        body.append(Cells([
            Cell(pen.sign("▸") if number == at and lit else ""),
            Cell(pen.sign("●") if base else "", "moved"),
            Cell(pen.text(one.name)), Cell(pen.text(one.day), "dim"),
            Cell(pen.cut(pen.text(text), max(left, 1)), "" if one.text else "dim"),
            Cell(pen.cut(pen.text(_alike(one)), same) if same else "", "dim"),
            Cell(one.digest[:SHOWN] if digests else "", "dim"),
        ], "select" if number == at else ""))
    columns = [Column(least=1, gap=0), Column(least=1, gap=0), Column("", NAME, right=False),
               Column("date", 10, right=False, gap=2), Column("message, subject", max(left, 1), right=False, gap=2),
               Column("same chain" if same else "", same, right=False, gap=2 if same else 0),
               Column("digest" if digests else "", SHOWN if digests else 0, right=False, gap=2 if digests else 0)]
    return grid(columns, body, room, pen)
