"""One of two files that are compared: its text, what it says, and how it spells a value."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

from polebook.chain.model import Chain
from polebook.chain.read import reading_of
from polebook.chain.said import raw_text
from polebook.problem import ProblemsFound
from polebook.text.spans import Path, Spans, Unscannable, scan

Data = Mapping[str, Any]


@dataclass(frozen=True, slots=True)
class Side:
    """`name` is what messages call the file, "ab12cd34:chains/x.toml" for a revision."""

    name: str
    text: str
    chain: Chain
    data: Data
    spans: Spans

    def spelled(self, path: Path) -> str:
        """What stands at `path` as its user typed it; "" for nothing."""
        return raw_text(self.data, self.spans, path)


def side(text: str, name: str) -> Side:
    """Reads `text`. Raises ProblemsFound with every fault."""
    reading = reading_of(text, name)
    if reading.chain is None or reading.data is None:
        raise ProblemsFound(reading.problems, text)
    try:
        spans = scan(text)
    except Unscannable:  # values are told as TOML has them, not as they are spelled
        spans = Spans(text)
    return Side(name, text, reading.chain, reading.data, spans)
