"""What is read off a step response: first crossings, the highest and the lowest point, the last time outside a band.

The response is 1 + e(t) with e a transient that fades: its final value is 1. Everything is bracketed by instants
(`polebook.solve.instants`) and then solved.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from polebook.solve.instants import Piece, TooLong, back, fades, onward, pieces
from polebook.solve.root import Function, bracketed_maximum, bracketed_root
from polebook.solve.transient import Transient

if TYPE_CHECKING:
    from polebook.solve.orthonormal import Floats

FLAT = 1e-10  # of the final value; less is rounding
LOW, HIGH = 0.1, 0.9  # between which the rise is timed


@dataclass(frozen=True, slots=True)
class Marks:
    """Times in s, heights as shares of the final value.

    start           height right after the step, 0 unless something passes at once
    low_s, high_s   first times at 10 and at 90 %;  None where they did not come in reasonable time
    top_s, top      the highest point; at infinity (None) and 1 where the response never passes its final value
    dip_s, dip      the lowest point before 10 % are reached; None and 0 where it never goes the wrong way
    settled_s       by share of the final value: from when on the response stays within it
    """

    start: float
    low_s: float | None
    high_s: float | None
    top_s: float | None
    top: float | None
    dip_s: float | None
    dip: float
    settled_s: dict[float, float | None]

    @property
    def rise_s(self) -> float | None:
        return None if self.low_s is None or self.high_s is None else self.high_s - self.low_s


def marks(of: Transient, within: tuple[float, ...]) -> Marks:
    """Everything that is read off 1 + `of`; `within` are the shares to which settling is timed."""
    start = _clean(1.0 + of.one(0.0)) if of.poles.size else 1.0
    if not of.poles.size:
        return Marks(1.0, 0.0, 0.0, None, 1.0, None, 0.0, dict.fromkeys(within, 0.0))
    grid = pieces(of)
    seen = _Seen(of, start)
    try:
        for t in onward(grid):
            if seen.look(t):
                break
        top: float | None = seen.top
    except TooLong:
        top = None
    dip = _clean(seen.dip)
    over = top is not None and top > 1.0 + FLAT
    return Marks(start, seen.crossed[LOW], seen.crossed[HIGH], seen.top_s if over else None,
                 top if over or top is None else 1.0, seen.dip_s if dip < 0 else None, min(dip, 0.0),
                 {share: _settled(of, grid, share) for share in within})


def _clean(height: float) -> float:
    return 0.0 if abs(height) < FLAT else height


class _Seen:
    """What has been seen of 1 + e on the way from 0 on."""

    def __init__(self, of: Transient, start: float) -> None:
        self.of, self.t, self.g = of, np.zeros(1), np.array([start])
        self.crossed: dict[float, float | None] = {
            level: 0.0 if start >= level else None for level in (LOW, HIGH)}
        self.top, self.top_s = start, 0.0
        self.dip, self.dip_s = min(start, 0.0), 0.0

    def height(self, t: float) -> float:
        return 1.0 + self.of.one(t)

    def look(self, later: Floats) -> bool:
        """Takes a chunk of instants in; True where none that follows can change anything."""
        later = later[later > self.t[-1]]
        t = np.concatenate([self.t[-2:], later])
        g = np.concatenate([self.g[-2:], 1.0 + self.of.at(later)])
        waiting = self.crossed[LOW] is None
        for level, found in self.crossed.items():
            if found is None:
                self.crossed[level] = first_above(self.height, t, g, level)
        if waiting:
            low = self.crossed[LOW]
            before = t.size if low is None else int(np.searchsorted(t, low))
            self._descend(t[:before], g[:before])
        reach = _reach(g)
        for k in sorted(_tops(g, max(self.top, 1.0 + FLAT)), key=lambda k: -reach[k - 1]):
            if reach[k - 1] <= self.top:
                break
            at, height = peak(self.height, t[k - 1:k + 2], g[k - 1:k + 2])
            if height > self.top:
                self.top_s, self.top = at, height
        if g[-1] > self.top:
            self.top_s, self.top = float(t[-1]), float(g[-1])
        self.t, self.g = t, g
        rest = self.of.rest(float(t[-1]))
        return self.crossed[HIGH] is not None and rest < min(1.0, max(self.top - 1.0, FLAT))

    def _descend(self, t: Floats, g: Floats) -> None:
        for k in _tops(-g, max(-self.dip, FLAT)):
            at, height = peak(lambda x: -self.height(x), t[k - 1:k + 2], -g[k - 1:k + 2])
            if -height < self.dip:
                self.dip_s, self.dip = at, -height


def _tops(y: Floats, best: float) -> list[int]:
    """Places of local maxima that may rise above `best` between the instants."""
    if y.size < 3:
        return []
    middle, low = y[1:-1], np.minimum(y[:-2], y[2:])
    top = (middle >= np.maximum(y[:-2], y[2:])) & (middle > low) & (_reach(y) > best)
    found: list[int] = (np.nonzero(top)[0] + 1).tolist()
    return found


def _reach(y: Floats) -> Floats:
    """How high a maximum near each inner instant may be: as far above it as the lower neighbour lies below."""
    result: Floats = 2.0 * y[1:-1] - np.minimum(y[:-2], y[2:])
    return result


def peak(f: Function, t: Floats, y: Floats) -> tuple[float, float]:
    """(time, height) of the maximum of f between three instants, of which the middle one is not below its neighbours.
    """
    scale = float(t[2])
    x = tuple((t / scale).tolist())
    at, height = bracketed_maximum(lambda z: f(z * scale), (x[0], x[1], x[2]), (float(y[0]), float(y[1]), float(y[2])))
    return at * scale, height


def first_above(f: Function, t: Floats, y: Floats, level: float) -> float | None:
    """First time at which f reaches `level` from below; None where it does not within t."""
    above = np.nonzero(y >= level)[0]
    end = int(above[0]) if above.size else y.size - 1
    for k in _tops(y[:end + 1], level):
        at, height = peak(f, t[k - 1:k + 2], y[k - 1:k + 2])
        if y[k] < level <= height:
            return _solved(lambda x: f(x) - level, float(t[k - 1]), at, float(y[k - 1]) - level, height - level)
    if not above.size:
        return None
    if end == 0:
        return float(t[0])
    return _solved(lambda x: f(x) - level, float(t[end - 1]), float(t[end]), float(y[end - 1]) - level,
                   float(y[end]) - level)


def _solved(f: Function, a: float, b: float, fa: float, fb: float) -> float:
    return b * bracketed_root(lambda x: f(x * b), a / b, 1.0, fa, fb, 1e-14)


def _settled(of: Transient, grid: list[Piece], level: float) -> float | None:
    """From when on |e| stays within `level`; None where that is too long to be looked for."""
    def outside(t: float) -> float:
        return abs(of.one(t)) - level

    later: tuple[Floats, Floats] | None = None
    try:
        for t in back(grid, fades(of, level)):
            y = np.abs(of.at(t)) - level
            if later is not None:  # a maximum at the seam has a neighbour in either chunk
                t, y = np.concatenate([t, later[0][1:3]]), np.concatenate([y, later[1][1:3]])
            found = _last(outside, t, y)
            if found is not None:
                return found
            later = t, y
    except TooLong:
        return None
    start, first = outside(0.0), grid[0].start if grid else 0.0
    return _solved(outside, 0.0, first, start, outside(first)) if start > 0 and first else 0.0


def _last(outside: Callable[[float], float], t: Floats, y: Floats) -> float | None:
    """Last time at which `outside` falls below 0; None where it is below all the way."""
    above = np.nonzero(y >= 0)[0]
    end = int(above[-1]) if above.size else -1
    for k in reversed(_tops(y, 0.0)):
        if k > end and y[k] < 0:
            at, height = peak(outside, t[k - 1:k + 2], y[k - 1:k + 2])
            if height >= 0:
                return _solved(outside, at, float(t[k + 1]), height, float(y[k + 1]))
    if end < 0:
        return None
    if end == y.size - 1:
        return float(t[end])
    return _solved(outside, float(t[end]), float(t[end + 1]), float(y[end]), float(y[end + 1]))
