"""Looking for a text on the text page: typed letter by letter, the next and the one before."""

from __future__ import annotations

from dataclasses import replace

from polebook.tui import keys
from polebook.tui.control.typing import one_line
from polebook.tui.view import Writing
from polebook.tui.written import found

_NEXT, _BEFORE = ("enter", "down", "ctrl+f"), ("up",)


def press(writing: Writing, key: str, character: str | None) -> tuple[Writing, bool]:
    """The page after a key while a text is looked for; False where the key is not one of looking."""
    sought = writing.find or ""
    if key in ("escape", "ctrl+c"):
        return replace(writing, find=None), True
    if text := keys.printing(key, character):
        return _sought(writing, sought + text), True
    if key == "backspace":
        return _sought(writing, sought[:-1]), True
    if key in _NEXT:
        return _at(writing, _next(writing, sought, writing.cursor + 1)), True
    if key in _BEFORE:
        return _at(writing, _before(writing, sought)), True
    return replace(writing, find=None), False


def paste(writing: Writing, text: str) -> Writing:
    return _sought(writing, (writing.find or "") + one_line(text))


def _sought(writing: Writing, sought: str) -> Writing:
    return _at(replace(writing, find=sought), _next(writing, sought, writing.cursor))


def _next(writing: Writing, sought: str, begin: int) -> int:
    places = found(writing.history.text, sought)
    return next((at for at in places if at >= begin), places[0] if places else writing.cursor)


def _before(writing: Writing, sought: str) -> int:
    places = found(writing.history.text, sought)
    return next((at for at in reversed(places) if at < writing.cursor), places[-1] if places else writing.cursor)


def _at(writing: Writing, cursor: int) -> Writing:
    return replace(writing, cursor=cursor, column=None, run=writing.run + 1)
