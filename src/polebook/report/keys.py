"""Tables of keys, as `polebook kinds` prints them: unit, role, default, purpose."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from textwrap import wrap
from typing import Protocol

from polebook.report.look import Look, cells
from polebook.report.table import GAP, Cell, Column, table

_TITLES = ("key", "unit", "role", "default")
_LEAST = 24  # columns that a purpose gets, whatever stands before it


class Key(Protocol):
    """A key of a table: what it is called and what a reader needs to know of it."""

    @property
    def key(self) -> str: ...
    @property
    def unit(self) -> str: ...
    @property
    def role(self) -> str: ...
    @property
    def default(self) -> str: ...
    @property
    def required(self) -> bool: ...
    @property
    def about(self) -> str: ...


def keys(rows: Sequence[Key], look: Look) -> list[str]:
    """One line a key, its purpose wrapped beside it."""
    facts = [[row.key, row.unit, row.role, "required" if row.required else row.default] for row in rows]
    room = look.width - 1 - GAP * len(_TITLES)
    for at, title in enumerate(_TITLES):
        room -= max([cells(title), *(cells(look.text(fact[at])) for fact in facts)])
    lines: list[list[Cell | str]] = []
    for fact, row in zip(facts, rows, strict=True):
        first, *more = wrap(look.text(row.about), max(room, _LEAST)) or [""]
        lines.append([Cell(fact[0], "head"), *fact[1:], first])
        lines += [["", "", "", "", text] for text in more]
    return table([Column(title, right=False) for title in (*_TITLES, "purpose")], lines, look)


def index(rows: Iterable[tuple[str, str]], look: Look) -> list[str]:
    """Names, each with what it is."""
    listed = list(rows)
    room = look.width - 1 - GAP - max((cells(name) for name, _ in listed), default=0)
    lines: list[list[Cell | str]] = []
    for name, about in listed:
        first, *more = wrap(look.text(about), room) or [""]
        lines.append([Cell(name, "head"), first])
        for text in more:
            lines.append(["", text])
    return table([Column("name", right=False), Column("", right=False)], lines, look)
