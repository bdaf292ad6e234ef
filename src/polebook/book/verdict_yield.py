"""Why too few built chains meet the targets, as those who built them tell it."""

from __future__ import annotations

from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from polebook.book.ledger import Ledger
    from polebook.book.targets import Target


def headline(of: Ledger, target: Target) -> str:
    """"yield 92.35 % for 95 %"; hundredths, for what misses 99.5 % by little is not to look like it."""
    return f"yield {100.0 * (target.got or 0.0):.2f} % for {100.0 * target.want:g} %"


def cause(of: Ledger, target: Target) -> str:
    """Which target holds it down."""
    return of.built.cause


def mend(of: Ledger, target: Target) -> str:
    """The ranking of the tolerances is the spread's to tell."""
    return ""
