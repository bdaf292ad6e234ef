"""A sweep's file as text: lines that end in a line feed, whatever they ended in, and no byte-order mark."""

from __future__ import annotations

from typing import NoReturn

from polebook.problem import Place, Problem, ProblemsFound
from polebook.text import files

LARGEST = 8 * 1024 * 1024  # bytes
MOST_POINTS = 50_000
LONGEST = 2000  # characters of a line


def text(name: str) -> str:
    """The text of the file. Raises ProblemsFound where it can't be read, is too large, or is no UTF-8."""
    data, status = files.contents(name, LARGEST, "a sweep")
    if len(data) > LARGEST:
        size = max(status.st_size, len(data))
        raise ProblemsFound([Problem(
            Place(name), f"the file has {size} bytes, and at most {LARGEST} (8 MiB) are read",
            f"a sweep of {MOST_POINTS} points, the most that is taken, needs less",
            "export fewer points, or only frequency, gain and phase")])
    return plain(name, data)


def plain(name: str, data: bytes) -> str:
    """The text of a file's bytes. Raises ProblemsFound where they are none."""
    found = files.decoded(name, data).removeprefix("\ufeff").replace("\r\n", "\n").replace("\r", "\n")
    if "\0" in found:
        refuse(name, found, found.count("\n", 0, found.index("\0")) + 1, "the file holds a NUL character",
               "a sweep is plain text, and this is most likely something else", "export it as text")
    for number, line in enumerate(found.split("\n"), 1):
        if len(line) > LONGEST:
            refuse(name, found, number, f"the line has {len(line)} characters",
                   f"a line of a sweep has at most {LONGEST}", "export one line for each frequency")
    return found


def refuse(name: str, text: str, line: int, what: str, why: str, fix: str, column: int = 0, width: int = 1) -> NoReturn:
    """Raises the problem of a line; line 0 is the file as a whole."""
    raise ProblemsFound([Problem(Place(name, line, column, width), what, why, fix)], text)


def too_many(name: str, text: str, line: int) -> NoReturn:
    """Raises the problem of a file with more points than are taken; `line` is the first beyond."""
    refuse(name, text, line, f"there are more than {MOST_POINTS} points",
           "no curve needs so many, and a fit would take minutes", "export fewer points")
