"""Figures of the document as short text. A figure that does not apply is a dash."""

from __future__ import annotations

from math import isfinite, log10

from polebook.quantity import engineering

NONE = "–"
UNIT_OF_TYPE = {"C": "F", "L": "H", "R": "Ω", "gm": "S", "tau": "s", "I": "A", "en": "V/√Hz",
                "in": "A/√Hz"}
_DECIBELS = frozenset(("dB", "dBΩ"))
_NO_PREFIX = frozenset(("°C", "%", "1/V"))  # a column in one of these has plain numbers
_TARGET_UNITS = {"lower": "Hz", "upper": "Hz", "reference": "Hz", "swing": "V", "current": "A", "rise": "s"}


def eng(value: float | None, unit: str = "", digits: int = 3) -> str:
    """Engineering notation, "274 kHz" or "274k"."""
    if value is None or not isfinite(value):
        return NONE
    return engineering(value, unit, digits)


def decibel(value: float | None, unit: str = "") -> str:
    """Two decimals, so that columns of dB align: "-0.63", "31.02 dB". No negative zero."""
    if value is None or not isfinite(value):
        return NONE
    return f"{round(value, 2) + 0.0:.2f}{' ' + unit if unit else ''}"


def share(value: float | None) -> str:
    """A share of 1 in per cent with one decimal: "41.9 %"."""
    if value is None or not isfinite(value):
        return NONE
    return f"{round(100 * value, 1) + 0.0:.1f} %"


def about(value: float) -> str:
    """A share in whole per cent, for sentences."""
    return f"{round(100 * value):d} %"


def ratio(value: float | None) -> str:
    """A plain number such as K or a gain: three decimals below 1, three digits above, prefixes from 10000."""
    if value is None or not isfinite(value):
        return NONE
    size = abs(value)
    if size >= 9999.5:
        return engineering(value, "", 3)
    decimals = 3 if size < 9.9995 else 2 if size < 99.995 else 1 if size < 999.95 else 0
    return f"{round(value, decimals) + 0.0:.{decimals}f}"


def by_unit(value: float | None, unit: str, digits: int = 3) -> str:
    """A figure with its unit: "" is a plain number, "share" a share of one."""
    if unit == "share":
        return share(value)
    if unit in _DECIBELS:
        return decibel(value, unit)
    return eng(value, unit, digits) if unit else ratio(value)


def bare(value: float | None, unit: str, digits: int = 3) -> str:
    """A figure whose unit stands in the heading of its column ("%" for a share)."""
    if unit == "share":
        return share(value).removesuffix(" %")
    if unit in _DECIBELS:
        return decibel(value)
    return eng(value, "" if unit not in _NO_PREFIX else unit, digits).removesuffix(f" {unit}") if unit else ratio(value)


def gain(value: float | None, unit: str) -> str:
    """A gain's magnitude in dB, dBΩ for a V/A gain (20·log10 of ohms)."""
    if value is None or not isfinite(value) or value == 0:
        return NONE
    return decibel(20 * log10(abs(value)), "dBΩ" if unit == "V/A" else "dB")


def target(name: str, value: float | None, gain_unit: str) -> str:
    """A target's wanted or reached figure with its unit."""
    if name == "gain":
        return gain(value, gain_unit)
    if name == "noise":
        return eng(value, "V/√Hz" if gain_unit == "V/V" else "A/√Hz")
    if name == "peaking":
        return decibel(value, "dB")
    if name in ("overshoot", "sag", "yield"):
        return share(value)
    return eng(value, _TARGET_UNITS.get(name, ""))


def signed(delta: float | None, unit: str) -> str:
    """A change in few cells, its sign written: "+0.31" (dB), "-11k" (Hz, Ω, F), "+3" (%); "" for what would not show.

    A plain number such as K has the unit "".
    """
    if delta is None or not isfinite(delta):
        return ""
    size = abs(delta)
    if unit == "dB":
        text = f"{delta:+.{2 if size < 9.995 else 1}f}"
    elif unit == "%":
        text = f"{delta:+.0f}"
    elif unit:
        text = engineering(delta, "", 2)
        text = text if delta < 0 else f"+{text}"
    else:
        text = f"{delta:+.{3 if size < 0.0995 else 2 if size < 0.995 else 1 if size < 9.95 else 0}f}"
    return text if any(digit in text for digit in "123456789") else ""
