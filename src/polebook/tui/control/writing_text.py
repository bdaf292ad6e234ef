"""Keys on a text of many lines, as places in it: where a move leads, what a key takes out. No state.

A place is a character's number. Places between the two characters of a line end, and before a mark that stands over
the letter before it, are passed over.
"""

from __future__ import annotations

import re
import unicodedata
from collections.abc import Callable, Mapping

from polebook.tui.written import begin_of, end_of

PAGE_LINES = 10
_WORD_ON = re.compile(r"\W*\w*")
_WORD_BACK = re.compile(r"\w*\W*\Z")
_VALUE = re.compile(
    r"""^[ \t]*(?:[\w-]+|"[^"\n]*"|'[^'\n]*')(?:[ \t]*\.[ \t]*[\w-]+)*[ \t]*=[ \t]*"""
    r"""(?:"{3}|'{3}|["'])?""", re.MULTILINE)
_VERTICAL = {"up": -1, "down": 1, "pageup": -PAGE_LINES, "pagedown": PAGE_LINES}


def held(text: str, at: int) -> int:
    """The place `at`, moved to where a cursor may stand."""
    at = min(max(at, 0), len(text))
    return at - 1 if text[at - 1 : at + 1] == "\r\n" else at


def moved(text: str, at: int, column: int | None, key: str) -> tuple[int, int | None] | None:
    """The place that a key leads to, and the column that it keeps to; None for a key that moves nothing."""
    if (by := _VERTICAL.get(key)) is not None:
        column = at - begin_of(text, at) if column is None else column
        return _by_lines(text, at, by, column), column
    return (_MOVES[key](text, at), None) if key in _MOVES else None


def taken(text: str, at: int, key: str) -> tuple[int, int] | None:
    """The characters, from and up to, that a key takes out; None for a key that takes none."""
    return _TAKES[key](text, at) if key in _TAKES else None


def left(text: str, at: int) -> int:
    if text[max(at - 2, 0) : at] == "\r\n":
        return at - 2
    at = max(at - 1, 0)
    while at and _over(text[at]) and text[at - 1] != "\n":
        at -= 1
    return at


def right(text: str, at: int) -> int:
    if text[at : at + 2] == "\r\n":
        return at + 2
    at = min(at + 1, len(text))
    while at < len(text) and _over(text[at]):
        at += 1
    return at


def _over(char: str) -> bool:
    """Whether a character stands over the one before it."""
    return not char.isascii() and unicodedata.category(char) in ("Mn", "Me")


def _by_lines(text: str, at: int, by: int, column: int) -> int:
    """The place so many lines further, in that column as far as the line reaches; the text's ends beyond them."""
    begin = begin_of(text, at)
    for _ in range(abs(by)):
        if by < 0 and begin == 0:
            return 0 if by == -1 else min(column, end_of(text, 0))
        follows = text.find("\n", begin) + 1
        if by > 0 and not follows:
            return len(text) if by == 1 else min(begin + column, len(text))
        begin = begin_of(text, begin - 1) if by < 0 else follows
    return held(text, min(begin + column, end_of(text, begin)))


def _word_on(text: str, at: int) -> int:
    found = _WORD_ON.match(text, at)
    return found.end() if found else at


def _word_back(text: str, at: int) -> int:
    """The begin of the word before, within the line; from its begin the end of the line before."""
    begin = begin_of(text, at)
    if begin == at:
        return left(text, at)
    found = _WORD_BACK.search(text[begin:at])
    return begin + found.start() if found else begin


def _value_on(text: str, at: int) -> int:
    """The begin of the next value, behind its quote."""
    return next((found.end() for found in _VALUE.finditer(text, begin_of(text, at)) if found.end() > at), at)


def _value_back(text: str, at: int) -> int:
    ends = [found.end() for found in _VALUE.finditer(text, 0, at) if found.end() < at]
    return ends[-1] if ends else at


def _line(text: str, at: int) -> tuple[int, int]:
    """The cursor's line with its end; of the last one also that before it."""
    begin, follows = begin_of(text, at), text.find("\n", at) + 1
    return (begin, follows) if follows else (left(text, begin), len(text))


def _to_end(text: str, at: int) -> tuple[int, int]:
    """The rest of the line; at its end what ends it."""
    end = end_of(text, at)
    return (at, end) if end > at else (at, right(text, at))


_MOVES: Mapping[str, Callable[[str, int], int]] = {
    "left": left,
    "right": right,
    "home": begin_of,
    "ctrl+a": begin_of,
    "end": end_of,
    "ctrl+e": end_of,
    "ctrl+left": _word_back,
    "ctrl+right": _word_on,
    "ctrl+home": lambda text, at: 0,
    "ctrl+end": lambda text, at: len(text),
    "tab": _value_on,
    "shift+tab": _value_back,
}
_TAKES: Mapping[str, Callable[[str, int], tuple[int, int]]] = {
    "backspace": lambda text, at: (left(text, at), at),
    "delete": lambda text, at: (at, right(text, at)),
    "ctrl+d": lambda text, at: (at, right(text, at)),
    "ctrl+w": lambda text, at: (_word_back(text, at), at),
    "ctrl+k": _to_end,
    "ctrl+x": _line,
}
