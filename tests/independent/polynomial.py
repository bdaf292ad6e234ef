"""det(G + sC) as a polynomial: its degree exactly, its coefficients and its roots to 50 digits and more.

The degree, and the power of s that divides it, are counted in whole numbers: every entry of the network is a binary
fraction, so that the determinant can be had without any rounding as a remainder of a prime. The coefficients come
from the determinant at whole multiples of one s in so many digits that the smallest of them is left with fifty; two
that must be zero are computed beside them to prove it. Roots: all at once by the method of Ehrlich and Aberth from
the Newton polygon of the coefficients, in digits enough that the last step lies below 10^-55 of the root.
"""

from __future__ import annotations

from collections.abc import Hashable, Mapping, Sequence
from itertools import pairwise
from typing import Any

from tests.independent.elimination import PRIME, Place, Plan, determinant, plan
from tests.independent.linear import mp

UNKNOWN_S = 618033988749894848204586834  # a value of s that nothing in a chain knows of
RATE = 10**6  # rad/s: the determinant is taken at whole multiples of it
GOOD = 55  # digits of every root


def remainder(value: Any) -> int:
    """A long real (an exact binary fraction) as a remainder of the prime."""
    sign, mantissa, exponent, _ = value._mpf_  # taken as it is: mpf() would round it
    return (-1) ** sign * int(mantissa) * pow(2, exponent, PRIME) % PRIME


class Polynomial:
    """det of the rows and columns of G + sC, as Σ c_k·s^k. G and C hold exact binary fractions.

    degree, order   the highest and the lowest power that stands; -1 where the determinant is zero
    """

    def __init__(
        self, G: Mapping[Place, Any], C: Mapping[Place, Any], rows: Sequence[Hashable], columns: Sequence[Hashable]
    ) -> None:
        inside = [(r, c) for r in rows for c in columns if (r, c) in G or (r, c) in C]
        self.G = {k: G.get(k, mp.mpf(0)) for k in inside}
        self.C = {k: C.get(k, mp.mpf(0)) for k in inside}
        self.exact = {k: (remainder(self.G[k]), remainder(self.C[k])) for k in inside}
        self.rows, self.columns = list(rows), list(columns)
        self.plan: Plan = plan({k: g + UNKNOWN_S * c for k, (g, c) in self.exact.items()}, rows, columns)
        self.order, self.degree = self._count()

    # -- counting ---------------------------------------------------------------------------------------------------

    def _count(self) -> tuple[int, int]:
        if self.plan.singular:
            return -1, -1
        most = sum(any(self.C[r, c] for c in self.columns if (r, c) in self.C) for r in self.rows)
        points = [UNKNOWN_S + i for i in range(most + 1)]
        values = [
            determinant(self.plan, {k: (g + s * c) % PRIME for k, (g, c) in self.exact.items()}, PRIME) for s in points
        ]
        standing = [k for k, c in enumerate(_monomials(points, values, PRIME)) if c]
        return standing[0], standing[-1]

    # -- coefficients -----------------------------------------------------------------------------------------------

    def coefficients(self) -> list[Any]:
        """c of Σ c_k·(s/RATE)^k, for k from `order` to `degree`, each to 60 digits and more."""
        count = self.degree - self.order
        digits = 120 + 16 * count
        while True:
            with mp.workdps(digits):
                points = [mp.mpf(k) for k in range(1, count + 4)]
                values = [self.value(RATE * x) / x**self.order for x in points]
                found = _monomials(points, values)
            wanted, nothing = found[: count + 1], found[count + 1 :]
            if max(map(abs, nothing)) < min(abs(c) for c in wanted if c) * mp.mpf(10) ** -100:
                return wanted
            digits *= 2

    def entries(self, s: Any) -> dict[Place, Any]:
        return {k: g + s * self.C[k] for k, g in self.G.items()}

    def value(self, s: Any) -> Any:
        """The determinant at s (but for a sign that is the same for every s)."""
        return determinant(self.plan, self.entries(s))

    def roots(self) -> list[Any]:
        """All that are not 0, to 50 digits, by rising size; real ones as such."""
        return [x * RATE for x in roots(self.coefficients())] if self.degree > self.order else []


def _monomials(points: Sequence[Any], values: Sequence[Any], modulus: int | None = None) -> list[Any]:
    """Coefficients of the polynomial through the points: Newton's divided differences, multiplied out."""
    n = len(points)
    differences = list(values)
    for level in range(1, n):
        for i in range(n - 1, level - 1, -1):
            rise, run = differences[i] - differences[i - 1], points[i] - points[i - level]
            differences[i] = rise * pow(run, -1, modulus) % modulus if modulus else rise / run
    out = [differences[-1]]
    for k in range(n - 2, -1, -1):
        out = [differences[k] - points[k] * out[0]] + [
            out[i - 1] - (points[k] * out[i] if i < len(out) else 0) for i in range(1, len(out) + 1)
        ]
        if modulus:
            out = [c % modulus for c in out]
    return out


def roots(c: Sequence[Any]) -> list[Any]:
    """Zeros of Σ c_k·x^k with c_0 and c_n not 0, to some 50 digits, by rising size."""
    digits = GOOD + 25
    while True:
        with mp.workdps(digits):
            found, worst = _aberth(c)
        if worst < mp.mpf(10) ** -GOOD:
            break
        digits *= 2
        if digits > 4000:
            raise ArithmeticError("roots that do not come apart")
    tiny = mp.mpf(10) ** (-GOOD + 5)
    clean = [mp.mpf(x.real) if abs(x.imag) < tiny * abs(x) else x for x in found]
    return sorted(clean, key=lambda x: (abs(x), mp.im(x)))


def _starts(c: Sequence[Any]) -> list[Any]:
    """Points on circles whose radii are the slopes of the upper hull of ln|c_k| (D. A. Bini, 1996)."""
    level = [(k, mp.log(abs(x))) for k, x in enumerate(c) if x != 0]
    hull: list[tuple[int, Any]] = []
    for k, y in level:
        while len(hull) > 1 and (hull[-1][1] - hull[-2][1]) * (k - hull[-1][0]) <= (y - hull[-1][1]) * (
            hull[-1][0] - hull[-2][0]
        ):
            hull.pop()
        hull.append((k, y))
    out = []
    for (k0, y0), (k1, y1) in pairwise(hull):
        radius = mp.exp((y0 - y1) / (k1 - k0))
        for i in range(k1 - k0):
            out.append(radius * mp.expj(2 * mp.pi * (i + mp.mpf("0.3")) / (k1 - k0) + mp.mpf("0.7") + k0))
    return out


def _aberth(c: Sequence[Any]) -> tuple[list[Any], Any]:
    """Roots, and the greatest of their last steps (relative) with what rounding can do added."""
    x = _starts(c)
    n = len(x)
    slopes = [k * a for k, a in enumerate(c)][1:]
    sizes = [abs(a) for a in c]
    noise = mp.mpf(10) ** (-mp.dps + 1)
    done = [False] * n
    last = [mp.mpf(1)] * n
    for _ in range(40 + 4 * n):
        for i in range(n):
            if done[i]:
                continue
            value, slope = _horner(c, x[i]), _horner(slopes, x[i])
            size = _horner(sizes, abs(x[i]))
            repulsion = sum((1 / (x[i] - x[j]) for j in range(n) if j != i), mp.mpc(0))
            newton = value / slope
            step = newton / (1 - newton * repulsion)
            last[i] = (abs(step) + noise * size / abs(slope)) / abs(x[i])
            x[i] = x[i] - step
            done[i] = abs(value) < noise * size or abs(step) < noise * abs(x[i])
        if all(done):
            return x, max(last)
    return x, mp.inf


def _horner(c: Sequence[Any], x: Any) -> Any:
    total = c[-1]
    for a in reversed(c[:-1]):
        total = total * x + a
    return total
