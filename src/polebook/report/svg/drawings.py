"""The drawings by name. Each draws from the document that `record.curves.drawn` makes."""

from __future__ import annotations

from collections.abc import Callable

from polebook.report.document import Document, finite
from polebook.report.svg import account, levels, pulse, response
from polebook.report.svg.head import notice

WHAT: dict[str, tuple[str, Callable[[Document], str], Callable[[Document], str]]] = {
    "response": (response.WHAT, response.response, response.missing),
    "account": (account.WHAT, account.account, account.missing),
    "pulse": (pulse.WHAT, pulse.pulse, pulse.missing),
    "levels": (levels.WHAT, levels.levels, levels.missing),
}
"""Name -> what it shows in words, what draws it, what tells why it can't be drawn ("" where it can)."""


def missing(document: Document, name: str) -> str:
    """Why there is nothing to draw, "" where there is."""
    return WHAT[name][2](finite(document))


def drawing(document: Document, name: str) -> str:
    """A drawing as SVG; where there is nothing to draw, one that says why."""
    told = finite(document)
    what, draw, why = WHAT[name]
    return notice(told, what, why(told)) if why(told) else draw(told)
