"""One thing wrong, as a value: where it stands, what it is, why it is wrong, how to mend it."""

from __future__ import annotations

import re
import unicodedata
from collections.abc import Iterable
from dataclasses import dataclass
from functools import lru_cache

EXCERPT_CELLS = 72  # of a source line, so that excerpt and line number fit 80 columns
TAB_CELLS = 4
_NAMED = {"\n": "\\n", "\r": "\\r", "\t": "\\t"}
# Cc control, Cf format (bidi, zero width), Cn unassigned, Co private use (what and how wide it is, the terminal's font
# says), Cs lone surrogates, Zl and Zp line and paragraph separators
_HIDDEN = frozenset(("Cc", "Cf", "Cn", "Co", "Cs", "Zl", "Zp"))
# what shows nothing by itself, or changes how wide its neighbour is on some terminals and not on others: joiners,
# fillers and vowels of Hangul, selectors of a variant, halves of flags, tones of skin
_UNSURE = re.compile("[\u034f\u115f-\u11ff\u17b4\u17b5\u180b-\u180f\u3164\ud7b0-\ud7ff\ufe00-\ufe0f\uffa0"
                     "\U0001f1e6-\U0001f1ff\U0001f3fb-\U0001f3ff\U000e0100-\U000e01ef]")


@dataclass(frozen=True, slots=True)
class Place:
    """Where a value stands: 1-based line and column, both in characters; line 0 where no line is known."""

    file: str
    line: int = 0
    column: int = 0
    width: int = 1

    @classmethod
    def of(cls, text: str, at: int, file: str, width: int = 1) -> Place:
        """Character `at` of `text`."""
        begin = text.rfind("\n", 0, at) + 1
        return cls(file, text.count("\n", 0, at) + 1, at - begin + 1, width)


@dataclass(frozen=True, slots=True)
class Problem:
    """One thing wrong. `severity` is "fault" (the figures cannot be had) or "caution" (they can)."""

    place: Place | None
    what: str
    why: str
    fix: str
    severity: str = "fault"


class ProblemsFound(Exception):
    """Raised where work cannot go on: every problem that was found, and the text for their excerpts."""

    def __init__(self, problems: Iterable[Problem], text: str = "") -> None:
        self.problems = tuple(problems)
        self.text = text
        super().__init__("; ".join(problem.what for problem in self.problems))

    def __str__(self) -> str:
        return "\n".join(render(problem, self.text) for problem in self.problems)


def printable(s: str) -> str:
    """`s` with control, escape, bidi and zero-width characters made visible: ``\\x1b``, ``\\u202e``, ``\\n``.

    Every string that comes from a file or a command passes here on its way to a terminal.
    """
    if s.isascii() and s.isprintable():
        return s
    return "".join(_visible(char) for char in s)


def render(problem: Problem, text: str = "") -> str:
    """The problem as lines for a reader: place and what, an excerpt of `text` with the value marked, why, fix."""
    place = problem.place
    head = printable(problem.what)
    if problem.severity != "fault":
        head = f"{problem.severity}: {head}"
    lines = [head]
    if place is not None:
        where = printable(place.file)
        if place.line > 0:
            where += f":{place.line}:{place.column}" if place.column > 0 else f":{place.line}"
        lines = [f"{where}: {head}" if where else head, *_excerpt(place, text)]
    if problem.why:
        lines.append(f"    why  {printable(problem.why)}")
    if problem.fix:
        lines.append(f"    fix  {printable(problem.fix)}")
    return "\n".join(lines)


def _visible(char: str) -> str:
    if unicodedata.category(char) not in _HIDDEN and not _UNSURE.match(char):
        return char
    if char in _NAMED:
        return _NAMED[char]
    code = ord(char)
    if code < 0x100:
        return f"\\x{code:02x}"
    return f"\\u{code:04x}" if code < 0x10000 else f"\\U{code:08x}"


def _cells(char: str) -> int:
    """Terminal cells that a printable character takes."""
    if char.isascii():
        return 1
    if unicodedata.category(char) in ("Mn", "Me"):
        return 0
    return 2 if unicodedata.east_asian_width(char) in ("W", "F") else 1


@lru_cache(maxsize=1)
def _lines(text: str) -> list[str]:
    """Lines as TOML counts them: a form feed or U+2028 ends none."""
    return text.split("\n")


def _excerpt(place: Place, text: str) -> list[str]:
    """The source line and the marks under the value; [] where the line is not in `text`."""
    lines = _lines(text) if text else []
    if not 0 < place.line <= len(lines):
        return []
    source = lines[place.line - 1].removesuffix("\r")
    start = min(max(place.column - 1, 0), len(source))
    end = min(start + max(place.width, 1), max(len(source), start + 1))
    first, last = _window(source, start, end)
    shown, marks = ("…", " ") if first else ("", "")
    width = len(shown)
    for at in range(first, last):
        char = source[at]
        piece = " " * (TAB_CELLS - width % TAB_CELLS) if char == "\t" else _visible(char)
        cells = sum(map(_cells, piece))
        shown += piece
        width += cells
        marks += ("^" if start <= at < end else " ") * cells
    if last < len(source):
        shown += "…"
    if start >= last:  # just past the last character: an end of line where something was expected
        marks += "^"
    gutter = max(3, len(str(place.line)) + 1)
    mark_line = f"{'':{gutter}} | {marks.rstrip()}" if place.column > 0 else ""
    return [f"{place.line:>{gutter}} | {shown}".rstrip(), *([mark_line] if mark_line else [])]


def _window(source: str, start: int, end: int) -> tuple[int, int]:
    """The part of a line to show: all of it where it fits, else the surroundings of characters start to end."""

    def wide(at: int) -> int:
        return TAB_CELLS if source[at] == "\t" else sum(map(_cells, _visible(source[at])))

    if len(source) <= EXCERPT_CELLS and sum(map(wide, range(len(source)))) <= EXCERPT_CELLS:
        return 0, len(source)
    first, room = start, EXCERPT_CELLS - 2  # two cells are for the marks of a cut
    lead = EXCERPT_CELLS // 3
    while first > 0 and lead - wide(first - 1) >= 0:
        first -= 1
        lead -= wide(first)
        room -= wide(first)
    last = start
    while last < len(source) and room - wide(last) >= 0:
        room -= wide(last)
        last += 1
    while first > 0 and room - wide(first - 1) >= 0:  # the line ended early: show more of what stands before
        first -= 1
        room -= wide(first)
    return first, last
