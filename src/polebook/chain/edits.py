"""Edits of a chain file that name what they change: one key set or taken out, and no fault added."""

from __future__ import annotations

import re
from collections import Counter
from collections.abc import Mapping
from typing import Any

from polebook.chain.desk import TextPath
from polebook.chain.paths import Located, PathRefused, locate
from polebook.chain.read import Reading, known_reading
from polebook.param import Param
from polebook.problem import Problem, ProblemsFound
from polebook.quantity import DIMENSIONS
from polebook.text import literal, splice
from polebook.text.edit import Edit

_DATE = re.compile(r"[0-9]{4}-[0-9]{2}-[0-9]{2}")


def set_value(text: str, file: str, path: str, value: str) -> tuple[Edit, list[Problem]]:
    """The edit that gives the key at `path` ("Q1.rc") the value as typed, and the faults that the file then still has.

    Raises ProblemsFound where the path leads nowhere, the text is not TOML, or the edit would add a fault to a
    file without taking others away.
    """
    before = known_reading(text, file)
    found = locate(path, content(before, text))
    edit = splice.set_value(text, found.path, written(found, value), file)
    return edit, judged(before, edit.apply(text), file)


def unset(text: str, file: str, path: str) -> tuple[Edit, list[Problem]]:
    """The edit that takes the key at `path` out, and the faults that the file then still has; raises as `set_value`."""
    before = known_reading(text, file)
    found = locate(path, content(before, text))
    if not _stands(content(before, text), found.path):
        raise PathRefused(f"{file} gives no {path}", "only what the file gives can be taken out of it",
                          "name a key that it gives; an absent one has its default already")
    edit = splice.unset(text, found.path, file)
    return edit, judged(before, edit.apply(text), file)


def _stands(data: Any, path: tuple[str | int, ...]) -> bool:
    for step in path:
        if isinstance(step, int):
            if not isinstance(data, list) or step >= len(data):
                return False
        elif not isinstance(data, Mapping) or step not in data:
            return False
        data = data[step]
    return True


def content(reading: Reading, text: str) -> Mapping[str, Any]:
    if reading.data is None:
        raise ProblemsFound(reading.problems, text)
    return reading.data


def judged(before: Reading, after: str, file: str, moves: Mapping[int, int] | None = None) -> list[Problem]:
    """The faults of the changed text. Raises ProblemsFound with those that the edit adds, where it takes none away.

    moves  of an edit that puts stages elsewhere or names them anew: number that a stage had -> number that it has. A
           fault is then the same where it stands at the same place, else where it also says the same.
    """
    reading = known_reading(after, file)
    old = Counter(_known(problem, path, moves) for problem, path in before.faults)
    new = Counter(_known(problem, path, None if moves is None else {}) for problem, path in reading.faults)
    added = new - old
    if added and new.total() >= old.total():
        raise ProblemsFound(dict.fromkeys(
            problem for problem, path in reading.faults if _known(problem, path, None if moves is None else {}) in added
        ), after)
    return reading.problems


def _known(problem: Problem, path: TextPath, moves: Mapping[int, int] | None) -> tuple[object, ...]:
    """What a fault is known by in two readings."""
    if moves is None:
        return problem.what, path
    if len(path) > 1 and path[0] == "stage" and isinstance(path[1], int):
        return "", ("stage", moves.get(path[1], path[1]), *path[2:])
    return "", path


def written(found: Located, value: str) -> str:
    """`value`, as typed by its user, as the file writes it."""
    param = found.param
    dimension = param.dimension if param else ""
    typed = value.strip()
    if dimension in ("arms", "table"):
        example = f"{found.number}.1.series_r" if dimension == "arms" else f"{found.number}.rc"
        raise PathRefused(
            f"{found.number} holds several values", "one edit sets one key", f"name one of them, for example {example}"
        )
    if dimension in ("keys", "quantities"):
        return _list(param, typed)
    if dimension == "flag" and typed in ("true", "false"):
        return typed
    if (dimension == "format" and typed.isdecimal() and typed.isascii()) or (
        dimension == "date" and _DATE.fullmatch(typed)
    ):
        return typed
    if dimension in DIMENSIONS:
        return literal.literal(value)
    return literal.string(value)


def _list(param: Param | None, typed: str) -> str:
    """A list as typed with commas, brackets and quotes or not."""
    items = [item.strip().strip("\"'") for item in typed.removeprefix("[").removesuffix("]").split(",")]
    as_text = literal.string if param and param.dimension == "keys" else literal.literal
    return f"[{', '.join(as_text(item) for item in items if item)}]"
