"""The arithmetic of a working's text: what is printed is what is computed.

    + - · / ^   |x|   ( )   sqrt ln log10 exp cos max min   pi   numbers   symbols such as R_1, V_B, tau_Q2.cmu
"""

from __future__ import annotations

import math
import re
from collections.abc import Callable, Mapping

_TOKEN = re.compile(r"\s*(?:([0-9]+\.?[0-9]*(?:e[+-]?[0-9]+)?)|([^\W\d][\w.]*)|([-+·/^|(),]))")
_FUNCTIONS: Mapping[str, Callable[..., float]] = {
    "sqrt": math.sqrt, "ln": math.log, "log10": math.log10, "exp": math.exp, "cos": math.cos, "max": max, "min": min,
}


def evaluate(text: str, symbols: Mapping[str, float]) -> float:
    """The value of an expression. Raises ValueError where it is none, KeyError for an unknown symbol."""
    return _Reader(_tokens(text), symbols).whole(text)


def _tokens(text: str) -> list[str]:
    found, at = [], 0
    text = text.rstrip()
    while at < len(text):
        match = _TOKEN.match(text, at)
        if not match:
            raise ValueError(f"no token at {text[at:]!r}")
        found.append(match[match.lastindex or 0].strip())
        at = match.end()
    return [*found, ""]


class _Reader:
    """Recursive descent: sums of products of powers."""

    def __init__(self, tokens: list[str], symbols: Mapping[str, float]) -> None:
        self.tokens, self.symbols, self.at = tokens, symbols, 0

    def whole(self, text: str) -> float:
        value = self._sum()
        if self.tokens[self.at]:
            raise ValueError(f"{self.tokens[self.at]!r} is left over in {text!r}")
        return value

    def _take(self, *wanted: str) -> str:
        token = self.tokens[self.at]
        if token not in wanted or not token:
            return ""
        self.at += 1
        return token

    def _sum(self) -> float:
        value = self._product()
        while sign := self._take("+", "-"):
            term = self._product()
            value = value + term if sign == "+" else value - term
        return value

    def _product(self) -> float:
        value = self._signed()
        while sign := self._take("·", "/"):
            factor = self._signed()
            value = value * factor if sign == "·" else value / factor
        return value

    def _signed(self) -> float:
        return -self._signed() if self._take("-") else self._power()

    def _power(self) -> float:
        base = self._atom()
        return float(base ** self._signed()) if self._take("^") else base

    def _atom(self) -> float:
        token = self.tokens[self.at]
        self.at += 1
        if token in ("(", "|"):
            value = self._sum()
            self._close(")" if token == "(" else "|")
            return abs(value) if token == "|" else value
        if token in _FUNCTIONS and self._take("("):
            arguments = [self._sum()]
            while self._take(","):
                arguments.append(self._sum())
            self._close(")")
            return _FUNCTIONS[token](*arguments)
        if token[:1].isdigit():
            return float(token)
        if not token or token in "+-·/^),":
            raise ValueError(f"a value is missing before {token!r}")
        return math.pi if token == "pi" else self.symbols[token]

    def _close(self, token: str) -> None:
        if not self._take(token):
            raise ValueError(f"{token!r} is missing")
