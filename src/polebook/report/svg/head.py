"""What every drawing begins with: the chain's title, what is drawn, and words in the place of what can't be."""

from __future__ import annotations

from polebook.report.document import Document
from polebook.report.svg.sheet import SIZE, Sheet, cut

TITLE = 15.0  # size of the heading's letters
TOP = 54.0  # px that the heading takes
EDGE = 14.0  # px left free at the sides


def headed(document: Document, what: str, width: float, height: float) -> Sheet:
    """An empty sheet with its heading."""
    sheet = Sheet(width, height)
    sheet.text(EDGE, 24, cut(called(document), width - 2 * EDGE, TITLE, True), size=TITLE, bold=True)
    sheet.text(EDGE, 41, cut(what, width - 2 * EDGE))
    return sheet


def called(document: Document) -> str:
    return document["chain"]["title"] or "untitled chain"


def notice(document: Document, what: str, why: str) -> str:
    """A whole drawing that says why there is nothing to draw."""
    width = 760.0
    sheet = headed(document, what, width, 3 * TOP)
    for at, line in enumerate(_lines(why, width - 2 * EDGE)):
        sheet.text(EDGE, TOP + 28 + at * (SIZE + 5), line)
    return sheet.render(f"{called(document)}: {what}", why)


def _lines(words: str, room: float) -> list[str]:
    """Words on as many lines as they need."""
    lines, line = [], ""
    for word in words.split():
        if line and cut(f"{line} {word}", room) != f"{line} {word}":
            lines.append(line)
            line = ""
        line = f"{line} {word}".lstrip()
    return [*lines, line]
