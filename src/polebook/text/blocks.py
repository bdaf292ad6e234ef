"""Blocks of a TOML text: a header, its keys, its sub-tables and the comment lines directly above it."""

from __future__ import annotations

from bisect import bisect_left
from dataclasses import dataclass

from polebook.text.edit import Splice
from polebook.text.spans import Path, Span, Spans

# the order in which a chain file's top-level tables stand
ORDER = ("supply", "source", "stage", "load", "target", "preferred", "tolerance", "device", "bench")


@dataclass(frozen=True, slots=True)
class Block:
    """A top-level block or a part of one: characters from its first comment line to the end of its last line."""

    path: Path
    span: Span


def blocks(spans: Spans) -> list[Block]:
    """The text's blocks in order, each with the sub-tables that follow it. Keys before the first header are in none."""
    heads = list(spans.headers.values())
    starts = [_lead(spans.text, head.span.start) for head in heads]
    ends = sorted(entry.value.end for entry in spans.entries.values())
    found: list[Block] = []
    number = 0
    while number < len(heads):
        path = heads[number].path
        after = number + 1
        while after < len(heads) and _inside(heads[after].path, path):
            after += 1
        limit = starts[after] if after < len(heads) else len(spans.text)
        found.append(Block(path, Span(starts[number], _end(spans.text, heads[after - 1].span.end, ends, limit))))
        number = after
    return found


def new_table(spans: Spans, top: str, header: str, line: str) -> Splice:
    """A new table with one line, at its place among the top-level ones, a blank line between it and the next."""
    text = spans.text
    all_blocks = blocks(spans)
    before = [block for block in all_blocks if _rank(str(block.path[0])) <= _rank(top)]
    feed = newline(text, len(text))
    if not before and all_blocks:
        at = all_blocks[0].span.start
        return Splice(at, "", f"{header}{feed}{line}{feed}{feed}")
    if before:
        at = before[-1].span.end
        feed = newline(text, max(at - 1, 0))
    else:
        at = len(text.rstrip())
        at = len(text) if (end := text.find("\n", at)) < 0 else end + 1
    if at and not text.endswith("\n", 0, at):
        return Splice(at, "", f"{feed}{feed}{header}{feed}{line}")
    return Splice(at, "", f"{feed if at else ''}{header}{feed}{line}{feed}")


def first_line(spans: Spans, line: str) -> Splice:
    """A first key of the top level: before the first header and the comments above it, or at the end."""
    text = spans.text
    feed = newline(text, 0)
    if spans.headers:
        head = next(iter(spans.headers.values()))
        return Splice(_lead(text, head.span.start), "", f"{line}{feed}{feed}")
    if text and not text.endswith("\n"):
        return Splice(len(text), "", f"{feed}{line}")
    return Splice(len(text), "", f"{line}{feed}")


def newline(text: str, at: int) -> str:
    """The line ending of the line of character `at`; of the text's first line where that one has none."""
    end = text.find("\n", at)
    if end < 0:
        end = text.find("\n")
    return "\r\n" if end > 0 and text[end - 1] == "\r" else "\n"


def _rank(top: str) -> int:
    return ORDER.index(top) if top in ORDER else len(ORDER)


def _inside(path: Path, outer: Path) -> bool:
    return len(path) > len(outer) and path[: len(outer)] == outer


def _lead(text: str, at: int) -> int:
    """The start of the comment lines directly above the line of character `at`, or of that line."""
    start = text.rfind("\n", 0, at) + 1
    while start:
        above = text.rfind("\n", 0, start - 1) + 1
        if not text[above:start].lstrip(" \t").startswith("#"):
            break
        start = above
    return start


def _end(text: str, header: int, ends: list[int], limit: int) -> int:
    """The end of the last line of a block whose last header ends at `header` and that must end by `limit`.

    `ends` are the ends of all values, sorted. Comment lines that follow the last line at once belong to it.
    """
    number = bisect_left(ends, limit)
    at = _past_line(text, max(header, ends[number - 1] if number else 0))
    while at < limit and text[at:limit].lstrip(" \t").startswith("#"):
        at = _past_line(text, at)
    return at


def _past_line(text: str, at: int) -> int:
    end = text.find("\n", at)
    return len(text) if end < 0 else end + 1
