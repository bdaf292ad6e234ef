"""A chain file's text to a plain dict: limits first, then the syntax, each fault with place, reason and remedy."""

from __future__ import annotations

import tomllib
from typing import Any

from polebook.problem import Place, Problem
from polebook.text.tokens import ROUGH

LARGEST = 512 * 1024  # bytes of UTF-8
MOST_PARTS = 8  # of a dotted key
DEEPEST = 16  # brackets


def read(text: str, file: str) -> tuple[dict[str, Any] | None, list[Problem]]:
    """The content of `text`, or None and what keeps it from being read. `file` is the name that problems carry."""
    if problem := over_limits(text, file):
        return None, [problem]
    try:
        return tomllib.loads(text), []
    except ValueError as error:  # a syntax fault, or an integer with thousands of digits
        from polebook.text.syntax import syntax_problem  # deferred: saves its patterns' 3 ms where there is none

        return None, [syntax_problem(text, file, str(error))]


def over_limits(text: str, file: str) -> Problem | None:
    """The limit that `text` is past, if any: what a parser could take seconds on is refused before parsing."""
    size = len(text.encode("utf-8", "surrogatepass"))
    if size > LARGEST:
        return too_large(file, size)
    if "\0" in text:
        return Problem(
            Place.of(text, text.index("\0"), file), "the text holds a NUL character",
            "a chain file is plain text, and a NUL never stands in one", "take it out, or save the file as UTF-8 again",
        )
    if text.startswith("\ufeff"):
        return Problem(
            Place(file, 1, 1), "the text begins with a byte-order mark", "TOML is UTF-8 without such a mark",
            "save the file as UTF-8 without a byte-order mark (BOM)",
        )
    return _over_nested(text, file)


def too_large(file: str, size: int) -> Problem:
    """The problem of a file of `size` bytes, too many."""
    return Problem(
        Place(file), f"the file has {size} bytes, and at most {LARGEST} (512 KiB) are read",
        "64 stages with their notes need far less, so this is most likely another file",
        "name the chain file itself, or shorten its notes",
    )


def _over_nested(text: str, file: str) -> Problem | None:
    depth = parts = 0
    dotted = False  # the last token was a dot
    for match in ROUGH.finditer(text):
        kind = match.lastgroup
        if kind == "part":
            parts = parts + 1 if dotted else 1
            dotted = False
            if parts > MOST_PARTS:
                return Problem(
                    Place.of(text, match.start(), file, len(match[0])), f"a key of more than {MOST_PARTS} dotted parts",
                    "no key of a chain file has over three, and long ones can take a parser seconds",
                    "write the key with fewer dots, or put the text in quotes if it is a value",
                )
            continue
        dotted = kind == "dot" and parts > 0
        if not dotted:
            parts = 0
        if kind == "open":
            depth += 1
            if depth > DEEPEST:
                return Problem(
                    Place.of(text, match.start(), file), f"brackets are nested over {DEEPEST} deep",
                    "nothing in a chain file needs over four, and deep nesting can take a parser seconds",
                    "close the brackets that are still open before this one",
                )
        elif kind == "close":
            depth = max(depth - 1, 0)
    return None
