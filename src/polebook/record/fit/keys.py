"""The keys that a fit may set, and the coordinates that it moves them in.

What has to be there goes by its logarithm. What may also be 0 (a stray, any high-role capacitance) goes by
x = ln(1 + value/scale), which is even in the value near 0 and in its logarithm far above: so a fit may begin where
the file has nothing, and end there.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, replace
from math import exp, expm1, log, log1p
from typing import Any

from polebook.chain.located import PathRefused
from polebook.chain.model import Chain
from polebook.chain.paths import locate
from polebook.chain.said import said
from polebook.quantity import DIMENSIONS

REACH = 1e4  # how many times more or less than it is a value may become
LEAST = 1e-9  # of its scale, for a value that may be 0: as good as nothing, and still a part
BEGINS = {"capacitance": 1e-12, "inductance": 1e-9, "resistance": 1.0}
"""Where a value begins that the file does not have, until it is known what it does."""
_NO_SIZE = frozenset({"temperature", "decibel", "share"})
_NO_NETWORK = frozenset({"target", "tolerance", "preferred", "bench"})
_ENDS = ("source.resistance", "load.resistance")
STRAY = "stray"


@dataclass(frozen=True, slots=True)
class Key:
    """One free key.

    path       among the chain's numbers, "Q1.stray";  dimension  of quantity.DIMENSIONS
    now        the file's size, 0 where it has none;  sign  of the value, which stays
    optional   it may be 0
    scale      of an optional one: where x turns from even in the value to even in its logarithm
    """

    path: str
    dimension: str
    now: float
    sign: float
    optional: bool
    scale: float = 0.0

    @property
    def start(self) -> float:
        """The size that a fit begins at."""
        return self.now or self.scale or BEGINS.get(self.dimension, 1.0)

    def x(self, size: float) -> float:
        return log1p(size / self.scale) if self.optional else log(size)

    def size(self, x: float) -> float:
        return self.scale * expm1(x) if self.optional else exp(x)

    def slope(self, size: float) -> float:
        """d size/dx."""
        return size + self.scale if self.optional else size

    @property
    def bounds(self) -> tuple[float, float]:
        """Of x."""
        low = LEAST * self.scale if self.optional else self.start / REACH
        return self.x(low), self.x(REACH * max(self.start, self.scale))


def free(chain: Chain, data: Mapping[str, Any], words: Sequence[str], reference: bool) -> tuple[Key, ...]:
    """The keys of `words`, else the wiring capacitance of every stage.

    data       the content of the file;  reference  the sweep is between a reference resistance
    Raises ProblemsFound for a path that leads to nothing that a fit can set.
    """
    paths = [_path(chain, data, word) for word in words] if words else list(_strays(chain))
    if not paths:
        raise PathRefused("the chain has no stage with a stray", "without --free the strays are fitted",
                          "name what may change, such as --free source.capacitance")
    return tuple(_key(chain, data, path, reference) for path in dict.fromkeys(paths))


def _strays(chain: Chain) -> Iterator[str]:
    return (f"{stage.name}.{STRAY}" for stage in chain.stages if not stage.left_out)


def _path(chain: Chain, data: Mapping[str, Any], word: str) -> str:
    """The path among the chain's numbers: a stage named by its position goes by its name."""
    found = locate(word, data)
    if found.path[0] == "stage" and isinstance(found.path[1], int):
        return chain.stages[found.path[1]].name + found.number[found.number.index("."):]
    return found.number


def _key(chain: Chain, data: Mapping[str, Any], path: str, reference: bool) -> Key:
    param = locate(path, data).param
    dimension = param.dimension if param else ""
    if param is None or dimension not in DIMENSIONS or dimension in _NO_SIZE or path.partition(".")[0] in _NO_NETWORK:
        raise PathRefused(f"{said(path)} can't be fitted", "it is no size that a response follows from",
                          "name a value such as Q1.stray, Q2.rc or device.D.ft")
    if reference and path in _ENDS:
        raise PathRefused(f"{said(path)} can't be fitted to this sweep",
                          "S parameters are told between their own reference resistance, whatever the file has there",
                          "name another key")
    now = chain.get(path) or 0.0
    optional = param.sign == "nonnegative" and ".arms." not in path
    if not now and not optional:
        why = "it would short what stands beside it" if ".arms." in path else "without it that place is open"
        raise PathRefused(f"{said(path)} is {'zero' if chain.get(path) == 0.0 else 'absent'}",
                          f"a fit has no value to begin at, and {why}",
                          f"give it one: polebook set FILE {path} {DIMENSIONS[dimension].example}")
    return Key(path, dimension, abs(now), -1.0 if now < 0 else 1.0, optional,
               (abs(now) or BEGINS.get(dimension, 1.0)) if optional else 0.0)


def scaled(key: Key, scale: float) -> Key:
    """An optional key with its scale by what it does."""
    return replace(key, scale=scale) if key.optional and scale > 0.0 else key
