"""Drawings of demo chains, and what can be read off them."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache
from xml.etree import ElementTree

from polebook.book.build import ledger
from polebook.chain import read
from polebook.record.curves import drawn
from polebook.report.svg.drawings import WHAT, drawing
from polebook.report.svg.sheet import SIZE, wide
from tests.cli.helpers import CHAINS

NAMES = tuple(WHAT)
SVG = "{http://www.w3.org/2000/svg}"


@cache
def text_of(name):
    return (CHAINS / f"{name}.toml").read_text(encoding="utf-8")


@cache
def document(name):
    """What the drawings of a demo chain are made from."""
    return made(text_of(name))


def made(text):
    """The same of any chain file's text."""
    return drawn(ledger(read.parse(text, "chain.toml")))


@cache
def picture(name, what):
    """A drawing of a demo chain."""
    return Picture(drawing(document(name), what))


@dataclass(frozen=True)
class Words:
    """A text: its words, and about the box that it fills."""

    words: str
    left: float
    top: float
    right: float
    bottom: float
    x: float
    y: float
    bold: bool


class Picture:
    """A drawing as shapes with their numbers."""

    def __init__(self, source):
        self.source = source
        self.root = ElementTree.fromstring(source)
        self.width, self.height = (float(self.root.get(key)) for key in ("width", "height"))
        self.texts = [_words(element) for element in self.root.iter(f"{SVG}text")]
        self.lines = [tuple(float(one.get(key)) for key in ("x1", "y1", "x2", "y2"))
                      for one in self.root.iter(f"{SVG}line")]

    def at(self, words):
        """The one text of these words."""
        (found,) = [text for text in self.texts if text.words == words]
        return found

    def of(self, tag, **wanted):
        """The shapes of a tag with these attributes, their other ones as numbers where they are."""
        shapes = [one for one in self.root.iter(f"{SVG}{tag}") if all(one.get(k) == v for k, v in wanted.items())]
        return [{key: _number(value) for key, value in one.attrib.items()} for one in shapes]

    def curve(self, width="2"):
        """The points of the longest path of that width of line."""
        paths = [one.get("d") for one in self.root.iter(f"{SVG}path") if one.get("stroke-width") == width]
        longest = max(paths, key=len)
        return [tuple(map(float, pair.split(","))) for pair in longest.removeprefix("M").removesuffix(" z").split()]


def _number(value):
    try:
        return float(value)
    except ValueError:
        return value


def _words(element):
    x, y, size = float(element.get("x")), float(element.get("y")), float(element.get("font-size", SIZE))
    bold = element.get("font-weight") == "bold"
    long = wide(element.text, size, bold)
    left = x - {"start": 0.0, "middle": long / 2, "end": long}[element.get("text-anchor", "start")]
    if element.get("transform"):  # up the page
        return Words(element.text, x - size, y - long / 2, x, y + long / 2, x, y, bold)
    return Words(element.text, left, y - 0.8 * size, left + long, y + 0.2 * size, x, y, bold)
