"""A device card taken over from another chain file: its name typed, then a card chosen."""

from __future__ import annotations

from dataclasses import replace

from polebook.problem import ProblemsFound, printable
from polebook.session.sheets import content_of
from polebook.session.state import take_card
from polebook.text import files
from polebook.tui.control import lists
from polebook.tui.control.base import Done, at, attempt, done, reason
from polebook.tui.control.typing import insert, one_line, typed
from polebook.tui.view import Choice, Overlay, State


def ask(state: State) -> Done:
    """A line to type the other file's name in."""
    return done(at(state, overlay=Overlay("take", "take a card from which chain file?"), field=None))


def press(state: State, overlay: Overlay, key: str, character: str | None) -> Done:
    """A key in that line."""
    if key in ("enter", "tab"):
        return _look(state, overlay)
    found = typed(overlay.typed, overlay.cursor, key, character)
    return done(state if found is None else at(state, overlay=_with(overlay, *found)))


def paste(overlay: Overlay, text: str) -> Overlay:
    return _with(overlay, *insert(overlay.typed, overlay.cursor, one_line(text)))


def _with(overlay: Overlay, text: str, cursor: int) -> Overlay:
    return replace(overlay, typed=text, cursor=cursor, refusal="")


def _look(state: State, overlay: Overlay) -> Done:
    """The list of the other file's cards, or why there is none."""
    other = overlay.typed.strip()
    try:
        found = rows(other)
    except ProblemsFound as fault:
        return done(at(state, overlay=replace(overlay, refusal=reason(fault))))
    if not found:
        told = f"{printable(other)} has no device cards: name another file"
        return done(at(state, overlay=replace(overlay, refusal=told)))
    return lists.opened(state, Overlay("cards", f"cards of {printable(other)}", about=other), found)


def rows(other: str) -> list[Choice]:
    """The cards of a chain file. Raises ProblemsFound where it can't be read."""
    data, _ = content_of(files.read(other).text)
    cards = data.get("device")
    if not isinstance(cards, dict):
        return []
    return [Choice(name, printable(name), printable(f"{card.get('family', '')} {card.get('note', '')}".strip()))
            for name, card in cards.items() if isinstance(card, dict)]


def take(state: State, other: str, name: str, now: float) -> Done:
    """The card in this file, its sheet shown."""
    return attempt(state, lambda: take_card(state.session, name, other, now), go=f"device.{name}")
