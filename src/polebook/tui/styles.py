"""How the named styles of lines look: few of the terminal's own sixteen colours, on its own ground, dark or light.

What a style tells stands in its text or an attribute too: without colours nothing is lost but the colours.
"""

from __future__ import annotations

from collections.abc import Iterable
from functools import cache

from rich.segment import Segment
from rich.style import Style
from textual.strip import Strip

from polebook.tui.lines import STYLES, Line, Span, width

# Of the sixteen, green, cyan and yellow can't be read on white, dark blue and dark red hardly on black; bold makes a
# colour bright on many terminals, so that what is bold is bright already. Italics are shown reversed by some.
_COLOURED = {
    "": Style.null(),
    "dim": Style(dim=True),
    "head": Style(bold=True),
    "focus": Style(bold=True, reverse=True),
    "select": Style(bold=True, color="bright_blue"),
    "bad": Style(bold=True, color="bright_red"),
    "good": Style(color="bright_blue"),
    "warn": Style(color="magenta"),
    "moved": Style(underline=True, color="magenta"),
    "bar": Style(color="bright_blue"),
    "field": Style(underline=True, bold=True),
    "key": Style(bold=True),
}
_BARE = {name: Style(bold=style.bold, dim=style.dim, underline=style.underline, reverse=style.reverse)
         for name, style in _COLOURED.items()} | {"warn": Style(bold=True)}
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
    for text, name in (part for span in line for part in _parts(span)):
        if pieces and pieces[-1][1] == name:
            pieces[-1] = (pieces[-1][0] + text, name)
        elif text:
            pieces.append((text, name))
    return Strip([Segment(text, style(name, colour)) for text, name in pieces], width(line))


def _parts(span: Span) -> Iterable[tuple[str, str]]:
    """Text and style; of a figure that moved not the blanks around it, which would be underlined."""
    if span.style != "moved":
        return ((span.text, span.style),)
    begun = span.text.lstrip(" ")
    shown = begun.rstrip(" ")
    return ((span.text[:len(span.text) - len(begun)], ""), (shown, span.style), (begun[len(shown):], ""))
