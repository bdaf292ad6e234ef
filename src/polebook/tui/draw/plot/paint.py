"""A chart as lines: braille dots, or one sign a cell where there is ASCII alone."""

from __future__ import annotations

from collections.abc import Sequence
from math import floor, isfinite

import numpy as np

from polebook.report.look import cells
from polebook.tui.draw.pen import Pen, right
from polebook.tui.draw.plot import raster
from polebook.tui.draw.plot.axis import Axis
from polebook.tui.draw.plot.chart import Chart, Curve
from polebook.tui.lines import Line, Span

AXIS_ROWS = 2
"""Below the plot: the axis with its marks, and the labels."""
LEAST_GUTTER = 5
CURSOR = "select"


def painted(chart: Chart, room: int, rows: int, pen: Pen) -> list[Line]:
    """At most `rows` lines of at most `room` cells: the plot, its axis, the labels. None where there is no room."""
    tall, wide = rows - AXIS_ROWS, columns(chart, room, pen)
    if tall < 1 or wide < 2:
        return []
    gutter = _gutter(chart, pen)
    sheet = _Sheet(chart, wide, tall, pen)
    left_labels, right_labels = _labels(chart.y, tall, pen), _labels(chart.right, tall, pen)
    for level in chart.levels:
        up = cell_of(chart.y, level.y, tall, _tall(pen))
        if level.label and up is not None:
            left_labels.setdefault(tall - 1 - up, pen.text(level.label))
    lines: list[Line] = []
    for row in range(tall):
        label, ticked = left_labels.get(row, ""), row in left_labels
        begin = Span(f"{right(label, gutter)}{pen.sign('┤' if ticked else '│')}", "dim")
        end = [Span(f" {right_labels[row]}", "dim")] if row in right_labels else []
        lines.append((begin, *sheet.line(row), *end))
    return [*lines, *_foot(chart, gutter, wide, room, pen)]


def columns(chart: Chart, room: int, pen: Pen) -> int:
    """Cells that the plot itself has of `room`."""
    beyond = max([0, *(cells(pen.text(label)) for _, label in (chart.right.ticks if chart.right else ()))])
    return room - _gutter(chart, pen) - 1 - (beyond + 1 if chart.right else 0)


def _wide(pen: Pen) -> int:
    """Dots across a cell."""
    return 1 if pen.plain else raster.WIDE


def _tall(pen: Pen) -> int:
    """Dots down a cell."""
    return 1 if pen.plain else raster.TALL


def _gutter(chart: Chart, pen: Pen) -> int:
    return max([LEAST_GUTTER, *(cells(pen.text(label)) for _, label in chart.y.ticks)])


def cell_of(axis: Axis, value: float, count: int, dots: int) -> int | None:
    """The cell of `count`, each of so many dots, that a value lies in; None outside. As curves are drawn."""
    place = axis.place(value)
    if not isfinite(place) or not -1e-9 <= place <= 1 + 1e-9:
        return None
    return min(max(floor(place * (count * dots - 1) + 0.5), 0), count * dots - 1) // dots


def _labels(axis: Axis | None, tall: int, pen: Pen) -> dict[int, str]:
    """Row -> label of the tick in it."""
    found: dict[int, str] = {}
    for value, label in axis.ticks if axis is not None else ():
        up = cell_of(axis, value, tall, _tall(pen)) if axis is not None else None
        if up is not None:
            found[tall - 1 - up] = pen.text(label)
    return found


class _Sheet:
    """Cells of the plot, each with a sign and a style; what is drawn later lies on top."""

    def __init__(self, chart: Chart, wide: int, tall: int, pen: Pen) -> None:
        self.chart, self.wide, self.tall, self.pen = chart, wide, tall, pen
        self.across, self.down = _wide(pen), _tall(pen)
        self.bits = [[0] * wide for _ in range(tall)]
        self.signs = [[" "] * wide for _ in range(tall)]
        self.styles = [[""] * wide for _ in range(tall)]
        self._limits()
        self._bars()
        taken: set[tuple[int, int]] = set()
        ends = [self._curve(curve) for curve in chart.curves]
        for curve, end in zip(chart.curves, ends, strict=True):
            self._letter(curve, end, taken)
        for spot in chart.spots:
            column, up = self._column(spot.x), cell_of(chart.y, spot.y, tall, self.down)
            if column is not None and up is not None:
                self._put(tall - 1 - up, column, pen.sign(spot.sign), spot.style)
        self._note()
        self._cursor()

    def line(self, row: int) -> Line:
        """One row, neighbours of one style together; a blank has the style of what stands before it."""
        spans: list[Span] = []
        text, style = "", ""
        for sign, own in zip(self.signs[row], self.styles[row], strict=True):
            if sign == " " or own == style:
                text += sign
                continue
            if text:
                spans.append(Span(text, style))
            text, style = sign, own
        return (*spans, Span(text, style))

    def _column(self, x: float) -> int | None:
        return cell_of(self.chart.x, x, self.wide, self.across)

    def _put(self, row: int, column: int, sign: str, style: str) -> None:
        self.signs[row][column], self.styles[row][column] = sign, style
        self.bits[row][column] = 0

    def _limits(self) -> None:
        chart = self.chart
        for level in chart.levels:
            low = chart.x.low if level.low is None else max(level.low, chart.x.low)
            high = chart.x.high if level.high is None else min(level.high, chart.x.high)
            if low < high:
                ends = chart.x.places(np.array([low, high]))
                self._dots(raster.curve(ends, np.full(2, chart.y.place(level.y)), self.wide * self.across,
                                        self.tall * self.down, "dotted" if self.pen.plain else "sparse"),
                           level.style, "-")
        for upright in chart.uprights:
            column = self._column(upright.x)
            top = chart.y.high if upright.top is None else min(upright.top, chart.y.high)
            up = cell_of(chart.y, top, self.tall, self.down)
            if column is None or up is None:
                continue
            for row in range(self.tall - 1 - up, self.tall):
                self._put(row, column, self.pen.sign("┊"), upright.style)

    def _bars(self) -> None:
        if self.chart.bars is not None:
            places = self.chart.y.places(self.chart.bars.heights)
            dots = raster.bars(places, self.wide * self.across, self.tall * self.down)
            self._dots(dots, self.chart.bars.style, "#")

    def _curve(self, curve: Curve) -> tuple[int, int] | None:
        """Draws it; (row, column) of its last cell, None where it is out of sight."""
        axis = self.chart.right if curve.right and self.chart.right is not None else self.chart.y
        x, y = self.chart.x.places(curve.x), axis.places(curve.y)
        pattern = "solid" if self.pen.plain else curve.dots
        dots = raster.curve(x, y, self.wide * self.across, self.tall * self.down, pattern)
        return self._dots(dots, curve.style, curve.plain)

    def _dots(self, dots: raster.Dots, style: str, plain: str) -> tuple[int, int] | None:
        found = dots.astype(int) if self.pen.plain else raster.braille(dots)
        places = np.nonzero(found)
        if not places[0].size:
            return None
        for row, column, more in zip(*(place.tolist() for place in places), found[places].tolist(), strict=True):
            self.bits[row][column] |= more
            self.signs[row][column] = plain if self.pen.plain else raster.character(self.bits[row][column])
            self.styles[row][column] = style
        last = int(places[1].max())
        return int(places[0][places[1] == last][0]), last

    def _letter(self, curve: Curve, end: tuple[int, int] | None, taken: set[tuple[int, int]]) -> None:
        """The letter over the curve's last cell, or left of it where another stands there."""
        if end is None:
            return
        text = self.pen.text(curve.letter)
        row, column = end[0], end[1] - len(text) + 1
        while any((row, column + k) in taken for k in range(-1, len(text) + 1)):
            column -= 1
        if not text or column < 0:
            return
        for k, char in enumerate(text):
            self._put(row, column + k, char, curve.style)
            taken.add((row, column + k))

    def _note(self) -> None:
        for column, char in enumerate(self.pen.cut(self.pen.text(self.chart.note), self.wide - 2), start=1):
            self._put(0, column, char, self.chart.note_style)

    def _cursor(self) -> None:
        """The cursor's column: a bar where there is nothing, what there is kept and recoloured."""
        chart = self.chart
        column = self._column(chart.cursor) if chart.cursor is not None else None
        if column is None:
            return
        for row in range(self.tall):
            if self.signs[row][column] in (" ", self.pen.sign("┊")):
                self.signs[row][column] = self.pen.sign("│")
            self.styles[row][column] = CURSOR


def _foot(chart: Chart, gutter: int, wide: int, room: int, pen: Pen) -> list[Line]:
    """The x axis with ticks, marks and the cursor, and the labels below."""
    signs, styles = [pen.sign("─")] * wide, ["dim"] * wide
    placed: list[tuple[int, str]] = []
    for value, label in chart.x.ticks:
        column = cell_of(chart.x, value, wide, _wide(pen))
        if column is not None:
            signs[column] = pen.sign("┴")
            placed.append((gutter + 1 + column, pen.text(label)))
    cursor = [(chart.cursor, "▴", CURSOR)] if chart.cursor is not None else []
    for x, sign, style in [*((mark.x, mark.sign, mark.style) for mark in chart.marks), *cursor]:
        column = cell_of(chart.x, x, wide, _wide(pen))
        if column is not None:
            signs[column], styles[column] = pen.sign(sign), style
    axis: list[Span] = [Span(" " * gutter + pen.sign("└"), "dim")]
    for sign, style in zip(signs, styles, strict=True):
        if axis[-1].style == style:
            axis[-1] = Span(axis[-1].text + sign, style)
        else:
            axis.append(Span(sign, style))
    return [tuple(axis), (Span(_told(placed, pen.text(chart.x.unit), room), "dim"),)]


def _told(placed: Sequence[tuple[int, str]], unit: str, room: int) -> str:
    """Labels about their columns, within the room, those left out that would touch another; the unit behind them."""
    text = ""
    more = f" {unit}" if unit else ""
    for number, (column, label) in enumerate(placed, start=1):
        last = cells(more) if number == len(placed) else 0
        at = min(column - (cells(label) - 1) // 2, room - cells(label) - last)
        if at > len(text) or (not text and at >= 0):
            text += " " * (at - len(text)) + label
    return text + more if cells(text) + cells(more) <= room else text
