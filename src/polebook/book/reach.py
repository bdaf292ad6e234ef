"""Values so far apart that double precision carries no ledger: a plain statement in place of a figure."""

from __future__ import annotations

from collections.abc import Iterator
from contextlib import contextmanager

from polebook.chain.model import Chain
from polebook.problem import Problem, ProblemsFound


@contextmanager
def within_reach(chain: Chain) -> Iterator[None]:
    """Turns an overflow or a division by zero of the arithmetic inside into a problem of the chain."""
    try:
        yield
    except (OverflowError, ZeroDivisionError):
        raise ProblemsFound([Problem(
            chain.places.get("source"), "the values of this chain lie too far apart to be computed",
            "between them double precision overflows: a figure would be infinite, or nothing at all",
            "look for a value with a wrong prefix (p for M, a missing u)")], "") from None
