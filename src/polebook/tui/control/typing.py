"""A line of text under the keys: what every field and every list that narrows has in common."""

from __future__ import annotations

from collections.abc import Callable, Mapping

from polebook.tui import keys

LONGEST = 4000  # characters; the file itself sets closer limits


def typed(text: str, cursor: int, key: str, character: str | None) -> tuple[str, int] | None:
    """Text and cursor after a key; None for a key that does nothing here."""
    cursor = min(max(cursor, 0), len(text))
    if added := keys.printing(key, character):
        return insert(text, cursor, added)
    if key in _MOVES:
        return text, _MOVES[key](text, cursor)
    start, end = _taken(text, cursor, key)
    if start == end:
        return (text, cursor) if key in _TAKES else None
    return text[:start] + text[end:], start


def insert(text: str, cursor: int, added: str) -> tuple[str, int]:
    """Text and cursor with `added` put in, as far as there is room."""
    added = added[: max(LONGEST - len(text), 0)]
    return text[:cursor] + added + text[cursor:], cursor + len(added)


def one_line(text: str) -> str:
    """Pasted text as a field can have it: one line, nothing that does not print."""
    return "".join(char for char in " ".join(text.split()) if char.isprintable())


def _word_before(text: str, cursor: int) -> int:
    return len(text[:cursor].rstrip().rpartition(" ")[0]) + 1 if " " in text[:cursor].rstrip() else 0


def _word_after(text: str, cursor: int) -> int:
    rest = text[cursor:]
    skipped = len(rest) - len(rest.lstrip())
    word = rest.lstrip().partition(" ")[0]
    return cursor + skipped + len(word)


_MOVES: Mapping[str, Callable[[str, int], int]] = {
    "left": lambda text, cursor: max(cursor - 1, 0),
    "right": lambda text, cursor: min(cursor + 1, len(text)),
    "home": lambda text, cursor: 0,
    "ctrl+a": lambda text, cursor: 0,
    "end": lambda text, cursor: len(text),
    "ctrl+e": lambda text, cursor: len(text),
    "ctrl+left": _word_before,
    "ctrl+right": _word_after,
}
_TAKES: Mapping[str, Callable[[str, int], tuple[int, int]]] = {
    "backspace": lambda text, cursor: (max(cursor - 1, 0), cursor),
    "delete": lambda text, cursor: (cursor, min(cursor + 1, len(text))),
    "ctrl+d": lambda text, cursor: (cursor, min(cursor + 1, len(text))),
    "ctrl+u": lambda text, cursor: (0, cursor),
    "ctrl+k": lambda text, cursor: (cursor, len(text)),
    "ctrl+w": lambda text, cursor: (_word_before(text, cursor), cursor),
}


def _taken(text: str, cursor: int, key: str) -> tuple[int, int]:
    return _TAKES[key](text, cursor) if key in _TAKES else (0, 0)
