"""Lists over the page: narrowed by typing, a row chosen with the arrows, taken with Enter."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import replace

from polebook.chain.kinds import listings
from polebook.problem import printable
from polebook.session.state import KeyRow, Session, keys_of, sheets_of
from polebook.tui.control.base import Done, at, done
from polebook.tui.control.typing import insert, one_line, typed
from polebook.tui.view import Choice, Overlay, State

Making = Callable[[], Session]
MOST = 200  # rows of a list
PAGE = 10  # rows by which PgUp and PgDn move
_ROWS = {"up": -1, "down": 1, "pageup": -PAGE, "pagedown": PAGE}
ABOUT_SHEETS = {
    "target": "what the chain must reach",
    "supply": "rails and temperature", "tolerance": "how far parts and devices may be off",
    "preferred": "series that parts are stepped along", "file": "title and note of the file",
}


def kinds() -> list[Choice]:
    """Every kind of stage."""
    return [Choice(one.name, one.name, one.about) for one in listings() if one.group == "stage"]


def words(row: KeyRow) -> list[Choice]:
    """The words that a key may be, and none where it may be absent."""
    about = {one.name: one.about for one in listings()} if row.key == "kind" else {}
    found = [Choice(word, printable(word), about.get(word, "")) for word in row.choices]
    if not row.required and row.text:
        found.append(Choice("", "none", f"take it out: {row.default} counts" if row.default else "take it out"))
    return found


def choices(state: State, row: KeyRow, begin: str = "") -> Done:
    """The list of the words that a key may be."""
    found = words(row)
    here = next((at for at, one in enumerate(found) if one.value == (row.text or row.default)), 0)
    purpose = {"kind": "kind", "device": "card", "upper": "card"}.get(row.key, "choice")
    owner = printable(row.path.removesuffix(f".{row.key}"))
    return opened(state, Overlay(purpose, f"{row.key} of {owner}", about=row.path), found, here, begin)


def row_of(session: Session, path: str) -> KeyRow | None:
    """The key at a path."""
    return next((row for sheet in sheets_of(session) if path.startswith(f"{sheet}.") or sheet == "file"
                 for row in keys_of(session, sheet) if row.path == path), None)


def all_keys(session: Session) -> list[Choice]:
    """Every key of every sheet, with its value; those that stand in the file first."""
    found = [row for sheet in sheets_of(session) for row in keys_of(session, sheet)]
    found.sort(key=lambda row: not row.text)
    return [Choice(row.path, _with_value(row), row.about) for row in found]


def _with_value(row: KeyRow) -> str:
    first = row.text.strip().partition("\n")[0]
    return printable(f"{row.path} = {first}" if first else row.path)


def sheets(session: Session) -> list[Choice]:
    """The sheets that belong to no line, and a card from elsewhere."""
    names = sheets_of(session)
    shown = names[names.index("load") + 1 :]
    found = [Choice(name, printable(name.removeprefix("device.")), ABOUT_SHEETS.get(name, "device card"))
             for name in shown]
    return [*found, Choice("", "take a card", "from another chain file")]


def opened(state: State, overlay: Overlay, found: Sequence[Choice], row: int = 0, begin: str = "") -> Done:
    """The state with a list open, narrowed by what was typed already."""
    overlay = replace(overlay, choices=tuple(found[:MOST] if not begin else narrowed(found, begin)), row=row,
                      typed=begin, cursor=len(begin))
    return done(at(state, overlay=replace(overlay, row=row if not begin else 0), field=None))


def narrowed(found: Sequence[Choice], text: str) -> list[Choice]:
    """The rows that have every word of `text`: in their own name, its beginning first; else in what they are."""
    words = text.lower().split()
    if not words:
        return list(found[:MOST])
    ranked = []
    for order, choice in enumerate(found):
        name, about = choice.label.lower(), f"{choice.label} {choice.about}".lower()
        if all(word in name for word in words):
            key = name.rpartition(" =")[0] or name
            begins = key.startswith(words[0]) or key.rpartition(".")[2].startswith(words[0])
            ranked.append((0 if begins else 1, order, choice))
        elif all(word in about for word in words):
            ranked.append((2, order, choice))
    return [choice for _, _, choice in sorted(ranked, key=lambda one: one[:2])][:MOST]


def moved(overlay: Overlay, key: str) -> Overlay | None:
    """The list with another row chosen; None for a key that chooses none."""
    last = max(len(overlay.choices) - 1, 0)
    if key in ("home", "end") and not overlay.typed:
        return replace(overlay, row=0 if key == "home" else last)
    return replace(overlay, row=min(max(overlay.row + _ROWS[key], 0), last)) if key in _ROWS else None


def typing(overlay: Overlay, full: Callable[[], Sequence[Choice]], key: str, character: str | None) -> Overlay:
    """The list narrowed by a key that types; as it was for one that does not."""
    found = typed(overlay.typed, overlay.cursor, key, character)
    return overlay if found is None else _narrow(overlay, full, *found)


def pasting(overlay: Overlay, full: Callable[[], Sequence[Choice]], text: str) -> Overlay:
    return _narrow(overlay, full, *insert(overlay.typed, overlay.cursor, one_line(text)))


def _narrow(overlay: Overlay, full: Callable[[], Sequence[Choice]], text: str, cursor: int) -> Overlay:
    if text == overlay.typed:
        return replace(overlay, cursor=cursor)
    found = tuple(narrowed(full(), text))
    refusal = "" if found else f'nothing here is called "{printable(text)}": Backspace takes a letter back'
    return replace(overlay, typed=text, cursor=cursor, choices=found, row=0, refusal=refusal)
