"""A record as text: canonical TOML whose differences a reviewer reads in a git diff.

The newest post stands in full at the head, always in the same place, one figure a line, so that a new post shows as
old and new value of what moved. Each line names its stage, for a diff shows three lines of context and no headers.
The posts before follow, newest first, each complete in itself and a line of the chain to a line of text.
"""

from __future__ import annotations

from collections.abc import Iterator
from decimal import Decimal

import tomli_w

from polebook.problem import Place, Problem, ProblemsFound
from polebook.record.posted import EARLIER, FORMAT, NEWEST, NOTE, Post, Record
from polebook.text import toml
from polebook.text.literal import key


def write(record: Record, file: str) -> str:
    """The record as text. Raises ProblemsFound where it would be larger than what is read; `file` is its name."""
    lines = [NOTE + _entry("format", FORMAT), _entry("chain", record.chain), "", *_newest(record.posts[0])]
    for one in record.posts[1:]:
        lines += ["", *_earlier(one)]
    text = "\n".join(lines) + "\n"
    if (size := len(text.encode("utf-8", "replace"))) > toml.LARGEST:
        raise ProblemsFound([Problem(
            Place(file), f"the record would have {size} bytes, and at most {toml.LARGEST} (512 KiB) are read",
            "every post stays in it", "move it away, under another name, and post again: that begins a new one",
        )])
    return text


def _newest(of: Post) -> Iterator[str]:
    yield f"[{NEWEST}]"
    yield from _header(of)
    for group, rows in of.figures.items():
        if not rows:
            continue
        yield ""
        yield f"[{NEWEST}.{key(group)}]"
        for at, (name, row) in enumerate(rows.items()):
            if at and group == "lines":
                yield ""
            lead = f"{key(name)}." if name else ""
            yield from (lead + _entry(figure, value) for figure, value in row.items())


def _earlier(of: Post) -> Iterator[str]:
    yield f"[[{EARLIER}]]"
    yield from _header(of)
    for group, rows in of.figures.items():
        for name, row in rows.items():
            within = ", ".join(_entry(figure, value) for figure, value in row.items())
            yield f"{key(group)}{'.' + key(name) if name else ''} = {{ {within} }}"


def _header(of: Post) -> Iterator[str]:
    yield _entry("date", of.date)
    yield _entry("message", of.message)
    yield _entry("digest", of.digest)
    yield _entry("version", of.version)


def _entry(name: str, value: object) -> str:
    if isinstance(value, float):
        return f"{key(name)} = {_number(value)}"
    return tomli_w.dumps({name: value}).rstrip("\n")


def _number(value: float) -> str:
    """A number in full where it is neither small nor large, else with the exponents of the prefixes: 45.2879e6."""
    exact = Decimal(repr(value)).normalize()
    if not exact:
        return "0"
    if Decimal("1e-4") <= abs(exact) < 10**6:
        return f"{exact:f}"
    exponent = exact.adjusted() // 3 * 3
    return f"{exact.scaleb(-exponent):f}e{exponent}"
