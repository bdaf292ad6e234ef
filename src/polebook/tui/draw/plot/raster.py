"""Curves as dots, dots as braille characters."""

from __future__ import annotations

from typing import TYPE_CHECKING, TypeAlias

import numpy as np

if TYPE_CHECKING:  # numpy.typing costs 5 ms at start-up
    from numpy.typing import NDArray

Array: TypeAlias = "NDArray[np.float64]"
Dots: TypeAlias = "NDArray[np.bool_]"
Bits: TypeAlias = "NDArray[np.int64]"
WIDE, TALL = 2, 4
"""Dots of a braille cell."""
PATTERNS = {"solid": (1, 1), "dotted": (2, 1), "dashed": (8, 5), "sparse": (4, 1), "broken": (4, 3)}
"""Name -> every so many dots, so many of them there."""
_BRAILLE = 0x2800
_BITS = np.array([[0x01, 0x08], [0x02, 0x10], [0x04, 0x20], [0x40, 0x80]])
FAR = 1e6  # sizes of a plot beyond which a point is as good as this far
_STEEP = 3  # dots of one column from which on the pattern runs down them


def curve(x: Array, y: Array, columns: int, rows: int, pattern: str = "solid") -> Dots:
    """Dots (rows, columns) of the curve through places x (ascending) and y, 0 to 1 from left and from below.

    A peak between two columns is drawn to its height. Points that are not a number are gaps; what lies outside is cut.
    """
    dots = np.zeros((rows, columns), dtype=bool)
    if rows < 1 or columns < 1:
        return dots
    known = np.isfinite(x) & np.isfinite(y)
    across = np.clip(np.where(known, x, 0.0), -FAR, FAR) * (columns - 1) + 0.5
    down = (1.0 - np.clip(np.where(known, y, 0.0), -FAR, FAR)) * (rows - 1) + 0.5
    ends = np.nonzero(np.diff(np.concatenate([[False], known, [False]]).astype(int)))[0]
    for begin, end in zip(ends[::2], ends[1::2], strict=True):
        _run(dots, across[begin:end], down[begin:end])
    return dots & _kept(dots, pattern)


def _run(dots: Dots, across: Array, down: Array) -> None:
    """One run of points, each column filled over all heights that the curve has within it."""
    rows, columns = dots.shape
    if across[-1] < 0 or across[0] > columns:
        return
    first, last = int(max(np.floor(across[0]), 0)), int(min(np.floor(across[-1]), columns - 1))
    if last < first:
        return
    count = last - first + 1
    walls = np.interp(np.arange(first, last + 2), across, down)
    top, bottom = np.minimum(walls[:-1], walls[1:]), np.maximum(walls[:-1], walls[1:])
    inside = (across >= first) & (across < last + 1)
    column = np.floor(across[inside]).astype(int) - first
    np.minimum.at(top, np.clip(column, 0, count - 1), down[inside])
    np.maximum.at(bottom, np.clip(column, 0, count - 1), down[inside])
    begin, end = np.ceil(top - 0.5), np.ceil(bottom - 0.5) - 1
    flat = end < begin
    begin = np.where(flat, np.floor((top + bottom) / 2), begin)
    end = np.where(flat, begin, end)
    row = np.arange(rows)[:, None]
    dots[:, first:last + 1] |= (row >= begin) & (row <= end)


def _kept(dots: Dots, pattern: str) -> Dots:
    """Which dots a pattern keeps: along the curve where it is flat, down it where it is steep."""
    every, there = PATTERNS[pattern]
    rows, columns = dots.shape
    steep = dots.sum(axis=0) >= _STEEP
    across, down = np.arange(columns) % every < there, np.arange(rows) % every < there
    kept: Dots = np.where(steep[None, :], down[:, None], across[None, :])
    return kept


def bars(heights: Array, columns: int, rows: int) -> Dots:
    """Dots (rows, columns) of bars side by side, each filled from below to its height, 0 to 1."""
    if rows < 1 or columns < 1 or not heights.size:
        return np.zeros((max(rows, 0), max(columns, 0)), dtype=bool)
    of = np.minimum((np.arange(columns) + 0.5) / columns * heights.size, heights.size - 1).astype(int)
    tall = np.ceil(np.clip(np.nan_to_num(heights), 0.0, 1.0) * rows - 1e-9)[of]
    filled: Dots = np.arange(rows)[:, None] >= rows - tall[None, :]
    return filled


def braille(dots: Dots) -> Bits:
    """Bits of each braille cell, (rows / 4, columns / 2); 0 where a cell has no dot."""
    rows, columns = dots.shape[0] // TALL, dots.shape[1] // WIDE
    cells = dots.reshape(rows, TALL, columns, WIDE).transpose(0, 2, 1, 3)
    bits: Bits = (cells * _BITS).sum(axis=(2, 3))
    return bits


def character(bits: int) -> str:
    """The braille character of a cell; a blank where it has no dot, which is a byte and not three."""
    return chr(_BRAILLE + bits) if bits else " "
