"""Tables as CSV: units in the heading, figures at full precision, an empty cell where a figure does not apply."""

from __future__ import annotations

import csv
import io
from collections.abc import Iterable, Iterator, Sequence
from itertools import chain, islice
from math import isfinite

from polebook.problem import printable

Value = str | float | int | bool | None
_FORMULA = ("=", "+", "-", "@")  # a spreadsheet takes a text that begins so for a formula


def csv_text(heading: Sequence[str], rows: Iterable[Sequence[Value]]) -> str:
    """One table, RFC 4180 but for plain line feeds."""
    return "".join(csv_pieces(heading, rows))


def csv_pieces(heading: Sequence[str], rows: Iterable[Sequence[Value]], size: int = 1000) -> Iterator[str]:
    """The same piece by piece, `size` rows at a time, for a table that is too long to be held as one text."""
    left: Iterator[Sequence[Value]] = chain((heading,), rows)
    while piece := list(islice(left, size)):
        out = io.StringIO()
        csv.writer(out, lineterminator="\n").writerows([_cell(value) for value in row] for row in piece)
        yield out.getvalue()


def titled(name: str, unit: str = "") -> str:
    """A column's heading: "upper edge [Hz]"."""
    return f"{name} [{unit}]" if unit else name


def _cell(value: Value) -> str:
    if value is None:
        return ""
    if isinstance(value, bool):
        return "yes" if value else "no"
    if isinstance(value, int):
        return str(value)
    if isinstance(value, float):
        return repr(value) if isfinite(value) else ""
    shown = printable(value)
    return f"'{shown}" if shown.startswith(_FORMULA) else shown
