"""The frame of a plot: scales in px, ticks with their labels, the grid; and curves, cut off where it ends."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Sequence
from dataclasses import dataclass
from itertools import pairwise
from math import floor, log, log10

from polebook.report.svg.sheet import Point, Sheet
from polebook.report.ticks import MOST_MINOR, Ticks, decades

CELL = 7.5  # px that a figure of a tick's label takes
_SLACK = 1e-6  # px that an end may be missed by


@dataclass(frozen=True, slots=True)
class Scale:
    """Values from low to high lie between two px: evenly, or by equal ratios."""

    low: float
    high: float
    begin: float
    end: float
    log: bool = False

    def at(self, value: float) -> float:
        """Where a value lies, px; also beyond the ends."""
        share = log(value / self.low) / log(self.high / self.low) if self.log \
            else (value - self.low) / (self.high - self.low)
        return self.begin + share * (self.end - self.begin)

    def holds(self, value: float | None) -> bool:
        """Whether a value lies between the ends, or on one of them."""
        if value is None or (self.log and value <= 0):
            return False
        low, high = sorted((self.begin, self.end))
        return low - _SLACK <= self.at(value) <= high + _SLACK

    def inside(self, value: float) -> float:
        """As `at`, held within the ends."""
        return self.at(min(max(value, self.low), self.high))

    def decades(self, upright: bool = False) -> Ticks:
        """Ticks of equal ratios, as many as their labels have room for."""
        room = abs(self.end - self.begin) / (2 * CELL if upright else CELL)
        return decades(self.low, self.high, int(room), 1 if upright else 2, upright)

    def minor(self) -> Iterator[float]:
        """2 to 9 times each power of ten, where those lines would not run together."""
        if self.log and log10(self.high / self.low) <= MOST_MINOR:
            for power in range(floor(log10(self.low)), floor(log10(self.high)) + 1):
                yield from (m * 10.0**power for m in range(2, 10) if self.low < m * 10.0**power < self.high)


@dataclass(frozen=True, slots=True)
class Frame:
    """A plot's own room: x from left to right, y from the bottom up."""

    sheet: Sheet
    x: Scale
    y: Scale

    def grid(self, across: Ticks, up: Ticks) -> None:
        """Lines behind the curves."""
        left, right, top, bottom = self.x.begin, self.x.end, self.y.end, self.y.begin
        for value in [*self.x.minor(), *(value for value, _ in across)]:
            self.sheet.line(self.x.at(value), top, self.x.at(value), bottom, "grid")
        for value, _ in up:
            self.sheet.line(left, self.y.at(value), right, self.y.at(value), "grid")

    def border(self, across: Ticks, up: Ticks, across_title: str, up_title: str, labelled: bool = True) -> None:
        """The frame over the curves, with ticks, labels and what the axes are; `labelled`: those along the bottom."""
        left, right, top, bottom = self.x.begin, self.x.end, self.y.end, self.y.begin
        self.sheet.rect(left, top, right - left, bottom - top, "frame")
        for value, label in across:
            self.sheet.line(self.x.at(value), bottom, self.x.at(value), bottom + 4, "axis")
            if labelled:
                self.sheet.text(self.x.at(value), bottom + 17, label, "middle")
        for value, label in up:
            self.sheet.line(left - 4, self.y.at(value), left, self.y.at(value), "axis")
            self.sheet.text(left - 7, self.y.at(value) + 4, label, "end")
        if across_title and labelled:
            self.sheet.text((left + right) / 2, bottom + 35, across_title, "middle")
        self.sheet.text(left - 44, (top + bottom) / 2, up_title, "middle", turned=True)

    def curve(self, x: Sequence[float], y: Sequence[float | None], look: str) -> list[list[Point]]:
        """Draws y over x where it is within the frame; the pieces that were drawn, px."""
        pieces = list(self.pieces(x, y))
        for piece in pieces:
            self.sheet.path(piece, look)
        return pieces

    def pieces(self, x: Iterable[float], y: Iterable[float | None]) -> Iterator[list[Point]]:
        """The parts of a curve that lie within the frame, px; a gap where y is None."""
        piece: list[Point] = []
        last: Point | None = None
        for one, value in zip(x, y, strict=True):
            point = None if value is None or not self.x.holds(one) else (self.x.at(one), self.y.at(value))
            for begun, joined in self._between(last, point):
                if begun and piece:
                    yield piece
                    piece = []
                piece.append(joined)
            if point is None and piece:
                yield piece
                piece = []
            last = point
        if piece:
            yield piece

    def _between(self, last: Point | None, point: Point | None) -> Iterator[tuple[bool, Point]]:
        """What of the way to the next point lies within: (whether it begins anew there, point)."""
        if point is None:
            return
        if last is None:
            if self._within(point):
                yield True, point
            return
        inside = [last] if self._within(last) else []
        crossed = [edge for edge in (self.y.begin, self.y.end) if (last[1] - edge) * (point[1] - edge) < 0]
        for edge in sorted(crossed, key=lambda edge: abs(edge - last[1])):
            share = (edge - last[1]) / (point[1] - last[1])
            inside.append((last[0] + share * (point[0] - last[0]), edge))
        if self._within(point):
            inside.append(point)
        begun = not self._within(last)
        for one in inside[0 if begun else 1:]:
            yield begun, one
            begun = False

    def _within(self, point: Point) -> bool:
        return self.y.end - _SLACK <= point[1] <= self.y.begin + _SLACK


def crossing(piece: Sequence[Point], x: float) -> float | None:
    """Height of a drawn piece at x, px; None where it does not reach that far."""
    for (x1, y1), (x2, y2) in pairwise(piece):
        if x1 <= x <= x2:
            return y1 if x2 == x1 else y1 + (y2 - y1) * (x - x1) / (x2 - x1)
    return None
