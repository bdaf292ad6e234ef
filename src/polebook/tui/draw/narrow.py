"""The screen of one column: strip, page, sheet and verdict over each other."""

from __future__ import annotations

from polebook.report.look import cells
from polebook.tui.draw.against import lacking
from polebook.tui.draw.focus import focused
from polebook.tui.draw.message import keys, message
from polebook.tui.draw.overlay import overlay
from polebook.tui.draw.pages import drawn
from polebook.tui.draw.pen import BLANK
from polebook.tui.draw.scene import Scene
from polebook.tui.draw.sheet import rows_for_all, sheet
from polebook.tui.draw.strip import HEIGHT, strip
from polebook.tui.draw.title import title
from polebook.tui.draw.verdict import faults, verdict
from polebook.tui.keys import hints
from polebook.tui.lines import Line, Span

LEAST_PAGE = 4
STALE = "figures of before the fault"


def screen(scene: Scene, columns: int, rows: int) -> list[Line]:
    """All lines of the screen, without the blanks at their ends."""
    last = [*message(scene, columns), key_line(scene, columns)]
    top = [title(scene, columns)]
    if scene.ledger is None:
        return [*top, *without_figures(scene, columns, rows - 2 - len(last)), scene.pen.rule(columns), *last]
    drawn = strip(scene, columns)
    body = rows - 1 - HEIGHT - 1 - 1 - len(last)  # beside title, strip, and the rules around the page
    share = _Shares(scene, columns, body, len(verdict(scene, columns)))
    below = [scene.pen.rule(columns), *sheet(scene, columns, share.sheet)]
    below += [BLANK] * (share.sheet + 1 - len(below) + share.blank) + verdict(scene, columns, share.verdict)
    below += [BLANK] * (share.sheet + share.blank + share.verdict + 1 - len(below))
    below += [scene.pen.rule(columns)] * share.rule
    room = share.page
    if scene.view.overlay is not None:  # it covers sheet and verdict whole, and of the page as much as it needs
        laid = overlay(scene, scene.view.overlay, columns, room + len(below) - 1)
        laid += [BLANK] * (len(below) - 1 - len(laid))
        room -= len(laid) + 1 - len(below)
        below = [*laid, scene.pen.rule(columns)]
    page = shown_page(scene, columns - 1, room) if room > 0 else []
    page += [BLANK] * (room - len(page))
    return [*top, *[BLANK] * share.top, *drawn, page_rule(scene, columns), *page, *below, *last]


class _Shares:
    """How many rows each part of the body has: what matters most is served first."""

    def __init__(self, scene: Scene, columns: int, rows: int, told: int) -> None:
        kind = drawn(scene)
        want = kind.want(scene)
        self.page, self.sheet, self.verdict = LEAST_PAGE, 1, min(told, 1)
        self.rule = self.blank = self.top = 0  # a rule above the message; blanks above verdict and strip
        self.left = rows - LEAST_PAGE - self.sheet - self.verdict
        if scene.stale:
            self._to("verdict", min(told, 6))
        self._to("sheet", 2)
        self._to("verdict", min(told, 2))
        self._to("sheet", kind.sheet)
        self._to("page", min(want, kind.decent))
        self._to("verdict", told)
        self._to("page", want)
        for part in ("rule", "blank"):
            self._to(part, 1)
        self._to("sheet", 4)
        self._to("top", 1)
        self._to("sheet", rows_for_all(scene, columns, self.sheet + self.left))
        self.page += max(self.left, 0)

    def _to(self, part: str, want: int) -> None:
        more = min(max(want - getattr(self, part), 0), max(self.left, 0))
        setattr(self, part, getattr(self, part) + more)
        self.left -= more


def shown_page(scene: Scene, room: int, rows: int) -> list[Line]:
    """The page that is chosen."""
    lines = drawn(scene).page(scene, room, rows, focused(scene))
    return [_faded(line) for line in lines] if scene.stale else lines


def _faded(line: Line) -> Line:
    """As old figures look."""
    return tuple(Span(span.text, span.style or "dim") for span in line)


def page_rule(scene: Scene, room: int) -> Line:
    """The rule above the page; it says so where the figures are old ones, or what the page lacks of the baseline."""
    told = STALE if scene.stale else scene.pen.cut(scene.pen.text(lacking(scene)), max(room - 6, 1))
    if not told:
        return scene.pen.rule(room)
    dash = scene.pen.sign("─")
    return (Span(f"{dash}{dash} ", "dim"), Span(told, "warn" if scene.stale else "moved"),
            Span(" " + dash * max(room - cells(told) - 4, 0), "dim"))


def without_figures(scene: Scene, room: int, rows: int) -> list[Line]:
    """What stands in the place of strip, page and sheet where the file never had a ledger."""
    over = scene.view.overlay
    if over is not None:
        laid = overlay(scene, over, room, rows)
        return laid + [BLANK] * (rows - len(laid))
    below = [BLANK, *sheet(scene, room, 4)] if scene.keys and rows > 12 and scene.session.history.text.strip() else []
    told = faults(scene, room)[:rows - 1 - len(below)]
    return [scene.pen.rule(room), *told, *[BLANK] * (rows - 1 - len(told) - len(below)), *below]


def key_line(scene: Scene, room: int) -> Line:
    """What can be pressed now."""
    view = scene.view
    purpose = view.overlay.purpose if view.overlay is not None else ""
    own = drawn(scene).hints(scene) if view.focus == "page" and not purpose and view.field is None else ()
    return keys(scene.pen, own or hints(view.focus, purpose, view.field is not None, view.page), room)
