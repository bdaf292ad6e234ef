"""Values that carry a derivative along: the elimination, run with them, gives slopes as exactly as it gives gains.

Forward differentiation (R. E. Wengert, A simple automatic derivative evaluation program, Commun. ACM 7, 1964; from
memory): every operation of the arithmetic does its rule of differentiation too, so that nothing is a difference of two
near values.
"""

from __future__ import annotations

from collections.abc import Iterator

from polebook.stages.stamper import Value


class Dual:
    """A value and its derivative, each a number or an array of one shape. All else in the arithmetic is constant."""

    __slots__ = ("slope", "value")
    __array_ufunc__ = None  # an array at the left leaves the operation to this class

    def __init__(self, value: Value, slope: Value) -> None:
        self.value, self.slope = value, slope

    @property
    def shape(self) -> tuple[int, ...]:
        """That of the values: what works on whole arrays of frequencies asks for it."""
        return tuple(self.value.shape)

    def __iter__(self) -> Iterator[Dual]:
        return (Dual(value, slope) for value, slope in zip(self.value, self.slope, strict=True))

    def __add__(self, other: Value) -> Dual:
        if isinstance(other, Dual):
            return Dual(self.value + other.value, self.slope + other.slope)
        return Dual(self.value + other, self.slope)

    __radd__ = __add__

    def __neg__(self) -> Dual:
        return Dual(-self.value, -self.slope)

    def __sub__(self, other: Value) -> Dual:
        return self.__add__(-other)

    def __rsub__(self, other: Value) -> Dual:
        return self.__neg__().__add__(other)

    def __mul__(self, other: Value) -> Dual:
        if isinstance(other, Dual):
            return Dual(self.value * other.value, self.slope * other.value + self.value * other.slope)
        return Dual(self.value * other, self.slope * other)

    __rmul__ = __mul__

    def __truediv__(self, other: Value) -> Dual:
        if isinstance(other, Dual):
            ratio = self.value / other.value
            return Dual(ratio, (self.slope - ratio * other.slope) / other.value)
        return Dual(self.value / other, self.slope / other)

    def __rtruediv__(self, other: Value) -> Dual:
        ratio = other / self.value
        return Dual(ratio, -ratio * self.slope / self.value)


def rate(of: Value) -> Value:
    """d ln(value): slope over value; 0 of a constant."""
    return of.slope / of.value if isinstance(of, Dual) else 0.0
