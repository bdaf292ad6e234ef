"""Times at which a transient is looked at: as dense as what is still felt of its modes asks for, and no denser.

Between neighbours t grows by no more than a share of itself, and the fastest oscillation that is still felt turns by
no more than a third of a radian.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from math import ceil, log, sqrt
from typing import TYPE_CHECKING

import numpy as np

from polebook.solve.transient import Transient

if TYPE_CHECKING:
    from polebook.solve.orthonormal import Floats

GROWTH = 1.0 / 24.0  # of t between neighbours
TURN = 0.35  # rad between neighbours
FAINT = 1e-10  # a term smaller than this share of the final value is no longer felt
SOON = 1e-3  # of the fastest mode's time: the first instant after 0
CHUNK = 512
MOST = 100_000  # points that a search may take


class TooLong(ArithmeticError):
    """What is looked for did not come within as many points as a search may take."""


@dataclass(frozen=True, slots=True)
class Piece:
    """`count` steps from start to stop (s), each the same share of t where `grows`, else of the same length."""

    start: float
    stop: float
    count: int
    grows: bool

    def times(self, first: int, last: int) -> Floats:
        """Instants number first to last, both included; number `count` is stop itself."""
        share = np.arange(first, last + 1) / self.count
        t = self.start * (self.stop / self.start) ** share if self.grows else (
            self.start + (self.stop - self.start) * share)
        result: Floats = np.clip(t, self.start, self.stop)
        return result


def fades(of: Transient, level: float) -> float:
    """A time (s) from which on no value exceeds `level`, to a hundredth of itself at most too late."""
    if of.rest(0.0) <= level:
        return 0.0
    early, late = 0.0, SOON / float(np.abs(of.poles).max())
    while of.rest(late) > level:
        early, late = late, 2.0 * late
    while late - early > 0.01 * late:
        middle = 0.5 * (early + late)
        early, late = (middle, late) if of.rest(middle) > level else (early, middle)
    return late


def pieces(of: Transient) -> list[Piece]:
    """From the first instant after 0 to where nothing is felt any more."""
    t, end = SOON / float(np.abs(of.poles).max()), fades(of, FAINT)
    result: list[Piece] = []
    for omega, death in [*_oscillations(of), (0.0, end)]:
        stop = min(death, end)
        if stop <= t:
            continue
        bend = min(stop, max(t, TURN / (GROWTH * omega))) if omega else stop
        if bend > t:
            result.append(Piece(t, bend, ceil(log(bend / t) / log(1.0 + GROWTH)), True))
        if stop > bend:
            result.append(Piece(bend, stop, ceil((stop - bend) * omega / TURN), False))
        t = stop
    return result


def _oscillations(of: Transient) -> list[tuple[float, float]]:
    """(rad/s, time in s from which on it is not felt) of every oscillating mode, the fastest first."""
    found = []
    crowd = of.poles.size
    for pole, size in zip(of.poles.tolist(), of.sizes.tolist(), strict=True):
        if pole.imag > 0 and size > FAINT:
            lives = log(size / FAINT) if of.residues is not None else crowd + 6.0 * sqrt(crowd) + 25.0
            found.append((pole.imag, lives / -pole.real))
    return sorted(found, reverse=True)


def onward(of: list[Piece]) -> Iterator[Floats]:
    """Instants from the first on, in chunks that begin where the one before ended. Raises TooLong."""
    seen = 0
    for piece in of:
        for first in range(0, piece.count, CHUNK):
            last = min(first + CHUNK, piece.count)
            yield piece.times(first, last)
            seen += last - first
            if seen > MOST:
                raise TooLong


def back(of: list[Piece], start: float) -> Iterator[Floats]:
    """Instants before `start` (s), the latest chunk first, each rising; each ends where the later one began.

    Raises TooLong.
    """
    seen = 0
    for piece in reversed(of):
        if piece.start >= start:
            continue
        last = piece.count
        if piece.stop > start:
            share = (log(start / piece.start) / log(piece.stop / piece.start) if piece.grows
                     else (start - piece.start) / (piece.stop - piece.start))
            last = min(ceil(share * piece.count), piece.count)
        while last > 0:
            first = max(0, last - CHUNK)
            yield piece.times(first, last)
            seen += last - first
            last = first
            if seen > MOST:
                raise TooLong
