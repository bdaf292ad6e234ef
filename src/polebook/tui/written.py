"""Where things stand in a text that is being written: its lines, its faults, what is looked for, the key at a place."""

from __future__ import annotations

import re
from collections.abc import Iterable

from polebook.problem import Place, Problem
from polebook.session.sheets import content_of, stage_sheets
from polebook.text.spans import Path


def line_of(text: str, at: int) -> int:
    """The line of character `at`, 1-based."""
    return text.count("\n", 0, at) + 1


def begin_of(text: str, at: int) -> int:
    """The first character of the line of character `at`."""
    return text.rfind("\n", 0, at) + 1


def end_of(text: str, at: int) -> int:
    """The place behind the last character of the line of character `at`, its line end left out."""
    end = text.find("\n", at)
    if end < 0:
        return len(text)
    return end - 1 if end > 0 and text[end - 1] == "\r" and end - 1 >= begin_of(text, at) else end


def character_of(text: str, place: Place | None) -> int | None:
    """The character at a place; None for a place without a line of the text."""
    if place is None or place.line < 1:
        return None
    at = 0
    for _ in range(place.line - 1):
        at = text.find("\n", at) + 1
        if not at:
            return None
    return min(at + max(place.column - 1, 0), end_of(text, at))


def places(text: str, problems: Iterable[Problem]) -> list[int]:
    """The characters where problems stand, in order, each once."""
    found = {character_of(text, problem.place) for problem in problems}
    return sorted(at for at in found if at is not None)


def alike(a: str, b: str) -> int:
    """How many characters both begin with."""
    low, high = 0, min(len(a), len(b))
    while low < high:
        half = (low + high + 1) // 2
        low, high = (half, high) if a[:half] == b[:half] else (low, half - 1)
    return low


def found(text: str, sought: str) -> list[int]:
    """The characters where a text stands, whatever the case of its letters."""
    return [match.start() for match in re.finditer(re.escape(sought), text, re.IGNORECASE)] if sought else []


def path_at(text: str, at: int) -> str:
    """What stands on the line of character `at`, as the sheets have it: "Q1.rc", else its table "Q1".

    "" above the first table, and in a text that is not TOML.
    """
    data, spans = content_of(text)
    begin, end = begin_of(text, at), end_of(text, at)
    key: tuple[int, Path, bool] = (-1, (), False)  # where it begins, its path, whether it reaches the line
    table: tuple[int, Path] = (-1, ())
    for entry in spans.entries.values():
        start = entry.key.start
        if start <= at or (start <= end and key[0] < begin):
            key = (start, entry.path, entry.value.end >= begin)
    for header in spans.headers.values():
        if header.span.start <= max(at, end):
            table = (header.span.start, header.path)
    if key[2] and key[0] > table[0]:
        return _words(key[1], stage_sheets(data))
    return _words(table[1], stage_sheets(data))


def _words(path: Path, stages: list[str]) -> str:
    """A path of the text as the sheets have it: ("stage", 0, "rc") is "Q1.rc"."""
    steps = [str(step + 1) if isinstance(step, int) else step for step in path]
    if len(path) > 1 and path[0] == "stage" and isinstance(path[1], int) and path[1] < len(stages):
        steps[:2] = [stages[path[1]]]
    return ".".join(steps)
