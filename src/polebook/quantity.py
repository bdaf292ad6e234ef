"""Quantities as text and as numbers: "4k7" <-> 4700.0, and the engineering format.

A value is exact: its text is joined to one decimal number and converted once, never multiplied.
The letter code is that of IEC 60062.
"""

from __future__ import annotations

import math
import re

from polebook.refusal import Refused, explain, refuse_kind, refuse_range
from polebook.units import DIMENSIONS, PREFIXES, Dimension

__all__ = ["DIMENSIONS", "Dimension", "Refused", "engineering", "letter", "parse"]

LONGEST = 64  # characters of a quantity
_PLAIN = re.compile(r"([+-]?(?:[0-9]+\.?[0-9]*|\.[0-9]+))(?:[eE]([+-]?[0-9]+))?\s*(.*)")
_CODED = re.compile(r"([+-]?)([0-9]*)([fpnumkKMGTRF])([0-9]+)\s*(.*)")
_UNIFORM = str.maketrans({"µ": "u", "μ": "u", "\u2126": "Ω", "−": "-"})  # both code points of micro, ohm sign, minus
_POWER = {**PREFIXES, "K": 3, "R": 0, "F": 0}
_LETTER = {power: prefix for prefix, power in PREFIXES.items()} | {0: ""}
_NO_PREFIX = frozenset(("dB", "dBΩ", "°C", "%", "1/V"))
_MOST_DIGITS = 4  # of a letter code


def parse(raw: object, dimension: str) -> float:
    """The value of `raw`, a TOML number or text, as a float in the base unit of `dimension`.

    A `ratio` or `gain_source` in dB becomes a plain ratio, a `decibel` stays in dB, a `share` in % becomes a
    fraction. Raises Refused with what, why and fix; its sign is for the caller to judge.
    """
    dim = DIMENSIONS[dimension]
    if isinstance(raw, str):
        return _text(raw, dim)
    if isinstance(raw, bool) or not isinstance(raw, int | float):
        raise refuse_kind(raw, dim)
    try:
        value = float(raw)
    except OverflowError:
        raise refuse_range(raw, dim, "it is past the largest number that can be held") from None
    if not math.isfinite(value):
        word = "not a number" if math.isnan(value) else "infinite"
        raise refuse_range(raw, dim, f"it is {word}, and every value must be a finite number")
    return value + 0.0  # no negative zero


def _text(raw: str, dim: Dimension) -> float:
    text = raw.strip().translate(_UNIFORM)
    if len(text) > LONGEST:
        raise refuse_range(raw, dim, f"it has {len(text)} characters, and a quantity has at most {LONGEST}")
    if (match := _CODED.fullmatch(text)) and match[3] in dim.marks:
        sign, whole, mark, decimals, rest = match.groups()
        if rest and (rest not in dim.spellings or mark in "RF"):
            raise explain(raw, text, dim)
        return _join(raw, dim, f"{sign}{whole or 0}.{decimals}", _POWER[mark] + dim.spellings.get(rest, 0))
    match = _PLAIN.fullmatch(text)
    if not match:
        raise explain(raw, text, dim)
    number, exponent, rest = match.groups()
    power = int(exponent or 0)
    if not rest:
        return _join(raw, dim, number, power)
    if rest in dim.decibels:
        return _from_db(raw, dim, _join(raw, dim, number, power))
    if rest in dim.spellings:
        return _join(raw, dim, number, power + dim.spellings[rest])
    unit = rest[1:].lstrip()
    if rest[0] == "R" and not unit and "R" in dim.marks:
        return _join(raw, dim, number, power)
    if rest[0] not in dim.prefixes or exponent or (unit and unit not in dim.spellings):
        raise explain(raw, text, dim)
    return _join(raw, dim, number, _POWER[rest[0]] + dim.spellings.get(unit, 0))


def _join(raw: str, dim: Dimension, number: str, power: int) -> float:
    value = float(f"{number}e{power}")
    if math.isinf(value):
        raise refuse_range(raw, dim, "it is past the largest number that can be held")
    if value == 0.0 and any(digit in number for digit in "123456789"):
        raise refuse_range(raw, dim, "it is too near to zero to be held")
    return value + 0.0


def _from_db(raw: str, dim: Dimension, db: float) -> float:
    try:
        value: float = 10.0 ** (db / 20.0)
    except OverflowError:
        value = math.inf
    if math.isinf(value) or value == 0.0:
        raise refuse_range(raw, dim, "no ratio that can be held is that large or that small")
    return value


def engineering(value: float | None, unit: str = "", digits: int = 3) -> str:
    """`value` with `digits` significant digits and an SI prefix: 274312 -> "274k", with a unit "274 kHz".

    Trailing zeros stay ("4.70k"), a carry moves on (999.96 -> "1.00k"), None and not-a-number are "–". Units that
    take no prefix (dB, °C, %, 1/V) get a plain number.
    """
    if value is None or math.isnan(value):
        return "–"
    if math.isinf(value):
        number, prefix = "-inf" if value < 0 else "inf", ""
    elif value == 0:
        number, prefix = "0", ""
    else:
        mantissa, _, exponent = f"{value:.{digits - 1}e}".partition("e")
        power = int(exponent)
        step = 0 if unit in _NO_PREFIX else 3 * (power // 3)
        if step in _LETTER and -15 <= power <= 15 + digits:
            number, prefix = _shift(mantissa, power - step), _LETTER[step]
        else:
            number, prefix = f"{mantissa}e{power}", ""
    return f"{number} {prefix}{unit}" if unit else f"{number}{prefix}"


def _shift(mantissa: str, places: int) -> str:
    """The decimal number `mantissa`, one digit before its point, with the point moved right by `places`."""
    sign = "-" if mantissa.startswith("-") else ""
    digits = mantissa.lstrip("-").replace(".", "")
    if places < 0:
        return f"{sign}0.{'0' * (-places - 1)}{digits}"
    whole = digits[: places + 1].ljust(places + 1, "0")
    decimals = digits[places + 1 :]
    return f"{sign}{whole}.{decimals}" if decimals else f"{sign}{whole}"


def letter(value: float, dimension: str) -> str:
    """The shortest text that `parse` reads back as exactly `value`, as one writes it on a drawing.

    For resistances and capacitances the letter code of IEC 60062 ("4k7", "R47", "2n2", "p33", "1M"), for other
    dimensions number and prefix ("1.5M"); plain digits where neither reaches. `value` is finite.
    """
    dim = DIMENSIONS[dimension]
    if value == 0:
        return "0"
    sign = "-" if value < 0 else ""
    digits, point = _decimal(abs(value))  # value = 0.digits × 10^point
    step = 3 * ((point - 1) // 3)
    if not dim.prefixes or step < -15 or step > 12 or (step and _LETTER[step] not in dim.prefixes):
        return _unmarked(value, step, digits, point)
    mark = _LETTER[step] or ("R" if "R" in dim.marks else "")
    whole, decimals = digits[: point - step].ljust(point - step, "0"), digits[point - step :]
    coded = dimension in ("resistance", "capacitance") and len(digits) <= _MOST_DIGITS and mark
    if not coded:
        return f"{sign}{whole}{'.' if decimals else ''}{decimals}{_LETTER[step]}"
    texts = [f"{whole}{mark}{decimals}"]
    lead = "R" if dimension == "resistance" else "p"
    if point <= _POWER[lead]:  # less than one ohm or picofarad: the letter may stand first
        texts.insert(0, f"{lead}{'0' * (_POWER[lead] - point)}{digits}")
    return sign + min(texts, key=len)


def _unmarked(value: float, step: int, digits: str, point: int) -> str:
    """Without a prefix: digits where they stay short, else an exponent."""
    if -3 <= point <= 15:
        text = repr(value)
        if "e" not in text:
            return text.removesuffix(".0")
    return f"{'-' if value < 0 else ''}{digits[0]}{'.' if digits[1:] else ''}{digits[1:]}e{point - 1}"


def _decimal(value: float) -> tuple[str, int]:
    """The shortest digits that name `value` > 0, without zeros at either end, and where the point stands."""
    mantissa, _, exponent = repr(value).partition("e")
    whole, _, decimals = mantissa.partition(".")
    digits = (whole + decimals).lstrip("0")
    point = len(whole) + int(exponent or 0) - (len(whole + decimals) - len(digits))
    return digits.rstrip("0"), point
