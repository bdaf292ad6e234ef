"""The preferred values E3 to E192 of IEC 60063, and their neighbours.

E3 to E24 are the 24 rounded values of the standard and every 2nd, 4th and 8th of them; E48 to E192 are 10^(i/n)
rounded to three digits, but for one: E192 has 920 where the rounding gives 919.
"""

from __future__ import annotations

import math
from functools import cache

NAMES = ("E3", "E6", "E12", "E24", "E48", "E96", "E192")
_E24 = (10, 11, 12, 13, 15, 16, 18, 20, 22, 24, 27, 30, 33, 36, 39, 43, 47, 51, 56, 62, 68, 75, 82, 91)
_LOWEST, _HIGHEST = -300, 299  # decades within which every value is a normal float


@cache
def members(name: str) -> tuple[int, ...]:
    """One decade of the series: whole numbers of two digits up to E24, of three from E48. KeyError for no series."""
    if name not in NAMES:
        raise KeyError(name)
    count = int(name[1:])
    if count <= 24:
        return _E24[:: 24 // count]
    values = [round(100.0 * 10.0 ** (number / count)) for number in range(count)]
    return tuple(920 if value == 919 else value for value in values)


def nearest(value: float, name: str) -> float:
    """The value of the series whose ratio to `value` is nearest to one; of two alike the lower.

    `value` is positive, from 1e-300 to 1e299 (ValueError). Results are the floats nearest to the decimal value.
    """
    below, above = at_most(value, name), at_least(value, name)
    return below if value / below <= above / value else above


def at_most(value: float, name: str) -> float:
    """The largest value of the series that is not above `value`."""
    rank = _rank(value, name)
    return _value(rank, name) if _value(rank, name) <= value else _value(rank - 1, name)


def at_least(value: float, name: str) -> float:
    """The smallest value of the series that is not below `value`."""
    rank = _rank(value, name)
    return _value(rank, name) if _value(rank, name) >= value else _value(rank + 1, name)


def up(value: float, name: str) -> float:
    """The next value of the series above `value`."""
    rank = _rank(value, name)
    return _value(rank, name) if _value(rank, name) > value else _value(rank + 1, name)


def down(value: float, name: str) -> float:
    """The next value of the series below `value`."""
    rank = _rank(value, name)
    return _value(rank, name) if _value(rank, name) < value else _value(rank - 1, name)


def holds(value: float, name: str) -> bool:
    """Whether `value` is one of the series, exactly as a text of it would be read."""
    return 10.0**_LOWEST <= value <= 10.0**_HIGHEST and at_most(value, name) == value


def _value(rank: int, name: str) -> float:
    """Value number `rank` of the series, 0 being 1.0."""
    decade, number = divmod(rank, len(members(name)))
    digits = members(name)[number]
    return float(f"{digits}e{decade - (1 if digits < 100 else 2)}")


def _rank(value: float, name: str) -> int:
    """The rank of a value of the series at or next to `value`, on either side."""
    if not (math.isfinite(value) and value > 0):
        raise ValueError(f"{value} has no neighbours in {name}: it is not a positive number")
    if not 10.0**_LOWEST <= value <= 10.0**_HIGHEST:
        raise ValueError(f"{value} is beyond the decades of {name}")
    row = members(name)
    # the decade from the digits, not from a logarithm, whose rounding may miss it at a power of ten
    mantissa, _, exponent = f"{value:.17e}".partition("e")
    scaled = float(mantissa) * (10 if row[0] < 100 else 100)
    row = (*row, 10 * row[0])  # the float of a power of ten may lie just below it
    number = min(range(len(row)), key=lambda index: abs(row[index] - scaled))
    return int(exponent) * len(members(name)) + number
