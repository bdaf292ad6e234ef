"""Lines of styled text: what drawing makes and the shell paints. Widths are terminal cells."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

from polebook.report.look import cells, fit

STYLES = ("", "dim", "head", "focus", "select", "bad", "good", "warn", "moved", "bar", "field", "key")
"""Names of the styles that a span may have; the shell knows how each looks with colours and without."""


@dataclass(frozen=True, slots=True)
class Span:
    text: str
    style: str = ""


Line = tuple[Span, ...]


def line(*spans: Span | str) -> Line:
    """A line of spans; plain text needs no Span."""
    return tuple(span if isinstance(span, Span) else Span(span) for span in spans)


def width(of: Line) -> int:
    """Cells that a line takes."""
    return sum(cells(span.text) for span in of)


def padded(of: Line, to: int, style: str = "") -> Line:
    """The line cut or filled with blanks to exactly `to` cells."""
    result: list[Span] = []
    room = to
    for span in of:
        size = cells(span.text)
        if size > room:
            result.append(Span(fit(span.text, room), span.style))
            room = 0
            break
        result.append(span)
        room -= size
    if room > 0:
        result.append(Span(" " * room, style))
    return tuple(result)


def plain_text(lines: Iterable[Line]) -> str:
    """The lines as text, blanks at their ends cut off: what goldens hold."""
    return "\n".join("".join(span.text for span in one).rstrip() for one in lines) + "\n"
