"""What lies over the page: which keys it takes, and what becomes of a chosen row."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import replace

from polebook.problem import ProblemsFound
from polebook.session.state import add_stage, rename_stage, set_value
from polebook.tui import keys
from polebook.tui.control import cards, cautions, history, leaving, lists, new, notes, recovered, stages, watching
from polebook.tui.control.base import Done, at, attempt, done, reason, to_path
from polebook.tui.control.typing import insert, one_line, typed
from polebook.tui.view import Choice, Overlay, State

READING = {"help": "?", "working": "=", "difference": "q"}  # texts, and the key that opened each closes it too
ASKING = frozenset({"leave", "changed", "cautions", "recovered"})  # rows that no typing narrows
_SCROLL = {"up": -1, "down": 1, "pageup": -10, "pagedown": 10, "space": 10}
_LEFT = 8  # lines of a text that stay in sight at its end


def press(state: State, overlay: Overlay, key: str, character: str | None, now: float) -> Done:
    """A key while something lies over the page."""
    purpose = overlay.purpose
    if purpose == "start":
        return new.press(state, overlay, key, character)
    if key in ("escape", "ctrl+c"):
        return new.given_up(state) if purpose == "new" and not new.picked(overlay) else _closed(state, overlay, now)
    if purpose in READING:
        return _read(state, overlay, key, character, now)
    if purpose == "note":
        return notes.press(state, overlay, key, character, now)
    if purpose == "take":
        return cards.press(state, overlay, key, character)
    if purpose == "post":
        return history.typing(state, overlay, key, character)
    if purpose == "rename":
        return _rename(state, overlay, key, character, now)
    moved = lists.moved(overlay, key)
    if moved is not None:
        return done(at(state, overlay=moved))
    if key in ("enter", "tab"):
        return _take(state, overlay, now)
    if purpose in ASKING:
        closes = purpose == "cautions" and keys.printing(key, character) in ("!", "q")
        return _closed(state, overlay, now) if closes else done(state)
    return done(at(state, overlay=lists.typing(overlay, lambda: full(state, overlay), key, character)))


def paste(state: State, overlay: Overlay, text: str) -> Done:
    """Pasted text, where text can be typed."""
    purpose = overlay.purpose
    if purpose in READING or purpose in ASKING:
        return done(state)
    if purpose == "note":
        return done(at(state, overlay=notes.paste(overlay, text)))
    if purpose == "start":
        return done(at(state, overlay=new.paste(overlay, text)))
    if purpose == "take":
        return done(at(state, overlay=cards.paste(overlay, text)))
    if purpose == "post":
        return done(at(state, overlay=history.paste(overlay, text)))
    if purpose == "rename":
        name, cursor = insert(overlay.typed, overlay.cursor, one_line(text))
        return done(at(state, overlay=replace(overlay, typed=name, cursor=cursor, refusal="")))
    return done(at(state, overlay=lists.pasting(overlay, lambda: full(state, overlay), text)))


def full(state: State, overlay: Overlay) -> Sequence[Choice]:
    """All rows of a list, before it was narrowed."""
    if overlay.purpose == "find":
        return lists.all_keys(state.session)
    if overlay.purpose == "add":
        return lists.kinds()
    if overlay.purpose == "sheets":
        return lists.sheets(state.session)
    if overlay.purpose == "new":
        return new.rows(new.picked(overlay))
    if overlay.purpose == "cards":
        try:
            return cards.rows(overlay.about)
        except ProblemsFound:  # it has gone from the disk meanwhile: what is in sight is all there is
            return overlay.choices
    row = lists.row_of(state.session, overlay.about)
    return lists.words(row) if row is not None else overlay.choices


def _closed(state: State, overlay: Overlay, now: float) -> Done:
    if overlay.purpose == "new":
        return done(new.kinds(state, new.picked(overlay)[:-1]))
    if overlay.purpose == "difference":
        return done(watching.back(state, overlay))
    state = at(state, overlay=None)
    return recovered.chosen(state, "later", now) if overlay.purpose == "recovered" else done(state)


def _read(state: State, overlay: Overlay, key: str, character: str | None, now: float) -> Done:
    """A text: scrolled, or closed."""
    if keys.printing(key, character) in ("q", READING[overlay.purpose]) or key in ("enter", "tab"):
        return _closed(state, overlay, now)
    last = max(len(overlay.text) - _LEFT, 0)
    rows = {"home": 0, "end": last}
    row = rows.get(key, overlay.row + _SCROLL.get(key, 0))
    return done(at(state, overlay=replace(overlay, row=min(max(row, 0), last))))


def _rename(state: State, overlay: Overlay, key: str, character: str | None, now: float) -> Done:
    if key in ("enter", "tab"):
        name = overlay.typed.strip()
        try:
            session = rename_stage(state.session, overlay.about, name, now)
        except ProblemsFound as fault:
            return done(at(state, overlay=replace(overlay, refusal=reason(fault))))
        return attempt(at(state, overlay=None), lambda: session, go=name)
    found = typed(overlay.typed, overlay.cursor, key, character)
    if found is None:
        return done(state)
    return done(at(state, overlay=replace(overlay, typed=found[0], cursor=found[1], refusal="")))


def _take(state: State, overlay: Overlay, now: float) -> Done:
    """The chosen row taken."""
    if not overlay.choices:
        return done(state)
    value = overlay.choices[min(max(overlay.row, 0), len(overlay.choices) - 1)].value
    return _TAKEN[overlay.purpose](at(state, overlay=None), overlay, value, now)


def _value(state: State, overlay: Overlay, value: str, now: float) -> Done:
    return attempt(state, lambda: set_value(state.session, overlay.about, value, now))


def _add(state: State, overlay: Overlay, value: str, now: float) -> Done:
    return stages.added(state, overlay.about, lambda: add_stage(state.session, overlay.about, value, now))


def _sheet(state: State, overlay: Overlay, value: str, now: float) -> Done:
    return done(to_path(state, value)) if value else cards.ask(state)


_TAKEN: Mapping[str, Callable[[State, Overlay, str, float], Done]] = {
    "find": lambda state, overlay, value, now: done(to_path(state, value)),
    "add": _add,
    "kind": _value,
    "card": _value,
    "choice": _value,
    "sheets": _sheet,
    "cards": lambda state, overlay, value, now: cards.take(state, overlay.about, value, now),
    "new": lambda state, overlay, value, now: new.chosen(state, overlay, value),
    "cautions": lambda state, overlay, value, now: cautions.go(state, value),
    "leave": lambda state, overlay, value, now: leaving.leaving(state, value),
    "changed": leaving.settle,
    "recovered": lambda state, overlay, value, now: recovered.chosen(state, value, now),
}
