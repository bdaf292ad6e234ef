"""A cell of a sweep as a number."""

from __future__ import annotations

import re
from math import inf, nan

NUMBER = re.compile(r"[+-]?(?:[0-9]+\.?[0-9]*|\.[0-9]+)(?:[eE][+-]?[0-9]+)?")
OVERLOAD = 9.9e37  # from here on instruments mean infinity (9.9E37) or no number (9.91E37, SCPI-99 volume 1, 7.2.1.4)
_MISSING = frozenset({"", "-", "--", "---", "?", "nan", "na", "n/a", "#n/a", "null", "none"})
_INFINITE = frozenset({"inf", "infinity"})


def number(cell: str) -> float | None:
    """The number that a cell holds, with a decimal point; None where it is no number.

    NaN where it says that there is none, infinite where it says so.
    """
    if NUMBER.fullmatch(cell):
        value = float(cell)
        return value if abs(value) < OVERLOAD else nan
    word = cell.replace("−", "-").lower()
    if word != cell:
        return number(word)
    if word in _MISSING or word.lstrip("+-").startswith(("1.#ind", "1.#qnan", "1.#snan", "nan")):
        return nan
    bare = word.lstrip("+-")
    if bare in _INFINITE or bare.startswith("1.#inf"):
        return -inf if word.startswith("-") else inf
    return None
