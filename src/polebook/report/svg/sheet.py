"""A drawing as XML, made by hand: shapes, and words that are escaped on their way in."""

from __future__ import annotations

from collections.abc import Sequence
from html import escape

from polebook.problem import printable
from polebook.report.look import cells

Point = tuple[float, float]
SIZE = 12.0
_FINE = 0.15  # px that a point may lie off the line between its neighbours and not be drawn
_HATCH, _DOTS = 'fill="url(#hatch)"', 'fill="url(#dots)"'
_LOOKS = {
    "frame": 'fill="none" stroke="#000" stroke-width="1"',
    "grid": 'stroke="#bbb" stroke-width="0.6"',
    "axis": 'stroke="#000" stroke-width="1"',
    "curve": 'fill="none" stroke="#000" stroke-width="2" stroke-linejoin="round"',
    "dashed": 'fill="none" stroke="#000" stroke-width="1.6" stroke-dasharray="8 4"',
    "dotted": 'fill="none" stroke="#000" stroke-width="1.6" stroke-dasharray="1.5 3"',
    "thin": 'fill="none" stroke="#000" stroke-width="0.8"',
    "limit": 'fill="none" stroke="#000" stroke-width="1.4" stroke-dasharray="9 3 2 3"',
    "thick": 'fill="none" stroke="#000" stroke-width="3"',
    "hatch": f'{_HATCH} stroke="none"',
    "hatched": f'{_HATCH} stroke="#000" stroke-width="0.8"',
    "dots": f'{_DOTS} stroke="none"',
    "dark": 'fill="#555" stroke="#000" stroke-width="0.8"',
    "light": 'fill="#ddd" stroke="#000" stroke-width="0.8"',
    "open": 'fill="#fff" stroke="#000" stroke-width="1.2"',
    "solid": 'fill="#000" stroke="none"',
    "blank": 'fill="#fff" stroke="none"',
}
_DEFS = """<defs>
<pattern id="hatch" width="6" height="6" patternUnits="userSpaceOnUse">
<path d="M-1,1 l2,-2 M0,6 l6,-6 M5,7 l2,-2" stroke="#000" stroke-width="0.9"/>
</pattern>
<pattern id="dots" width="6" height="6" patternUnits="userSpaceOnUse">
<path d="M1,1 h1 v1 h-1 z M4,4 h1 v1 h-1 z" fill="#555"/>
</pattern>
</defs>"""
_BOLD = 1.1  # times as long
_NARROW, _BROAD = frozenset("ijlrtfI.,:;'|!()[] -"), frozenset("mwMW%@Ω√")


class Sheet:
    """What is drawn later lies over what was drawn before. Lengths in px, y down the page."""

    def __init__(self, width: float, height: float) -> None:
        self.width, self.height = width, height
        self._items: list[str] = []

    def line(self, x1: float, y1: float, x2: float, y2: float, look: str) -> None:
        self._items.append(f'<line x1="{px(x1)}" y1="{px(y1)}" x2="{px(x2)}" y2="{px(y2)}" {_LOOKS[look]}/>')

    def rect(self, x: float, y: float, width: float, height: float, look: str) -> None:
        self._items.append(f'<rect x="{px(x)}" y="{px(y)}" width="{px(width)}" height="{px(height)}" {_LOOKS[look]}/>')

    def circle(self, x: float, y: float, radius: float, look: str) -> None:
        self._items.append(f'<circle cx="{px(x)}" cy="{px(y)}" r="{px(radius)}" {_LOOKS[look]}/>')

    def path(self, points: Sequence[Point], look: str, closed: bool = False) -> None:
        """A line through the points, less those that would not show."""
        kept = points if closed else thinned(points)
        if len(kept) > 1:
            told = " ".join(f"{px(x)},{px(y)}" for x, y in kept)
            self._items.append(f'<path d="M{told}{" z" if closed else ""}" {_LOOKS[look]}/>')

    def text(self, x: float, y: float, words: str, anchor: str = "start", size: float = SIZE, bold: bool = False,
             turned: bool = False) -> None:
        """Words on the line y. anchor: start, middle, end. turned: they run up the page."""
        more = "" if size == SIZE else f' font-size="{px(size)}"'
        more += ' font-weight="bold"' if bold else ""
        more += "" if anchor == "start" else f' text-anchor="{anchor}"'
        more += f' transform="rotate(-90 {px(x)} {px(y)})"' if turned else ""
        self._items.append(f'<text x="{px(x)}" y="{px(y)}"{more}>{quoted(words)}</text>')

    def render(self, title: str, description: str) -> str:
        """The whole file. Title and description are what a reader who can't see it is told."""
        size = f"{px(self.width)} {px(self.height)}"
        lines = [
            '<?xml version="1.0" encoding="UTF-8"?>',
            f'<svg xmlns="http://www.w3.org/2000/svg" viewBox="0 0 {size}" width="{px(self.width)}" '
            f'height="{px(self.height)}" role="img" aria-labelledby="title desc">',
            f'<title id="title">{quoted(title)}</title>', f'<desc id="desc">{quoted(description)}</desc>', _DEFS,
            f'<rect x="0" y="0" width="{px(self.width)}" height="{px(self.height)}" {_LOOKS["blank"]}/>',
            f'<g font-family="sans-serif" font-size="{px(SIZE)}" fill="#000">', *self._items, "</g>", "</svg>",
        ]
        return "\n".join(lines) + "\n"


def quoted(words: str) -> str:
    """Text as XML has it: nothing in it is markup, and no character that XML forbids is left."""
    return escape(printable(words))


def px(value: float) -> str:
    """A length with one decimal at most."""
    return f"{round(value, 1) + 0.0:.1f}".removesuffix(".0")


def wide(words: str, size: float = SIZE, bold: bool = False) -> float:
    """About how long words run in a sans-serif face, rather too long than too short, px."""
    return size * (_BOLD if bold else 1.0) * sum(_share(char) for char in printable(words))


def _share(char: str) -> float:
    if char in _NARROW:
        return 0.36
    return 0.95 if char in _BROAD else 0.62 * cells(char) if not char.isupper() else 0.7 * cells(char)


def cut(words: str, room: float, size: float = SIZE, bold: bool = False) -> str:
    """Words that keep to a room in px, cut with a mark where they would not."""
    if wide(words, size, bold) <= room:
        return words
    while words and wide(f"{words}…", size, bold) > room:
        words = words[:-1]
    return f"{words}…"


def thinned(points: Sequence[Point]) -> list[Point]:
    """The points without those that lie on the line between their neighbours that stay."""
    keep = [False] * len(points)
    if points:
        keep[0] = keep[-1] = True
    spans = [(0, len(points) - 1)]
    while spans:
        first, last = spans.pop()
        far, at = max(((_off(points[k], points[first], points[last]), k) for k in range(first + 1, last)),
                      default=(0.0, 0))
        if far > _FINE:
            keep[at] = True
            spans += [(first, at), (at, last)]
    return [point for point, kept in zip(points, keep, strict=True) if kept]


def _off(point: Point, begin: Point, end: Point) -> float:
    """How far a point lies off the line through two others."""
    across, down = end[0] - begin[0], end[1] - begin[1]
    size = (across * across + down * down) ** 0.5
    if size == 0.0:
        return float(((point[0] - begin[0]) ** 2 + (point[1] - begin[1]) ** 2) ** 0.5)
    return float(abs(across * (point[1] - begin[1]) - down * (point[0] - begin[0])) / size)
