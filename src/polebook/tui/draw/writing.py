"""The text page: the file as text, its faults by line, and what it comes to as it stands."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace

from polebook.book.reach import within_reach
from polebook.problem import ProblemsFound
from polebook.session.opened import as_on_disk
from polebook.session.state import KeyRow, keys_of, sheets_of
from polebook.tui.draw import writing_told as told
from polebook.tui.draw.message import against, keys, message
from polebook.tui.draw.narrow import STALE
from polebook.tui.draw.pen import BLANK, ends
from polebook.tui.draw.scene import Scene
from polebook.tui.draw.sheet import field_spans
from polebook.tui.draw.strip import HEIGHT, strip
from polebook.tui.draw.title import title
from polebook.tui.draw.verdict import verdict
from polebook.tui.draw.wide import LEAST_LEFT, MOST_LEFT, PANEL, beside, crossed
from polebook.tui.draw.writing_text import Mark
from polebook.tui.draw.writing_text import rows as text_rows
from polebook.tui.keys import writing_hints
from polebook.tui.lines import Line, Span, width
from polebook.tui.view import View, Writing
from polebook.tui.written import alike, found, line_of, path_at

LEAST_TEXT = 8  # rows of the text before a fault is told whole
STRIP_ROWS = 30  # from here on the strip is in sight
LATE = "figures of a moment ago"
SINCE = "what has moved since e was pressed"
SOUGHT_CELLS = 40


def screen(scene: Scene, writing: Writing, columns: int, rows: int) -> list[Line]:
    """All lines of the screen, without the blanks at their ends."""
    text, session = writing.history.text, as_on_disk(writing.after, scene.session)
    writing = replace(writing, cursor=min(max(writing.cursor, 0), len(text)))
    here = session.history.text  # of a moment ago where the text is yet to be judged: it is not read twice for that
    if not writing.judged:
        saved = text == session.history.disk
        session = replace(session, history=replace(session.history, disk=here if saved else None))
    path = path_at(here, min(max(writing.cursor - len(text) + len(here), 0), len(here)))
    state = replace(scene.state, session=session, view=_placed(scene.view, sheets_of(session), path))
    page = _Page(Scene(state), writing, path, columns, rows)
    if page.scene.ledger is None:
        return page.lines()
    try:
        with within_reach(page.scene.chain):
            return page.lines()
    except ProblemsFound as fault:
        return _Page(Scene(state, fault.problems), writing, path, columns, rows).lines()


def _placed(view: View, sheets: list[str], path: str) -> View:
    """The view with the line of the key under the cursor selected."""
    lines = sheets[:sheets.index("load") + 1]
    here = (number for number, name in enumerate(lines) if path == name or path.startswith(f"{name}."))
    return replace(view, line=next(here, view.line), sheet="", field=None, writing=None)


class _Page:
    """One drawing of the page: what is told of the text, then the rows that are left for it."""

    def __init__(self, scene: Scene, writing: Writing, path: str, columns: int, rows: int) -> None:
        self.scene, self.pen, self.writing, self.path = scene, scene.pen, writing, path
        self.columns, self.rows = columns, rows
        self.line = line_of(writing.history.text, writing.cursor)
        self.figures = told.figures(scene.ledger, writing.begun) if scene.ledger is not None else []
        self.fault = told.nearest(scene.problems, self.line)
        self.top = [title(scene, columns)]
        if rows >= STRIP_ROWS and scene.ledger is not None:
            self.top += [BLANK, *strip(scene, columns)]
        said = message(scene, columns) if scene.view.message and writing.find is None else [self._here()]
        hints = writing_hints(bool(scene.problems), writing.find is not None)
        self.last = [*said, keys(self.pen, hints, columns)]

    def lines(self) -> list[Line]:
        wide = self.columns >= LEAST_LEFT + 40 and self.rows >= HEIGHT * 8
        return self._wide() if wide else self._narrow()

    def _narrow(self) -> list[Line]:
        """The text over its figures, and below them the verdict or the fault that is next."""
        room = self.rows - len(self.top) - len(self.last) - 2 - bool(self.figures)
        usual = max(min(room - LEAST_TEXT, 4 if self.rows >= 24 else 3), 2)
        most = max(room - LEAST_TEXT, usual)
        below = told.told(self.scene, self.fault, self.columns, most) if self.fault is not None else \
            verdict(self.scene, self.columns, usual)
        size = max(len(below), usual)
        below += [BLANK] * (size - len(below))
        text = self._text(self.columns, room - size)
        line = [told.figure_line(self.scene, self.figures, self.columns)] if self.figures else []
        return [*self.top, self.pen.rule(self.columns), *text, self._rule(self.columns), *line, *below, *self.last]

    def _wide(self) -> list[Line]:
        """The text, and beside it what it comes to."""
        size = self.rows - len(self.top) - len(self.last) - 2
        side = min(max(self.columns - PANEL, LEAST_LEFT), MOST_LEFT)
        right = self._panel(self.columns - side - 1, size)
        right += [BLANK] * (size - len(right))
        left = self._text(side, size)
        rule = self.pen.rule(self.columns)
        body = [beside(self.pen, *sides, side) for sides in zip(left, right, strict=True)]
        return [*self.top, crossed(rule, side, self.pen.sign("┬")), *body, crossed(rule, side, self.pen.sign("┴")),
                *self.last]

    def _panel(self, room: int, rows: int) -> list[Line]:
        scene = self.scene
        lines: list[Line] = []
        if self.figures:
            label, style = self._label()
            lines += [(Span(f" {self.pen.cut(label or 'figures', room - 2)}", style or "head"),), BLANK,
                      *told.table(scene, self.figures, room), BLANK, self.pen.rule(room)]
        if scene.problems:
            return [*lines, *told.listed(scene, scene.problems, self.fault, room, rows - len(lines))]
        if not scene.stale:
            lines += verdict(scene, room)
            if cautions := scene.figures.cautions:
                near = told.nearest((one for one in cautions if one.place and one.place.line == self.line), self.line)
                lines += [BLANK, self.pen.rule(room),
                          *told.listed(scene, cautions, near, room, rows - len(lines) - 2)]
        return lines[:rows]

    def _text(self, room: int, height: int) -> list[Line]:
        """The text, filled up with blank rows."""
        writing = self.writing
        lines = text_rows(self.pen, writing.history.text, writing.cursor, room, height, self._marks(),
                          len(writing.find) if writing.find and self._sought() else 0)
        return lines + [BLANK] * (height - len(lines))

    def _sought(self) -> list[int]:
        places = found(self.writing.history.text, self.writing.find or "")
        return places if self.writing.cursor in places else []

    def _marks(self) -> Mapping[int, list[Mark]]:
        """Line -> the marks of its faults; those of a moment ago move with the lines above them."""
        text, judged = self.writing.history.text, self.writing.after
        more, first = 0, 0
        if not self.writing.judged:
            here = judged.history.text
            more, first = text.count("\n") - here.count("\n"), line_of(text, alike(text, here))
        marks: dict[int, list[Mark]] = {}
        for problem in judged.problems:
            place = problem.place
            if place is not None and place.line:
                line = max(place.line + more, first) if place.line > first else place.line
                begin = max(place.column - 1, 0)
                marks.setdefault(line, []).append((begin, begin + place.width, "bad"))
        return marks

    def _label(self) -> tuple[str, str]:
        """What is said of the figures, and its style."""
        if not self.writing.judged:
            return LATE, "dim"
        if self.scene.stale:
            return STALE, "warn"
        return (SINCE, "dim") if any(change for _, _, change in self.figures) else ("", "")

    def _rule(self, room: int) -> Line:
        """The rule above the figures; it says so where they are not plainly those of the text."""
        (label, style), dash = self._label(), self.pen.sign("─")
        count = len(self.scene.problems)
        tail = f" {self._number()} of {count} {dash}{dash}" if count > 1 else ""
        lead = (Span(f"{dash}{dash} ", "dim"), Span(label, style), Span(" ")) if label and self.figures else ()
        return (*lead, Span(dash * max(room - width(lead) - len(tail), 0) + tail, "dim"))

    def _number(self) -> int:
        """Which fault of how many is told."""
        return 1 + told.ordered(self.scene.problems).index(self.fault) if self.fault is not None else 0

    def _here(self) -> Line:
        """What is looked for, else what the key under the cursor is; at the end what moved against the pin."""
        writing, pen, pinned = self.writing, self.pen, against(self.scene)
        if writing.find is not None:
            places = found(writing.history.text, writing.find)
            count = f"{places.index(writing.cursor) + 1} of {len(places)}" if writing.cursor in places else \
                f"{len(places)} found" if places else "nothing like it" if writing.find else ""
            return (Span(" find ", "head"), *field_spans(pen, writing.find, len(writing.find), SOUGHT_CELLS),
                    Span(f"  {count}", "bad" if writing.find and not places else "dim"))
        row = self._key()
        told_of = "" if row is None else f"{row.key}: {row.about}" + (f"; without it {row.default}" * bool(row.default))
        space = self.columns - width(pinned) - 3 * bool(pinned) - 2
        begin = (Span(f" {pen.cut(pen.text(told_of), max(space, 1))}", "dim"),)
        return ends(begin, (*pinned, Span(" ")), self.columns) if pinned else begin

    def _key(self) -> KeyRow | None:
        """The key under the cursor."""
        first, *rest = self.path.split(".")
        sheet = f"{first}.{rest[0]}" if first in ("device", "bench") and rest else first if rest else "file"
        return next((row for row in keys_of(self.scene.session, sheet) if row.path == self.path), None)
