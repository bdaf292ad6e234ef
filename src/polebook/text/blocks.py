"""Blocks of a TOML text: a header, its keys, its sub-tables and the comment lines directly above it."""

from __future__ import annotations

from bisect import bisect_right
from collections.abc import Sequence
from dataclasses import dataclass

from polebook.text.edit import Splice
from polebook.text.spans import Header, Path, Span, Spans

# the order in which a chain file's top-level tables stand
ORDER = ("supply", "source", "stage", "load", "target", "preferred", "tolerance", "device", "bench")


@dataclass(frozen=True, slots=True)
class Block:
    """A top-level block or a part of one: characters from its first comment line to the end of its last line."""

    path: Path
    span: Span


def blocks(spans: Spans) -> list[Block]:
    """The text's blocks in order, each with the sub-tables that follow it. Keys before the first header are in none."""
    heads, ends = list(spans.headers.values()), _ends(spans)
    found: list[Block] = []
    number = 0
    while number < len(heads):
        block, number = _block(spans.text, heads, ends, number)
        found.append(block)
    return found


def block_of(spans: Spans, path: Path) -> Block | None:
    """The block of the header `path`, which may itself stand in another one's; None where there is no such header."""
    heads = list(spans.headers.values())
    number = next((at for at, head in enumerate(heads) if head.path == path), None)
    return None if number is None else _block(spans.text, heads, _ends(spans), number)[0]


def _block(text: str, heads: Sequence[Header], ends: Sequence[int], number: int) -> tuple[Block, int]:
    """The block of a header, and the number of the header after it."""
    path = heads[number].path
    after = number + 1
    while after < len(heads) and _inside(heads[after].path, path):
        after += 1
    limit = _lead(text, heads[after].span.start) if after < len(heads) else len(text)
    span = Span(_lead(text, heads[number].span.start), _end(text, heads[after - 1].span.end, ends, limit))
    return Block(path, span), after


def _ends(spans: Spans) -> list[int]:
    """Where the values end, sorted."""
    return sorted(entry.value.end for entry in spans.entries.values())


def new_table(spans: Spans, top: str, header: str, line: str) -> Splice:
    """A new table with one line, at its place among the top-level ones, a blank line between it and the next."""
    return new_block(spans, top, [header, line])


def new_block(spans: Spans, top: str, lines: Sequence[str]) -> Splice:
    """The lines of a new block of the top-level table `top`, after the last of its kind or at the format's place."""
    text = spans.text
    all_blocks = blocks(spans)
    own = [block for block in all_blocks if block.path[0] == top]
    before = own or [block for block in all_blocks if _rank(str(block.path[0])) <= _rank(top)]
    feed = newline(text, len(text))
    if not before and all_blocks:
        return Splice(all_blocks[0].span.start, "", f"{feed.join(lines)}{feed}{feed}")
    if before:
        return after_block(spans, before[-1], lines)
    at = len(text.rstrip())
    at = len(text) if (end := text.find("\n", at)) < 0 else end + 1
    return _lines_at(text, at, feed, lines)


def after_block(spans: Spans, block: Block, lines: Sequence[str]) -> Splice:
    """The lines of a new block right after `block`, a blank line between."""
    at = block.span.end
    return _lines_at(spans.text, at, newline(spans.text, max(at - 1, 0)), lines)


def before_block(spans: Spans, block: Block, lines: Sequence[str]) -> Splice:
    """The lines of a new block right before `block`, a blank line between."""
    feed = newline(spans.text, block.span.start)
    return Splice(block.span.start, "", f"{feed.join(lines)}{feed}{feed}")


def _lines_at(text: str, at: int, feed: str, lines: Sequence[str]) -> Splice:
    body = feed.join(lines)
    if at and not text.endswith("\n", 0, at):
        return Splice(at, "", f"{feed}{feed}{body}")
    return Splice(at, "", f"{feed if at else ''}{body}{feed}")


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


def _end(text: str, header: int, ends: Sequence[int], limit: int) -> int:
    """The end of the last line of a block whose last header ends at `header` and that must end by `limit`.

    `ends` are the ends of all values, sorted. Comment lines that follow the last line at once belong to it.
    """
    number = bisect_right(ends, limit)  # the last value may end where the text does
    at = _past_line(text, max(header, ends[number - 1] if number else 0))
    while at < limit and text[at:limit].lstrip(" \t").startswith("#"):
        at = _past_line(text, at)
    return at


def _past_line(text: str, at: int) -> int:
    end = text.find("\n", at)
    return len(text) if end < 0 else end + 1
