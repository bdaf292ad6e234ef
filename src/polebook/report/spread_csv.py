"""Every build of a spread as CSV: its number from 1 on, its figures, and what became of it."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Sequence

from polebook.report.csvout import Value, csv_pieces, titled
from polebook.report.document import Document
from polebook.report.spread_words import called


def builds_csv(answer: Document, rows: Iterable[Sequence[Value]]) -> Iterator[str]:
    """The table in pieces. rows: number, figures in the answer's order with NaN for none, state."""
    titles = (titled(called(name), figure["unit"]) for name, figure in answer["figures"].items())
    return csv_pieces(["build", *titles, "state"], rows)
