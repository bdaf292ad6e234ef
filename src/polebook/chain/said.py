"""Values and keys of a file as labels tell them: "rc of Q1: 4k7 to 5k1"."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from polebook.problem import printable
from polebook.text.data import find
from polebook.text.spans import Path, Spans

_LONGEST = 32


def said(path: str) -> str:
    """A path as people say it: "rc of Q1", "upper of target", "beta of card D"."""
    first, _, rest = path.partition(".")
    if not rest:
        return printable(first)
    if first == "device":
        name, _, key = rest.rpartition(".")
        return f"{printable(key)} of card {printable(name)}"
    return f"{printable(rest)} of {printable(first)}"


def raw_text(data: Mapping[str, Any], spans: Spans, path: Path) -> str:
    """What stands at `path` as its user typed it: a text without its quotes, a list's items; "" for nothing."""
    value = find(data, path)
    if value is None:
        return ""
    if isinstance(value, str):
        return value
    if isinstance(value, list):
        return ", ".join(raw_text(data, spans, (*path, at)) for at in range(len(value)))
    span = spans.value(path)
    return spans.text[span.start : span.end] if span else str(value)


def short(text: str) -> str:
    """A value in a label: one line, cut where it is long."""
    line = printable(text.replace("\r\n", " ").replace("\n", " ").strip())
    return line if len(line) <= _LONGEST else f"{line[: _LONGEST - 1]}…"


def change(path: str, before: str, after: str) -> str:
    """The label of an edit of one key; "" stands for a value that is not there."""
    if not before:
        return f"{said(path)}: {short(after)}"
    if not after:
        return f"{said(path)} taken out: was {short(before)}"
    return f"{said(path)}: {short(before)} to {short(after)}"
