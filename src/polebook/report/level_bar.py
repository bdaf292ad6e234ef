"""Levels as bars on one scale of dB over 1 V peak: noise floor, signal, headroom, clip level."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from math import ceil, floor, log10, sqrt

TICK = 20  # dB between two marks of the scale
NOISE, SIGNAL, UNDER, HEADROOM, CLIP = "·", "█", "x", "─", "|"
LABEL = 7  # cells that a label has for itself
Marks = tuple[float | None, float | None, float | None, float | None]


def marks(noise: float | None, smallest: float | None, largest: float | None, clip: float | None) -> Marks:
    """Levels of a node in dB over 1 V peak; None for one that is not known, or 0. Noise: the peak of a sine of its
    power.

    noise in V rms, the others in V peak
    """
    noise = None if noise is None else sqrt(2.0) * noise
    first, second, third, fourth = (20.0 * log10(volts) if volts else None
                                    for volts in (noise, smallest, largest, clip))
    return first, second, third, fourth


@dataclass(frozen=True, slots=True)
class Scale:
    """dB from `low` to `high` over so many cells."""

    low: int
    high: int
    wide: int

    @property
    def per_db(self) -> float:
        """Cells a dB."""
        return (self.wide - 1) / (self.high - self.low)

    def place(self, db: float) -> int:
        """The cell of a level."""
        return min(max(round((db - self.low) * self.per_db), 0), self.wide - 1)

    def labels(self) -> str:
        """The labels that have room, each over its place."""
        step = TICK * ceil(LABEL / (TICK * self.per_db)) if self.per_db else self.high - self.low
        line = [" "] * self.wide
        end = 0
        for db in range(self.low, self.high + 1, step):
            label = f"{db}"
            at = min(self.place(db), self.wide - len(label))
            if at >= end:
                line[at:at + len(label)] = label
                end = at + len(label) + 1
        return "".join(line).rstrip()

    def bar(self, levels: Marks) -> str:
        """One node's bar: the noise floor, what of the signal lies under it and over it, headroom, and the clip level.

        The clip level stands over a signal that goes past it.
        """
        noise, smallest, largest, clip = (None if db is None else self.place(db) for db in levels)
        begin = smallest if smallest is not None else largest
        end = largest if largest is not None else smallest
        cells = [" "] * (max((place for place in (noise, begin, end, clip) if place is not None), default=-1) + 1)

        def fill(first: int, last: int, sign: str) -> None:
            cells[first:last + 1] = sign * max(last + 1 - first, 0)

        if end is not None and clip is not None:
            fill(end, clip, HEADROOM)  # none where the signal goes past the clip level
        if noise is not None:
            fill(0, noise, NOISE)
        if begin is not None and end is not None:
            fill(begin, end, SIGNAL)
            if noise is not None:
                fill(begin, min(noise, end), UNDER)
        if clip is not None:
            cells[clip] = CLIP
        return "".join(cells)


def scale(levels: Iterable[Sequence[float | None]], wide: int) -> Scale | None:
    """The scale that has all of some levels (dB) on it; None where none is known."""
    known = [db for row in levels for db in row if db is not None]
    if not known or wide < 2:
        return None
    low, high = TICK * floor(min(known) / TICK), TICK * ceil(max(known) / TICK + 1e-9)
    return Scale(low, max(high, low + TICK), wide)
