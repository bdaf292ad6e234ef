"""A look at the open file on the disk: is it still what was read, and what is there instead."""

from __future__ import annotations

import os
import time
from collections.abc import Callable
from dataclasses import dataclass

from polebook.problem import Place, Problem, ProblemsFound
from polebook.text import files
from polebook.text.files import Identity

_SETTLE_S, _LOOKS = 0.1, 20  # a change is believed once nothing has moved for so long; it is looked at so often


@dataclass(frozen=True, slots=True)
class Look:
    """What is in the file's place that is not what was read.

    known     what the file was when it was read or saved
    identity  what it is now, None where it has gone
    text      what it says, None where it has gone or can't be read
    problem   why it can't be read
    """

    known: Identity | None
    identity: Identity | None
    text: str | None = None
    problem: Problem | None = None


def look(path: str, known: Identity | None, seen: Identity | None,
         pause: Callable[[float], None] = time.sleep) -> Look | None:
    """What is at `path`; None where that is what was `seen` last, or where it can't be told.

    Waits until whoever writes there has done so, a moment: a text is not taken while it is half written.
    """
    try:
        now = _identity(path)
        if now == seen:
            return None
        for _ in range(_LOOKS):
            found = _found(path, known, now)
            pause(_SETTLE_S)
            again = _identity(path)
            if again == now == found.identity:
                return found
            now = again
    except OSError:  # a folder that can't be looked into, a disk that is away: not the file's end
        pass
    return None


def at_once(path: str, known: Identity | None) -> Look | None:
    """What is at `path` now, half written or not; None where that is what was `known`. Raises OSError."""
    now = _identity(path)
    return None if now == known else _found(path, known, now)


def _identity(path: str) -> Identity | None:
    """What is at `path`; None where there is nothing. Raises OSError where that can't be told."""
    try:
        os.stat(path)
    except (FileNotFoundError, NotADirectoryError):
        return None
    return files.identity(path)


def _found(path: str, known: Identity | None, now: Identity | None) -> Look:
    if now is None:
        return Look(known, None, None, Problem(
            Place(path), "the file has gone from the disk", "another hand has moved or removed it",
            "w writes it anew"))
    try:
        read = files.read(path)
    except ProblemsFound as found:
        return Look(known, now, None, found.problems[0])
    return Look(known, read.identity, read.text)
