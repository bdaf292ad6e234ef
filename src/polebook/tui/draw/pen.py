"""What everything is drawn with: characters that the terminal has, widths in cells, text that wraps at words."""

from __future__ import annotations

from dataclasses import dataclass
from textwrap import wrap

from polebook.report.look import Look, cells, fit
from polebook.tui.lines import Line, Span, line, padded, width

FILLS = "·○◔◑◕●"
_ASCII_FILLS = ".:+xX#"
_ASCII = {"×": "x", "┊": ":", "▴": "^", "└": "+", "∥": "||",
          "▸": ">", "◂": "<", "▷": ">", "‹": "<", "›": ">", "─": "-", "│": "|", "┬": "-", "┴": "-", "├": "|",
          "┤": "|", "┼": "+", "←": "<-", "→": "->", "↑": "Up", "↓": "Down",
          **dict(zip(FILLS, _ASCII_FILLS, strict=True))}
_FULL = (1 / 8, 3 / 8, 5 / 8, 1.0)
_CLAUSE = frozenset(",;:(")
BLANK: Line = ()


@dataclass(frozen=True, slots=True)
class Pen:
    """`plain`: nothing but ASCII. Text that comes from a file, or may hold more than ASCII, goes through `text`."""

    plain: bool
    look: Look

    def text(self, raw: str) -> str:
        """`raw` as the terminal can have it: control characters made visible, missing ones replaced."""
        if raw.isascii() and raw.isprintable():
            return raw
        if self.plain:
            raw = "".join(_ASCII.get(char, char) for char in raw)
        return self.look.text(raw)

    def sign(self, char: str) -> str:
        """One of the program's own signs, always one cell."""
        return _ASCII.get(char, char) if self.plain else char

    def fitted(self, of: Line, room: int) -> Line:
        """A line in exactly `room` cells: cut with a mark, or filled with blanks."""
        if width(of) <= room:
            return padded(of, room)
        spans: list[Span] = []
        left = room
        for span in of:
            size = cells(span.text)
            if size > left:
                spans.append(Span(fit(span.text, left, self.text("…")[:left]), span.style))
                break
            spans.append(span)
            left -= size
        return padded(tuple(spans), room)

    def rule(self, length: int) -> Line:
        """A line across."""
        return line(Span(self.sign("─") * length, "dim"))

    def fill(self, lost: float | None, allotted: float | None) -> str:
        """The mark of a node by what it loses of what it was allotted (dB)."""
        if lost is None or lost <= 0.0:
            return self.sign(FILLS[0])
        if not allotted or allotted <= 0.0:
            return self.sign(FILLS[-1])
        share = lost / allotted
        return self.sign(FILLS[1 + sum(share >= limit for limit in _FULL)])

    def cut(self, text: str, room: int) -> str:
        """Text within `room` cells; what is too long ends at a word where one ends near, with a mark."""
        if cells(text) <= room:
            return text
        mark = self.text("…")
        if room <= len(mark):
            return mark[:max(room, 0)]
        kept, used = "", 0
        for char in text:
            used += cells(char)
            if used > room - len(mark):
                break
            kept += char
        head, space, _ = kept.rpartition(" ")
        if space and cells(head) * 3 >= room and not text[len(kept):].startswith(" "):
            kept = head
        return kept.rstrip() + mark

    def clause(self, text: str, room: int) -> str:
        """Text within `room` cells, what is too long cut behind a clause that says something by itself."""
        if cells(text) <= room:
            return text
        ends = [at for at, char in enumerate(text) if char in _CLAUSE and cells(text[:at].rstrip()) <= room]
        if ends and ends[-1] > 8:
            return text[:ends[-1]].rstrip()
        return self.cut(text, room)

    def name(self, text: str, room: int) -> str:
        """A file's name within `room` cells: its end tells more than its beginning."""
        if cells(text) <= room:
            return text
        mark = self.text("…")
        kept, used = "", len(mark)
        for char in reversed(text):
            used += cells(char)
            if used > room:
                break
            kept = char + kept
        return mark + kept if room > len(mark) else mark[:max(room, 0)]

    def wrapped(self, raw: str, room: int, hang: str = "") -> list[str]:
        """`raw` (through `text` here) in lines of at most `room` cells, broken at blanks; [] for nothing."""
        shown = NO_BREAK.join(map(self.text, raw.split(NO_BREAK)))
        if room < 1:
            return []
        if shown.isascii() or cells(shown) == len(shown):
            return [part.replace(NO_BREAK, " ") for part in wrap(shown, room, subsequent_indent=hang[:room - 1])]
        return [part.replace(NO_BREAK, " ") for part in _wrapped_wide(shown, room)]


NO_BREAK = "\u00a0"


def _wrapped_wide(text: str, room: int) -> list[str]:
    """As `wrap`, where some characters take two cells or none."""
    result, row = [], ""
    for word in text.split(" "):
        while cells(word) > room:
            head = ""
            for char in word:
                if cells(head + char) > room:
                    break
                head += char
            if not head:
                head = word[0]
            if row:
                result.append(row)
                row = ""
            result.append(head)
            word = word[len(head):]
        if row and cells(row) + 1 + cells(word) > room:
            result.append(row)
            row = word
        else:
            row = f"{row} {word}" if row else word
    return [*result, row] if row else result


def pen(plain: bool) -> Pen:
    """The pen of a terminal that has Unicode, or ASCII alone."""
    return _PLAIN if plain else _FULL_PEN


_PLAIN = Pen(True, Look(encoding="ascii"))
_FULL_PEN = Pen(False, Look())


def right(text: str, room: int) -> str:
    """Text set to the right."""
    return " " * max(room - cells(text), 0) + text


def left(text: str, room: int) -> str:
    """Text set to the left, filled with blanks."""
    return text + " " * max(room - cells(text), 0)


def ends(begin: Line, end: Line, room: int) -> Line:
    """One line with a beginning and an end."""
    gap = max(room - width(begin) - width(end), 1)
    return (*begin, Span(" " * gap), *end)


def window(count: int, size: int, at: int) -> int:
    """First of `size` rows in sight of `count`, `at` among them; it moves by half a page, not with every row."""
    if count <= size or size < 1:
        return 0
    half = max(size // 2, 1)
    start = max(at, 0) // half * half - (size - half) // 2
    return min(max(start, 0), count - size)
