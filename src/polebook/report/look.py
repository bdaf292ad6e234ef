"""What the reader's terminal can show: colours and characters, decided once, handed to every page."""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache
from unicodedata import category, east_asian_width

from polebook.problem import printable

WIDTH = 80
_SGR = {"head": "1", "good": "32", "bad": "31", "warn": "33", "dim": "2"}
# what stands in for a character that the encoding lacks; all as wide or wider, so it is done before measuring
_PLAIN = {
    "–": "-",
    "−": "-",
    "…": "~",
    "Ω": "ohm",
    "µ": "u",
    "²": "2",
    "√": "rt",
    "°": "deg ",
    "±": "+/-",
    "×": "x",
    "─": "-",
    "█": "#",
    "◂": "<",
    "≥": ">=",
    "≤": "<=",
    "·": ".",
    "τ": "tau",
    "\u00a0": " ",
}
_EIGHTHS = " ▏▎▍▌▋▊▉"


@dataclass(frozen=True, slots=True)
class Look:
    """`colour`: SGR sequences are welcome. `encoding`: of the stream that the text goes to."""

    colour: bool = False
    encoding: str = "utf-8"
    width: int = WIDTH

    def text(self, raw: str) -> str:
        """`raw` as the terminal can have it: control characters made visible, missing characters replaced."""
        shown = printable(raw)
        if shown.isascii() or self.has(shown):
            return shown
        return "".join(char if self.has(char) else _PLAIN.get(char, _escape(char)) for char in shown)

    def has(self, text: str) -> bool:
        """True where the encoding has every character of `text`."""
        try:
            text.encode(self.encoding)
        except UnicodeEncodeError:
            return False
        return True

    def paint(self, text: str, style: str) -> str:
        """`text` (already through `text()`) in a style: head, good, bad, warn, dim, or "" for none."""
        if not self.colour or not style or not text.strip():
            return text
        shown = text.rstrip()
        return f"\x1b[{_SGR[style]}m{shown}\x1b[0m{text[len(shown) :]}"

    def bar(self, share: float, room: int) -> str:
        """A bar of `share` (held within 0 to 1) of `room` cells; whatever is above 0 shows."""
        share = min(max(share, 0.0), 1.0)
        if not self.has("█▏"):
            return "#" * max(round(share * room), share > 0)
        whole, eighth = divmod(max(round(share * room * 8), share > 0), 8)
        return "█" * whole + _EIGHTHS[eighth].strip()


def cells(text: str) -> int:
    """Columns that printable text takes on a terminal."""
    if text.isascii():
        return len(text)
    return sum(map(_columns, text))


@lru_cache(maxsize=1024)
def _columns(char: str) -> int:
    return 0 if category(char) in ("Mn", "Me") else 2 if east_asian_width(char) in "WF" else 1


def fit(text: str, room: int, mark: str = "…") -> str:
    """`text`, cut with `mark` where it is wider than `room` columns."""
    if cells(text) <= room:
        return text
    kept, used = "", len(mark)
    for char in text:
        used += cells(char)
        if used > room:
            break
        kept += char
    return kept + mark


def _escape(char: str) -> str:
    return char.encode("ascii", "backslashreplace").decode("ascii")
