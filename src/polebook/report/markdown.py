"""Markdown in the place of a terminal: the same sections as `polebook show`, their tables as tables with pipes.

Text of a file shows as it stands there: what could be markup in it is escaped, as CommonMark 0.31 and GitHub's tables
ask for it.
"""

from __future__ import annotations

import re
from collections.abc import Iterable, Sequence
from urllib.parse import quote

from polebook.problem import printable
from polebook.report.look import Look, cells

_ANYWHERE = re.compile(r"[\\`*\[\]|~^$#{}]|(?<![^\W_])_|_(?![^\W_])")  # _ within a word is none
_ENTITIES = {"&": "&amp;", "<": "&lt;", ">": "&gt;"}
_LINK = re.compile(r"(?<=:)/(?=/)|(?<=www)\.|(?<=\w)@(?=\w)", re.IGNORECASE)  # what some renderers make a link of
_BEGIN = re.compile(r"(?<!\S)(?:[-+=]+|\d{1,9}[.)])(?!\S)")  # a list, a rule or a heading's underline, at the beginning
_FENCE = re.compile(r"`+")


class Markup(Look):
    """What sections write to, so that they come out as Markdown. Nothing is cut to a width, nothing is a bar."""

    __slots__ = ()

    def text(self, raw: str) -> str:
        """`raw` as plain words: no character of it is markup."""
        return escaped(raw)

    def paint(self, text: str, style: str) -> str:
        """Bold for what stands out; `text` has been through `text()`."""
        shown = text.strip()
        return f"**{shown}**" if shown and style in ("head", "bad") else shown

    def bar(self, share: float, room: int) -> str:
        """None: the figure beside it tells."""
        return ""


MARKUP = Markup()


def escaped(raw: str) -> str:
    """Text of one line in Markdown."""
    shown = _ANYWHERE.sub(r"\\\g<0>", printable(raw).strip())
    shown = _LINK.sub(r"\\\g<0>", "".join(_ENTITIES.get(char, char) for char in shown))
    begin = _BEGIN.match(shown)
    if begin:
        at = begin.end() - 1
        shown = f"{shown[:at]}\\{shown[at:]}"
    return shown


def code(raw: str) -> str:
    """Text of one line as code: a name, a digest, a command. Not for cells of a table."""
    shown = printable(raw)
    fence = "`" * (max(map(len, _FENCE.findall(shown)), default=0) + 1)
    pad = " " if shown.startswith("`") or shown.endswith("`") else ""
    return f"{fence}{pad}{shown}{pad}{fence}"


def fenced(lines: Iterable[str]) -> list[str]:
    """Lines, printable already, as a block of code that no line of them ends."""
    listed = list(lines)
    fence = "`" * max([3, *(len(run) + 1 for line in listed for run in _FENCE.findall(line))])
    return [f"{fence}text", *listed, fence]


def picture(words: str, name: str) -> str:
    """A link to a picture that lies beside the document."""
    return f"![{escaped(words)}]({quote(name)})"


def paragraph(text: str) -> list[str]:
    """A paragraph on a line of its own."""
    return ["", text, ""]


def piped(heads: Sequence[str], right: Sequence[bool], rows: Sequence[Sequence[str]]) -> list[str]:
    """A table of escaped cells; columns in which nothing stands are left away. `right`: columns of figures."""
    kept = [at for at, head in enumerate(heads) if head or any(row[at] for row in rows)]
    wide = [max([3, cells(heads[at]), *(cells(row[at]) for row in rows)]) for at in kept]

    def line(row: Sequence[str]) -> str:
        told = (_padded(row[at], room, right[at]) for at, room in zip(kept, wide, strict=True))
        return f"| {' | '.join(told)} |"

    rule = (f"{'-' * (room - 1)}:" if right[at] else "-" * room for at, room in zip(kept, wide, strict=True))
    return ["", line(heads), f"| {' | '.join(rule)} |", *map(line, rows), ""]


def _padded(text: str, room: int, right: bool) -> str:
    blank = " " * (room - cells(text))
    return blank + text if right else text + blank


def blocks(lines: Iterable[str]) -> list[str]:
    """Lines of a section with one blank line between what are blocks of their own, none at either end."""
    done: list[str] = []
    for line in lines:
        line = line.strip()
        joined = line.startswith("| ") and done and done[-1].startswith("| ")
        if done and done[-1] and line and not joined:
            done.append("")
        if line or (done and done[-1]):
            done.append(line)
    while done and not done[-1]:
        done.pop()
    return done
