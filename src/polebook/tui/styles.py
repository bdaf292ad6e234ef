"""How the named styles of lines look: the terminal's own sixteen colours, so that its ground may be dark or light.

Every style differs from its neighbours by an attribute too: without colours nothing is lost but the colours.
"""

from __future__ import annotations

from functools import cache

from rich.segment import Segment
from rich.style import Style
from textual.strip import Strip

from polebook.tui.lines import STYLES, Line, width

_COLOURED = {
    "": Style.null(),
    "dim": Style(dim=True),
    "head": Style(bold=True),
    "focus": Style(bold=True, reverse=True),
    "select": Style(bold=True, color="cyan"),
    "bad": Style(color="red"),
    "good": Style(color="green"),
    "warn": Style(color="yellow"),
    "moved": Style(italic=True, color="magenta"),
    "bar": Style(color="blue"),
    "field": Style(underline=True, bold=True),
    "key": Style(bold=True),
}
_BARE = {name: Style(bold=style.bold, dim=style.dim, italic=style.italic, underline=style.underline,
                     reverse=style.reverse) for name, style in _COLOURED.items()} | {
    "select": Style(bold=True),
    "bad": Style(bold=True),
    "warn": Style(bold=True),
}
if set(_COLOURED) != set(STYLES):
    raise ValueError("a style of the lines has no looks, or looks have no style")


@cache
def style(name: str, colour: bool) -> Style:
    """The look of a style's name; an unknown one is plain."""
    return (_COLOURED if colour else _BARE).get(name, Style.null())


def strip(line: Line, colour: bool) -> Strip:
    """A line as Textual paints it, neighbours of one style as one piece. Every segment has a style: Textual's
    filters fail on one that has none."""
    pieces: list[tuple[str, str]] = []
    for span in line:
        if pieces and pieces[-1][1] == span.style:
            pieces[-1] = (pieces[-1][0] + span.text, span.style)
        elif span.text:
            pieces.append((span.text, span.style))
    return Strip([Segment(text, style(name, colour)) for text, name in pieces], width(line))
