"""A post and a record as plain values."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from datetime import date

FORMAT = 1
NEWEST, EARLIER = "post", "earlier"  # tables of the newest post and of those before
NOTE = """\
# What this chain was found to do, kept by polebook post: written by it alone, figures to 6 digits.
# The newest post comes first, one figure a line; the earlier ones follow, one line of the chain a line.
"""

Scalar = float | bool | str
Row = Mapping[str, Scalar]
Figures = Mapping[str, Mapping[str, Row]]
"""{"overall": {"": row}, "targets": {target: row}, "lines": {line: row}, "account": {end of the band: row}}, in order.

A figure that does not apply is not in its row, and a row without figures not in its group; every group is there.
Numbers are floats, in the unit that ends the key.
"""
GROUPS = ("overall", "targets", "lines", "account")
WHOLE = ""  # the one row of "overall"


@dataclass(frozen=True, slots=True)
class Post:
    """One post. version: of polebook. figures: rounded, see posted_figures."""

    date: date
    message: str
    digest: str
    version: str
    figures: Figures


@dataclass(frozen=True, slots=True)
class Record:
    """A record: file name of its chain, and its posts, newest first, one at least."""

    chain: str
    posts: tuple[Post, ...]


@dataclass(frozen=True, slots=True)
class Moved:
    """A figure that two posts have otherwise; None where one has none. name: "lines.Q1.gain_db"."""

    name: str
    before: Scalar | None
    after: Scalar | None
