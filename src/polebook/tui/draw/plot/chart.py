"""What a plot shows, as plain values: axes, curves, limits and marks. Later ones lie over earlier ones."""

from __future__ import annotations

from dataclasses import dataclass

from polebook.tui.draw.plot.axis import Array, Axis


@dataclass(frozen=True, slots=True)
class Curve:
    """y over x (ascending); not a number is a gap.

    dots    pattern of `raster.PATTERNS`, so that curves differ without colour; plain: the sign in ASCII
    letter  stands at the curve's end
    right   y belongs to the right axis
    """

    x: Array
    y: Array
    style: str = ""
    dots: str = "solid"
    plain: str = "*"
    letter: str = ""
    right: bool = False


@dataclass(frozen=True, slots=True)
class Bars:
    """A histogram: heights side by side over the whole axis, from 0 of the y axis."""

    heights: Array
    style: str = "bar"


@dataclass(frozen=True, slots=True)
class Upright:
    """A limit at x, from the bottom up to y (None: to the top)."""

    x: float
    top: float | None = None
    style: str = "dim"


@dataclass(frozen=True, slots=True)
class Level:
    """A limit at y, from x to x (None: to the end of the axis). label: beside the axis, where no tick has that row."""

    y: float
    low: float | None = None
    high: float | None = None
    style: str = "dim"
    label: str = ""


@dataclass(frozen=True, slots=True)
class Spot:
    """A sign of one cell at a point."""

    x: float
    y: float
    sign: str = "●"
    style: str = "head"


@dataclass(frozen=True, slots=True)
class Mark:
    """A sign of one cell on the x axis."""

    x: float
    sign: str = "×"
    style: str = ""


@dataclass(frozen=True, slots=True)
class Chart:
    """A plot. cursor: an x, None for none; note: said at the top, over what is there."""

    x: Axis
    y: Axis
    right: Axis | None = None
    curves: tuple[Curve, ...] = ()
    bars: Bars | None = None
    uprights: tuple[Upright, ...] = ()
    levels: tuple[Level, ...] = ()
    spots: tuple[Spot, ...] = ()
    marks: tuple[Mark, ...] = ()
    cursor: float | None = None
    note: str = ""
    note_style: str = "dim"
