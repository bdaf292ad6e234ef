"""The note of a line or sheet, edited over the page."""

from __future__ import annotations

from dataclasses import replace

from polebook.problem import ProblemsFound, printable
from polebook.session.state import keys_of, set_note
from polebook.tui.control.base import Done, at, changed, done, reason, sheet
from polebook.tui.control.typing import insert, one_line, typed
from polebook.tui.view import Overlay, State

NEW_LINE = ("ctrl+j", "shift+enter", "alt+enter")


def owner(state: State) -> str:
    """The sheet whose note is meant: that of the file where the sheet has none of its own."""
    name = sheet(state)
    return name if any(row.key == "note" for row in keys_of(state.session, name)) else "file"


def edit(state: State) -> Done:
    """The note, open to be edited."""
    name = owner(state)
    text = next((row.text for row in keys_of(state.session, name) if row.key == "note"), "").replace("\r\n", "\n")
    whose = "the file" if name == "file" else printable(name.removeprefix("device."))
    overlay = Overlay("note", f"note of {whose}", typed=text, cursor=len(text), about=name)
    return done(at(state, overlay=overlay, field=None))


def press(state: State, overlay: Overlay, key: str, character: str | None, now: float) -> Done:
    """A key in the note: text, until Enter or Esc; up and down go by lines."""
    if key in ("enter", "tab"):
        try:
            session = set_note(state.session, overlay.about, overlay.typed, now)
        except ProblemsFound as fault:
            return done(at(state, overlay=replace(overlay, refusal=reason(fault))))
        return done(changed(at(state, overlay=None), session))
    found: tuple[str, int] | None
    if key in NEW_LINE:
        found = insert(overlay.typed, overlay.cursor, "\n")
    elif key in ("home", "end"):
        found = overlay.typed, _ends(overlay.typed, overlay.cursor)[key == "end"]
    elif key in ("up", "down"):
        found = overlay.typed, _by_line(overlay.typed, overlay.cursor, -1 if key == "up" else 1)
    else:
        found = typed(overlay.typed, overlay.cursor, key, character)
    if found is None:
        return done(state)
    return done(at(state, overlay=replace(overlay, typed=found[0], cursor=found[1], refusal="")))


def paste(overlay: Overlay, text: str) -> Overlay:
    """The note with pasted text put in, its line breaks kept."""
    new, cursor = insert(overlay.typed, overlay.cursor, "\n".join(map(one_line, text.splitlines())))
    return replace(overlay, typed=new, cursor=cursor, refusal="")


def _ends(text: str, cursor: int) -> tuple[int, int]:
    """Beginning and end of the cursor's line."""
    end = text.find("\n", cursor)
    return text.rfind("\n", 0, cursor) + 1, len(text) if end < 0 else end


def _by_line(text: str, cursor: int, by: int) -> int:
    """The cursor a line up or down, in the same column as far as the line reaches."""
    rows = text.split("\n")
    row = text.count("\n", 0, cursor)
    column = cursor - (text.rfind("\n", 0, cursor) + 1)
    to = row + by
    if not 0 <= to < len(rows):
        return 0 if to < 0 else len(text)
    return sum(len(one) + 1 for one in rows[:to]) + min(column, len(rows[to]))
