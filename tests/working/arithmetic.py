"""Reads the arithmetic of a printed working, apart from the program's own reader: numbers with their units, and how
far the last printed digit leaves them open, carried through every operation."""

from __future__ import annotations

import math
import re
from dataclasses import dataclass

UNITS = ("V", "A", "Ω", "F", "H", "S", "s", "Hz", "W", "C", "K")
PLAIN = ("dB", "dBΩ", "°C", "%", "rad")
PREFIX = {"f": -15, "p": -12, "n": -9, "u": -6, "m": -3, "": 0, "k": 3, "M": 6, "G": 9, "T": 12}
NUMBER = r"[0-9]+(?:\.[0-9]+)?(?:e-?[0-9]+)?"
QUANTITY = re.compile(rf"({NUMBER})(?: ?({'|'.join(PLAIN)})| ?([fpnumkMGT]?)({'|'.join(UNITS)}))?(?![\w])")
SYMBOL = re.compile(r"[^\W\d][\w.]*")


@dataclass(frozen=True)
class Rough:
    """A number and how far it may be off."""

    value: float
    off: float = 0.0

    def __add__(self, other):
        return Rough(self.value + other.value, self.off + other.off)

    def __sub__(self, other):
        return Rough(self.value - other.value, self.off + other.off)

    def __neg__(self):
        return Rough(-self.value, self.off)

    def __abs__(self):
        return Rough(abs(self.value), self.off)

    def __mul__(self, other):
        off = abs(self.value) * other.off + abs(other.value) * self.off + self.off * other.off
        return Rough(self.value * other.value, off)

    def __truediv__(self, other):
        least = abs(other.value) - other.off
        off = (self.off + abs(self.value / other.value) * other.off) / least if least > 0 else math.inf
        return Rough(self.value / other.value, off)

    def __pow__(self, other):
        base, power = self.value, other.value
        slope = abs(power * base ** (power - 1.0)) if base else 0.0
        grown = abs(base**power * math.log(base)) if base > 0 else 0.0
        return Rough(base**power, 1.1 * (slope * self.off + grown * other.off))

    def through(self, function, slope):
        value = function(self.value)
        return Rough(value, 1.1 * abs(slope(self.value)) * self.off)


FUNCTIONS = {
    "sqrt": lambda x: x.through(math.sqrt, lambda v: 0.5 / math.sqrt(v) if v else 0.0),
    "ln": lambda x: x.through(math.log, lambda v: 1.0 / v),
    "log10": lambda x: x.through(math.log10, lambda v: 1.0 / (v * math.log(10.0))),
    "exp": lambda x: x.through(math.exp, math.exp),
    "cos": lambda x: Rough(math.cos(x.value), 1.1 * abs(math.sin(x.value)) * x.off + x.off * x.off),
    "max": lambda *x: max(x, key=lambda one: one.value),
    "min": lambda *x: min(x, key=lambda one: one.value),
}


def printed(text):
    """A printed number, "-4.7 pF": its value, off by half its last digit; exact where six digits are not used up."""
    match = QUANTITY.fullmatch(text.lstrip("-"))
    assert match, text
    digits, _, exponent = match[1].partition("e")
    power = int(exponent or 0) + (PREFIX[match[3]] if match[4] else 0)
    value = float(f"{digits}e{power}")
    figures = digits.replace(".", "").lstrip("0")
    last = power - len(digits.partition(".")[2])
    if value and len(figures) < 6:  # its zeros are not printed
        last -= 6 - len(figures)
    off = 0.5 * 10.0**last if value else 1e-300
    return Rough(-value if text.startswith("-") else value, off)


class Reader:
    """A sum of products of signed powers. With symbols its numbers are exact; without, all are printed ones."""

    def __init__(self, text, symbols):
        self.rest, self.symbols, self.put_in = text.strip(), symbols or {}, symbols is None

    def whole(self):
        value = self.sum()
        assert not self.rest, f"left over: {self.rest!r}"
        return value

    def next(self, *marks):
        for mark in marks:
            if self.rest.startswith(mark):
                self.rest = self.rest[len(mark) :].lstrip()
                return mark
        return ""

    def sum(self):
        value = self.product()
        while mark := self.next("+", "-"):
            value = value + self.product() if mark == "+" else value - self.product()
        return value

    def product(self):
        value = self.signed()
        while mark := self.next("·", "/"):
            value = value * self.signed() if mark == "·" else value / self.signed()
        return value

    def signed(self):
        if self.next("-"):
            return -self.signed()
        base = self.atom()
        return base ** self.signed() if self.next("^") else base

    def atom(self):
        if self.next("("):
            value = self.sum()
            assert self.next(")")
            return value
        if self.next("|"):
            value = self.sum()
            assert self.next("|")
            return abs(value)
        if match := QUANTITY.match(self.rest):
            self.rest = self.rest[match.end() :].lstrip()
            return printed(match[0]) if self.put_in else Rough(float(match[1]))
        match = SYMBOL.match(self.rest)
        assert match, f"nothing to read: {self.rest!r}"
        self.rest = self.rest[match.end() :].lstrip()
        if match[0] in FUNCTIONS and self.next("("):
            values = [self.sum()]
            while self.next(","):
                values.append(self.sum())
            assert self.next(")")
            return FUNCTIONS[match[0]](*values)
        return Rough(math.pi) if match[0] == "pi" else self.symbols[match[0]]


def read(text, symbols=None):
    """The value of an expression, with what its printed numbers leave open."""
    return Reader(text, symbols).whole()
