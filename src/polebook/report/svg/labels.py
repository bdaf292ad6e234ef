"""Words set beside what they name, where they cover neither one another nor a curve."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from itertools import pairwise

from polebook.report.svg.sheet import SIZE, Point, Sheet, wide

Box = tuple[float, float, float, float]  # left, top, right, bottom
_AWAY = (7.0, 20.0, 36.0, 56.0, 80.0)  # px from the point, tried one after the other
_FAR = 15.0  # px from which a line leads to the point
_LINE, _CROSSED = 30.0, 100.0  # px² that a covered line counts for, and other words that the line to the point crosses
_SIDES = {"ne": (1, -1), "nw": (-1, -1), "se": (1, 1), "sw": (-1, 1), "e": (1, 0), "w": (-1, 0), "n": (0, -1),
          "s": (0, 1)}
ALL = tuple(_SIDES)


class Labels:
    """The words of one frame. What they must keep clear of is told first."""

    def __init__(self, sheet: Sheet, left: float, top: float, right: float, bottom: float) -> None:
        self._sheet = sheet
        self._room: Box = (left, top, right, bottom)
        self._boxes: list[Box] = []
        self._lines: list[tuple[Point, Point]] = []

    def shun(self, points: Sequence[Point]) -> None:
        """Words keep off this line."""
        self._lines += pairwise(points)

    def block(self, left: float, top: float, right: float, bottom: float) -> None:
        """Words keep out of this box."""
        self._boxes.append((left, top, right, bottom))

    def put(
        self, words: str, x: float, y: float, sides: Sequence[str] = ALL, bold: bool = False, fewer: str = ""
    ) -> None:
        """Sets words at the first of the sides of a point on which they are clear; fewer words where they nowhere are.

        Where these are not clear either, they stand where they cover least.
        """
        tried = [(cost + (told is not words), told, box, far) for told in filter(None, (words, fewer))
                 for cost, box, far in self._tried(told, x, y, sides, bold)]
        _, told, box, far = min(tried, key=lambda one: one[0])
        if far:
            near = _nearest(box, x, y)
            self._sheet.line(x, y, *near, "thin")
            self.shun([(x, y), near])
        self._boxes.append(box)
        self._sheet.rect(box[0], box[1], box[2] - box[0], box[3] - box[1], "blank")
        self._sheet.text(box[0] + 2, box[3] - 4, told, bold=bold)

    def _tried(
        self, words: str, x: float, y: float, sides: Sequence[str], bold: bool
    ) -> Iterator[tuple[float, Box, bool]]:
        """(how much would be covered, the box, whether it is far from its point), near places first."""
        across, tall = wide(words, SIZE, bold) + 4, SIZE + 4
        for at, away in enumerate(_AWAY):
            for side in sides:
                right, down = _SIDES[side]
                slant = 0.7 if right and down else 1.0
                left = x + right * away * slant - (0 if right > 0 else across if right < 0 else across / 2)
                top = y + down * away * slant - (0 if down > 0 else tall if down < 0 else tall / 2)
                box = self._held((left, top, left + across, top + tall))
                covered = self._covered(box)
                if away > _FAR:
                    covered += _CROSSED * sum(_meets((x, y), _nearest(box, x, y), other) for other in self._boxes
                                              if not other[0] <= x <= other[2] or not other[1] <= y <= other[3])
                yield covered + at * 1e-3, box, away > _FAR
                if not covered:
                    return

    def _held(self, box: Box) -> Box:
        """The box moved into the room."""
        left, top, right, bottom = self._room
        over = max(left + 1 - box[0], 0.0) or min(right - 1 - box[2], 0.0)
        down = max(top + 1 - box[1], 0.0) or min(bottom - 1 - box[3], 0.0)
        return box[0] + over, box[1] + down, box[2] + over, box[3] + down

    def _covered(self, box: Box) -> float:
        """How much a box would cover: areas of other boxes, and lines."""
        area = sum(max(min(box[2], other[2]) - max(box[0], other[0]), 0.0)
                   * max(min(box[3], other[3]) - max(box[1], other[1]), 0.0) for other in self._boxes)
        return area + _LINE * sum(_meets(begin, end, box) for begin, end in self._lines)


def _nearest(box: Box, x: float, y: float) -> Point:
    """The point of a box that lies nearest to another one."""
    return min(max(x, box[0]), box[2]), min(max(y, box[1]), box[3])


def _meets(begin: Point, end: Point, box: Box) -> bool:
    """Whether a straight line comes into a box."""
    low, high = 0.0, 1.0
    for axis in (0, 1):
        first, step = begin[axis], end[axis] - begin[axis]
        if step == 0.0:
            if not box[axis] < first < box[axis + 2]:
                return False
            continue
        near, far = sorted(((box[axis] - first) / step, (box[axis + 2] - first) / step))
        low, high = max(low, near), min(high, far)
    return low < high
