"""Two texts beside each other, by lines: what only the one has, what only the other, and a little of what both have."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

OUT, IN, ALIKE, GAP = "-", "+", " ", "…"
NEAR = 2  # lines alike that are shown on either side
MOST = 4000  # rows
_ALIGNED = 250_000  # pairs of lines: beyond so many all of one text's are told, then all of the other's


@dataclass(frozen=True, slots=True)
class Row:
    """`mark` is OUT for a line of the first text alone, IN for one of the second alone, ALIKE for one of both, GAP for
    `number` lines alike that are left out; else `number` is that of the line, from 1, in the text that has it."""

    mark: str
    number: int
    text: str


def rows(first: str, second: str) -> list[Row]:
    """What differs, in the order of the lines; [] for the same text."""
    if first == second:
        return []
    a, b = first.split("\n"), second.split("\n")
    found: list[Row] = []
    blocks = _blocks(a, b)
    shown = 0  # lines of b that are told
    for begin_a, end_a, begin_b, end_b in blocks:
        lead = max(begin_b - NEAR, shown)
        found += _between(b, shown, lead, bool(found))
        found += [Row(ALIKE, at + 1, b[at]) for at in range(lead, begin_b)]
        found += [Row(OUT, at + 1, a[at]) for at in range(begin_a, end_a)]
        found += [Row(IN, at + 1, b[at]) for at in range(begin_b, end_b)]
        shown = end_b
    found += [Row(ALIKE, at + 1, b[at]) for at in range(shown, min(shown + NEAR, len(b)))]
    return found


def lines(first: str, second: str) -> tuple[str, ...]:
    """The rows as text: mark, number of the line, the line; `MOST` at most, and how many more there are."""
    found = rows(first, second)
    size = max((len(str(row.number)) for row in found if row.mark != GAP), default=1)
    end = "\r" if all(text.count("\r\n") == text.count("\n") for text in (first, second)) else ""
    told = [f"  {'':{size}}  … {row.number} lines alike" if row.mark == GAP else
            f"{row.mark} {row.number:>{size}}  {row.text.removesuffix(end)}" for row in found[:MOST]]
    more = len(found) - MOST
    return (*told, f"  {'':{size}}  … and {more} lines more") if more > 0 else tuple(told)


def count(first: str, second: str) -> tuple[int, int]:
    """How many lines only the first has, and only the second."""
    found = rows(first, second)
    return sum(row.mark == OUT for row in found), sum(row.mark == IN for row in found)


def _between(b: Sequence[str], shown: int, lead: int, begun: bool) -> list[Row]:
    """Lines alike ahead of a block: those behind the block before, and how many are left out."""
    if lead <= shown:
        return []
    tail = min(shown + NEAR, lead) if begun else shown
    found = [Row(ALIKE, at + 1, b[at]) for at in range(shown, tail)]
    left = lead - tail
    if left == 1:
        return [*found, Row(ALIKE, tail + 1, b[tail])]
    return [*found, Row(GAP, left, "")] if left > 1 and begun else found


def _blocks(a: Sequence[str], b: Sequence[str]) -> list[tuple[int, int, int, int]]:
    """Where they differ: lines begin_a to end_a of the one stand for begin_b to end_b of the other."""
    head = _alike(a, b)
    tail = _alike(a[head:][::-1], b[head:][::-1])
    mid_a, mid_b = a[head:len(a) - tail], b[head:len(b) - tail]
    if not mid_a or not mid_b or len(mid_a) * len(mid_b) > _ALIGNED:
        return [(head, head + len(mid_a), head, head + len(mid_b))]
    from difflib import SequenceMatcher  # deferred: saves 4 ms at the opening

    return [(begin_a + head, end_a + head, begin_b + head, end_b + head)
            for tag, begin_a, end_a, begin_b, end_b in SequenceMatcher(None, mid_a, mid_b).get_opcodes()
            if tag != "equal"]


def _alike(a: Sequence[str], b: Sequence[str]) -> int:
    return next((at for at, (x, y) in enumerate(zip(a, b, strict=False)) if x != y), min(len(a), len(b)))
