"""A small reader of quantities, written from CHAIN_FORMAT's text alone: numbers, prefixes, letter codes, dB, %."""

from __future__ import annotations

import re

PREFIX = {
    "": 1.0, "f": 1e-15, "p": 1e-12, "n": 1e-9, "u": 1e-6, "µ": 1e-6, "μ": 1e-6,
    "m": 1e-3, "k": 1e3, "K": 1e3, "M": 1e6, "G": 1e9, "T": 1e12, "R": 1.0,
}  # fmt: skip
UNITS = (
    "V/√Hz", "A/√Hz", "V/rtHz", "A/rtHz", "A/V²", "A/V^2", "V/V", "V/A", "1/V", "V/s", "K/W",
    "ohm", "Ω", "Ω", "Hz", "°C", "V/us", "F", "H", "V", "A", "W", "S", "s",
)  # fmt: skip
DECIBELS_STAY = {"allot", "gain_tolerance", "peaking", "nf"}  # these keys are meant in dB

LETTER = re.compile(r"(\d*)([fpnuµμmRkKMGT])(\d+)")
PLAIN = re.compile(r"([+-]?\d*\.?\d+(?:[eE][+-]?\d+)?|[+-]?\d+\.)\s*([fpnuµμmkKMGTR]?)")


def number(raw: object, key: str = "") -> float:
    """The SI value of a TOML number or text; dB becomes a ratio unless `key` is one that stays in dB."""
    if isinstance(raw, int | float):
        return float(raw)
    text = str(raw).strip()
    if text.endswith("dB"):
        value = float(text[:-2])
        return value if key in DECIBELS_STAY else 10.0 ** (value / 20.0)
    if text.endswith("%"):
        return float(text[:-1]) / 100.0
    for unit in UNITS:
        if text.endswith(unit):
            text = text[: -len(unit)].strip()
            break
    code = LETTER.fullmatch(text)
    if code:
        whole, letter, part = code.groups()
        return float(f"{whole or 0}.{part}") * PREFIX[letter]
    plain = PLAIN.fullmatch(text)
    if not plain:
        raise ValueError(f"not a quantity: {raw!r}")
    return float(plain[1]) * PREFIX[plain[2]]
