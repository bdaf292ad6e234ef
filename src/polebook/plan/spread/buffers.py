"""Arrays of one length, lent out and taken back: what is at work stays in the processor's cache."""

from __future__ import annotations

from collections.abc import Callable
from functools import partial
from typing import TYPE_CHECKING, Any, TypeAlias

import numpy as np

if TYPE_CHECKING:
    from numpy.typing import NDArray

Lane: TypeAlias = "NDArray[Any]"
"""A value for each build: float at midband, complex over frequency."""


class Buffers:
    """Hands out lanes and keeps the list of operations on them.

    A lane from `take` may be written; others (`own`) hold what a step only reads.
    """

    def __init__(self, size: int, dtype: type) -> None:
        self.size, self.dtype = size, dtype
        self.operations: list[Callable[[], object]] = []
        self.counts: dict[str, int] = {}
        self._free: list[Lane] = []
        self._lent: dict[int, Lane] = {}

    def own(self) -> Lane:
        """A lane for good, of zeros."""
        return np.zeros(self.size, self.dtype)

    def take(self) -> Lane:
        """A lane to write to, whatever it holds."""
        lane = self._free.pop() if self._free else np.zeros(self.size, self.dtype)
        self._lent[id(lane)] = lane
        return lane

    def lent(self, lane: Lane) -> bool:
        """Whether the lane came from `take` and has not been given back."""
        return id(lane) in self._lent

    def give_back(self, *lanes: Lane | None) -> None:
        """Takes lanes back; those that are no loan are left alone."""
        for lane in lanes:
            if lane is not None and self._lent.pop(id(lane), None) is not None:
                self._free.append(lane)

    def do(self, operation: Callable[..., object], *operands: Any) -> None:
        """Enters an operation; the last operand is the lane that it writes."""
        name = getattr(operation, "__name__", str(operation))
        real = "" if operands[-1].dtype == np.complex128 else " of reals"
        self.counts[name + real] = self.counts.get(name + real, 0) + 1
        self.operations.append(partial(operation, *operands))

    def put(self, operation: Callable[..., object], *operands: Any) -> Lane:
        """Enters an operation into a new lane, and returns that."""
        lane = self.take()
        self.do(operation, *operands, lane)
        return lane

    def into(self, old: Lane, operation: Callable[..., object], other: Lane) -> Lane:
        """old (operation) other, in place of either that is lent; `other` is given back."""
        if self.lent(old):
            self.do(operation, old, other, old)
            self.give_back(other)
            return old
        if self.lent(other):
            self.do(operation, old, other, other)
            return other
        return self.put(operation, old, other)
