"""Figures by the names of `polebook working`: those that are numbers, each with its unit and where it stands."""

from __future__ import annotations

from collections.abc import Collection, Mapping
from dataclasses import dataclass
from typing import Any

from polebook.book import build
from polebook.book.ledger import Ledger
from polebook.book.workings.index import Entry, entries, find
from polebook.book.workings.units import unit
from polebook.problem import Problem, ProblemsFound

SHARE = "share"  # the unit of a part of one, shown in per cent
_SHARES = frozenset({"owns_upper", "owns_lower", "noise_share", "margin"})
_HOLDS = {"bridges": "lines"}  # rows inside a section -> that section of the document
SECTIONS = frozenset(build.SECTIONS) - {"verdict", "cautions"}
"""Keys of the document that hold figures."""


@dataclass(frozen=True, slots=True)
class Figure:
    """A number of the ledger in base SI units. `unit` is "" for a plain number, "share" for a share of one."""

    name: str
    unit: str
    section: str


def named(of: Ledger, words: Collection[str]) -> list[Figure]:
    """The figures that `words` name, or are the only beginning of; each once. Raises ProblemsFound with near names."""
    document = build.document(of, SECTIONS)
    known = entries(document)
    return list({one.name: one for one in (_figure(known, document, word) for word in words)}.values())


def _figure(known: Mapping[str, Entry], document: Mapping[str, Any], words: str) -> Figure:
    entry = find(known, document, words)
    if isinstance(entry.value, bool):
        raise ProblemsFound([Problem(None, f"{entry.name} is no number", "it is true or false",
                                     "name a figure that is a number")])
    shown = SHARE if entry.key in _SHARES else unit(document, entry)
    return Figure(entry.name, shown, _HOLDS.get(entry.section, entry.section))


def values(of: Ledger, figures: Collection[Figure]) -> dict[str, float | None]:
    """What each of `figures` is in the ledger `of`; None for one that it does not have. Sections not asked for rest."""
    if not figures:
        return {}
    sections = {figure.section for figure in figures}
    known = entries(build.document(of, sections if "overall" in sections else {build.BAND, *sections}))
    return {one.name: known[one.name].value if one.name in known else None for one in figures}
