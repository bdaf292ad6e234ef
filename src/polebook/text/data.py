"""Parsed TOML compared and changed by path: what an edit is meant to do, to check it by."""

from __future__ import annotations

from collections.abc import Set
from typing import Any

from polebook.text.spans import Path


def same(a: Any, b: Any) -> bool:
    """Whether two parsed values are alike, types and all: 1 is not 1.0 nor true, but nan is nan."""
    if type(a) is not type(b):
        return False
    if isinstance(a, dict):
        return a.keys() == b.keys() and all(same(a[key], b[key]) for key in a)
    if isinstance(a, list):
        return len(a) == len(b) and all(map(same, a, b))
    return repr(a) == repr(b)


def find(data: Any, path: Path) -> Any:
    """What stands at `path`; None for nothing."""
    for part in path:
        if isinstance(data, dict):
            known = part in data
        else:
            known = isinstance(data, list) and isinstance(part, int) and 0 <= part < len(data)
        if not known:
            return None
        data = data[part]
    return data


def put(data: Any, path: Path, value: Any) -> None:
    """Sets `path` in place, making the tables around it. Items of lists must be there."""
    for part in path[:-1]:
        data = data.setdefault(part, {}) if isinstance(data, dict) else data[part]
    data[path[-1]] = value


def drop(data: Any, path: Path, stays: Set[Path]) -> None:
    """Takes `path` out in place, and every table around it that is then empty and not one of `stays`."""
    for length in range(len(path), 0, -1):
        if length < len(path) and (path[:length] in stays or find(data, path[:length])):
            return
        holder = find(data, path[: length - 1])
        del holder[path[length - 1]]


def shown(path: Path) -> str:
    """A path for a reader: stage[1].rc, positions counted from 1."""
    text = ""
    for part in path:
        text += f"[{part + 1}]" if isinstance(part, int) else f".{part}" if text else part
    return text
