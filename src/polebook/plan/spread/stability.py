"""How many poles of each build have a positive real part, from those of the nominal chain.

The determinant of a build over that of the nominal chain turns, from the lowest to the highest frequency, by W; where
the nominal chain has n poles on the right, the build has n - W/pi (argument principle, as in solve.winding; both have
as many poles in all). The ratio turns little, so a coarse grid will do. It is taken in factors of a stage or some, and
where one of them turns by more than a radian between two frequencies, the builds for which it does are looked at in
between, by halves, until it does no more. A pole near the axis is not stepped over: the build's determinant then leaps
by nearly pi from one frequency to the next, the nominal one turns by little there (see `grid`). What still leaps over
a hair's breadth has a pole or a zero on the axis itself (a lossless trap), of the build or of the nominal chain; it has
no direction. Both chains have the same of them, which count as those to the left of the axis do (solve.winding).
"""

from __future__ import annotations

from collections.abc import Callable
from typing import TYPE_CHECKING, TypeAlias

import numpy as np

from polebook.plan.spread.buffers import Lane
from polebook.plan.spread.normal import Array
from polebook.solve.sweep import NARROW

if TYPE_CHECKING:
    from numpy.typing import NDArray

Whole: TypeAlias = "NDArray[np.int64]"
Angles: TypeAlias = "Callable[[Whole, Array], Array]"  # (builds, Hz) -> (factors, builds) rad

STEP = 1.0  # rad that the ratio of one factor may turn between two frequencies
WHOLE = 0.25  # half turns by which a count may be off a whole number
ROUNDS = 45
UNTOLD = -1
TURN = 2.0 * np.pi


class Turning:
    """The angle of one lane of `size` builds over the nominal chain's, from one frequency to the next."""

    def __init__(self, size: int) -> None:
        self.now, self.before, self.step = np.zeros(size), np.zeros(size), np.zeros(size)
        self._ratio, self._whole = np.zeros(size, dtype=complex), np.zeros(size)

    def at(self, lane: Lane, reference: complex) -> None:
        """At the next frequency: `now` is the angle in rad, `step` what it turned since, by the shorter way."""
        self.now, self.before = self.before, self.now
        np.multiply(lane, 1.0 / reference, out=self._ratio)
        np.arctan2(self._ratio.imag, self._ratio.real, out=self.now)
        np.subtract(self.now, self.before, out=self.step)
        np.multiply(self.step, 1.0 / TURN, out=self._whole)
        np.rint(self._whole, out=self._whole)
        np.multiply(self._whole, TURN, out=self._whole)
        np.subtract(self.step, self._whole, out=self.step)

    def far(self, limit: float) -> NDArray[np.bool_]:
        """Which builds turned by more than `limit`, or are no number."""
        np.abs(self.step, out=self._whole)
        return ~(self._whole <= limit)


def turn(before: Array, after: Array) -> Array:
    """From one angle to another, by the shorter way."""
    step = after - before
    step -= TURN * np.rint(step * (1.0 / TURN))
    return step


class Turns:
    """Adds up the turns of `size` builds: `at` for each frequency of the grid, rising, then `right`."""

    def __init__(self, size: int, factors: int) -> None:
        self._sum = np.zeros(size)
        self._factors = [Turning(size) for _ in range(factors)]
        self._far: list[tuple[Whole, float, float, Array, Array]] = []
        self._hz = 0.0

    def begin(self) -> None:
        """Anew, for other builds."""
        self._sum.fill(0.0)
        self._far.clear()
        self._hz = 0.0

    def at(self, hz: float, products: list[Lane], nominal: list[complex]) -> None:
        """The products of all builds at the next frequency, Hz, and those of the nominal chain."""
        for factor, product, reference in zip(self._factors, products, nominal, strict=True):
            factor.at(product, reference)
        if self._hz:
            self._add(hz)
        self._hz = hz

    def _add(self, hz: float) -> None:
        far = self._factors[0].far(STEP)
        for factor in self._factors[1:]:
            far |= factor.far(STEP)
        for factor in self._factors:
            if far.any():
                factor.step[far] = 0.0
            self._sum += factor.step
        if far.any():
            builds = np.nonzero(far)[0]
            before, now = (np.array([getattr(factor, name)[builds] for factor in self._factors])
                           for name in ("before", "now"))
            self._far.append((builds, self._hz, hz, before, now))

    def right(self, nominal: int, angles: Angles, asked: NDArray[np.bool_]) -> Whole:
        """Poles on the right by build; UNTOLD where the count is no whole number, or nobody `asked`.

        angles  the ratio's angles by factor, of some builds at a frequency each
        """
        for far, low, high, left, right in self._far:
            kept = asked[far]
            if kept.any():
                self._refine(far[kept], low, high, left[:, kept], right[:, kept], angles)
        half_turns = self._sum / np.pi
        count = nominal - np.rint(half_turns)
        with np.errstate(invalid="ignore"):
            told = asked & (np.abs(half_turns - np.rint(half_turns)) < WHOLE) & (count >= 0)
        return np.where(told, count, UNTOLD).astype(np.int64)

    def _refine(self, builds: Whole, low: float, high: float, left: Array, right: Array, angles: Angles) -> None:
        """Halves the interval for all these builds, then the halves in which it still turns far, and so on."""
        lows, highs = np.full(builds.size, low), np.full(builds.size, high)
        for _ in range(ROUNDS):
            middle = np.sqrt(lows * highs)
            between = angles(builds, middle)
            builds = np.concatenate([builds, builds])
            lows, highs = np.concatenate([lows, middle]), np.concatenate([middle, highs])
            left, right = np.concatenate([left, between], axis=1), np.concatenate([between, right], axis=1)
            step = turn(left, right)
            far = ~(np.abs(step).max(axis=0) <= STEP)
            np.add.at(self._sum, builds[~far], step[:, ~far].sum(axis=0))
            if not far.any():
                return
            if (highs - lows <= 4.0 * NARROW * highs).all():
                return  # what leaps still counts as no turn, see above
            builds, lows, highs, left, right = builds[far], lows[far], highs[far], left[:, far], right[:, far]
