"""What a terminal sends, cut into keys: Esc and what was typed at once after it are two keys, not one.

A terminal sends Esc as the byte that also begins every function key. Read by itself, "Esc, then u" at typing speed
and Alt+u are the same two bytes; this cut takes them for Esc, then u, and keeps whole what can only be a function key.
"""

from __future__ import annotations

import re

ESC = "\x1b"
_PASTE, _PASTED, _INTERRUPT = "\x1b[200~", "\x1b[201~", "\x03"
_KEY = re.compile(r"\x1b(?:\[\[[A-E]|\[[0-?]*[ -/]*[@-~]|O[A-DFHP-S])")  # function keys, and answers of the terminal
_BEGUN = re.compile(r"\x1b(?:\[\[?|\[[0-?]*[ -/]*|O)?\Z")  # what may still become one of them
_CLICK = re.compile(r"\x1b\[M[^\x00-\x1f]{3}")  # the mouse, as old terminals tell of it: three characters of any kind
_ANSWER = re.compile(r"\x1b[\]P_^X][^\x07\x1b]*(?:\x07|\x1b\\)")  # an answer to what another program asked
_UNASKED = re.compile(f"{_CLICK.pattern}|{_ANSWER.pattern}")
_COMING = re.compile(r"\x1b(?:\[M[^\x00-\x1f]{0,2}|(?:\]\d+;|P[\d$>+!]|_G)[^\x07\x1b]*\x1b?)\Z")  # one's first part


class TypeAhead:
    """Cuts text into pieces: `ESC` alone for the Esc key, one whole sequence, or text without Esc."""

    def __init__(self) -> None:
        self.rest = ""  # may still become a sequence, or a paste that has not ended

    @property
    def waits(self) -> bool:
        """True while a piece can't be told yet: call `timeout` where nothing follows soon."""
        return bool(self.rest)

    def feed(self, text: str) -> list[str]:
        """The pieces that `text` completes."""
        text, self.rest = self.rest + text, ""
        pieces: list[str] = []
        while text:
            piece, text = self._first(text)
            if not piece:
                self.rest = text
                break
            pieces.append(piece)
        return [piece for piece in pieces if not _UNASKED.fullmatch(piece)]

    def timeout(self) -> list[str]:
        """The pieces of what has stood long enough: nothing followed, so it was typed. A paste is waited for."""
        if self.rest.startswith(_PASTE):
            return []
        text, self.rest = self.rest, ""
        if _COMING.fullmatch(text):  # no keys: what it begins with would be taken for commands
            return []
        return [ESC, *([text[1:]] if text[1:] else [])] if text else []

    @staticmethod
    def _first(text: str) -> tuple[str, str]:
        """The first piece and what follows it; "" and all of the text where the first can't be told yet."""
        if text[0] != ESC:
            end = text.find(ESC)
            return (text, "") if end < 0 else (text[:end], text[end:])
        if text.startswith(_PASTE):
            return _paste(text)
        if _BEGUN.fullmatch(text) or _COMING.fullmatch(text):
            return "", text
        if match := _CLICK.match(text) or _KEY.match(text) or _ANSWER.match(text):
            return match[0], text[match.end() :]
        return ESC, text[1:]


def _paste(text: str) -> tuple[str, str]:
    """A paste as one piece, once its end is there. Ctrl+C gives up on one that never ends."""
    end = text.find(_PASTED)
    given_up = text.find(_INTERRUPT)
    if end >= 0 and not 0 <= given_up < end:
        return text[: end + len(_PASTED)], text[end + len(_PASTED) :]
    if given_up >= 0:
        return ESC, text[given_up + 1 :]
    return "", text
