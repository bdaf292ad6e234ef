"""How a verdict words its figures: three digits for what is computed, no needless zeros for what was stated."""

from __future__ import annotations

import re
from collections.abc import Sequence
from math import log10
from textwrap import wrap

from polebook.quantity import engineering

_NAME = re.compile(r"n\d+ |(source|load)\.")
NUMBERS = ("no", "one", "two", "three", "four", "five", "six", "seven", "eight", "nine", "ten", "eleven", "twelve")
LINES, WIDTH = 3, 78  # that a verdict may take
UNITS = {"C": "F", "L": "H", "R": "Ω", "tau": "s", "I": "A", "gm": "S"}


def figure(value: float | None, unit: str) -> str:
    """A computed figure: "1.52 kΩ"."""
    return engineering(value, unit)


def stated(value: float, unit: str) -> str:
    """A figure of the file: "4.7 pF", "1 MHz"."""
    number, _, tail = engineering(value, unit, 4).partition(" ")
    if "." in number and "e" not in number:
        number = number.rstrip("0").rstrip(".")
    return f"{number} {tail}"


def per_cent(share: float) -> str:
    """A share in whole per cent."""
    return f"{round(100 * share):d} %"


def slope(value: float) -> str:
    """What 1 % moves, in per cent with two digits: "0.71 %"."""
    size = abs(value)
    return f"{size:.2f} %" if size < 0.995 else f"{size:.1f} %" if size < 9.95 else f"{size:.0f} %"


def plain(value: float) -> str:
    """A bare ratio such as K, with three digits: "-34.4"."""
    size = abs(value)
    if not 1e-3 <= size < 9995:
        return engineering(value)
    decimals = 3 if size < 0.9995 else 2 if size < 9.995 else 1 if size < 99.95 else 0
    return f"{round(value, decimals) + 0.0:.{decimals}f}"


def decibels(ratio: float, unit: str = "dB", digits: int = 1) -> str:
    """A ratio in dB; dBΩ for a gain in V/A."""
    return loss(20.0 * log10(abs(ratio)), unit, digits)


def loss(db: float, unit: str = "dB", digits: int = 1) -> str:
    """A figure that is in dB already."""
    return f"{round(db, digits) + 0.0:.{digits}f} {unit}"


def stated_decibels(db: float, unit: str = "dB") -> str:
    """A dB figure of the file, without needless zeros."""
    return f"{round(db, 2) + 0.0:g} {unit}"


def listed(items: Sequence[str]) -> str:
    """"a", "a and b", "a, b and c"."""
    return items[0] if len(items) == 1 else f"{', '.join(items[:-1])} and {items[-1]}"


def number(count: int) -> str:
    """A count in words up to twelve."""
    return NUMBERS[count] if count < len(NUMBERS) else str(count)


def fits(text: str) -> bool:
    """Whether a verdict takes no more lines than it may."""
    return len(wrap(text, WIDTH)) <= LINES


def capital(text: str) -> str:
    """With a capital, but for a name in front (n1, load.couple)."""
    return text if _NAME.match(text) else text[:1].upper() + text[1:]


def sentences(*clauses: str) -> str:
    """Clauses that say something, each with a capital and a full stop."""
    return " ".join(f"{capital(clause)}." for clause in clauses if clause)
