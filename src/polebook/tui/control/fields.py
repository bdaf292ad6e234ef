"""The focused key: its field opened, typed in, accepted or refused; stepped; taken out."""

from __future__ import annotations

from dataclasses import replace

from polebook.chain.said import change
from polebook.problem import ProblemsFound
from polebook.session.state import KeyRow, keys_of, set_value, step
from polebook.tui.control import lists, notes
from polebook.tui.control.base import Done, at, changed, done, focused, reason, refuse, rows, say, sheet
from polebook.tui.control.typing import insert, one_line, typed
from polebook.tui.view import Field, State


def opens(state: State, character: str) -> bool:
    """Whether a character, typed on the sheet, begins a value: a digit, a point, and R of a resistance as in R47."""
    if character == "R":
        row = focused(state)
        return row is not None and row.dimension == "resistance"
    return character.isdecimal() or character == "."


def start(state: State, begin: str | None = None) -> Done:
    """The focused key's field, with its text or with what was typed; a list where it is one of several words."""
    row = focused(state)
    if row is None:
        return refuse(state, f"{sheet(state)} has no keys here", "! tells what is wrong with the file")
    if row.choices:
        return lists.choices(state, row, begin or "")
    if row.key == "note" and begin is None:
        return notes.edit(state)
    text = row.text if begin is None else begin
    return done(at(state, field=Field(row.path, text, len(text)), focus="sheet"))


def press(state: State, key: str, character: str | None, now: float) -> Done:
    """A key while a field is open: text, until Enter, Tab or Esc."""
    field = state.view.field
    if field is None or key in ("escape", "ctrl+c"):
        return done(at(state, field=None))
    if key in ("enter", "tab", "shift+tab"):
        by = {"enter": 0, "tab": 1, "shift+tab": -1}[key]
        return accept(state, field, by, now)
    found = typed(field.typed, field.cursor, key, character)
    if found is None:
        return done(state)
    text, cursor = found
    return done(at(state, field=replace(field, typed=text, cursor=cursor,
                                        refusal=field.refusal if text == field.typed else "")))


def paste(state: State, field: Field, text: str) -> Done:
    """Pasted text in the open field."""
    new, cursor = insert(field.typed, field.cursor, one_line(text))
    return done(at(state, field=replace(field, typed=new, cursor=cursor, refusal="")))


def accept(state: State, field: Field, by: int, now: float) -> Done:
    """The field's text as the key's value, then the key `by` further on; open still, with the reason, if refused."""
    try:
        session = set_value(state.session, field.path, field.typed, now)
    except ProblemsFound as found:
        return done(at(state, field=replace(field, refusal=reason(found))))
    closed = at(state, field=None)
    after = changed(closed, session, go=_renamed(state, field)) if session is not state.session else closed
    last = max(len(rows(after)) - 1, 0)
    return done(at(after, key=min(max(after.view.key + by, 0), last)))


def _renamed(state: State, field: Field) -> str:
    """Where to go after a stage got another name in its own sheet; "" where the line stays what it is."""
    row = focused(state)
    return f"{field.typed.strip()}.name" if row is not None and row.key == "name" and row.path == field.path else ""


def stepped(state: State, by: int, now: float) -> Done:
    """The focused value stepped: 1 along its series, 10 by a decade."""
    row = focused(state)
    if row is None:
        return refuse(state, "there is no value to step", "choose a key with the arrows")
    return _done(state, row, lambda: step(state.session, row.path, by, now))


def take_out(state: State, now: float) -> Done:
    """The focused key out of the file."""
    row = focused(state)
    if row is None:
        return refuse(state, "there is no key to take out", "choose one with the arrows")
    if not row.text:
        return refuse(state, f"the file has no {row.key}", f"its default {row.default} counts" if row.default else "")
    return _done(state, row, lambda: set_value(state.session, row.path, "", now))


def _done(state: State, row: KeyRow, work: lists.Making) -> Done:
    """An edit of one key, with what this press of a key did to it in the message."""
    try:
        session = work()
    except ProblemsFound as found:
        return say(state, reason(found), bad=True)
    now_row = next((one for one in keys_of(session, sheet(state)) if one.path == row.path), None)
    return done(changed(state, session, change(row.path, row.text, now_row.text) if now_row else ""))
