"""Where everything stands in a TOML text: one pass that maps each path to the characters of its key and value.

The text must be valid TOML 1.0 (`text.toml.read` says so); this pass finds places, it does not judge.
A path is a tuple of keys and array positions: ("stage", 0, "rc"), ("device", "D", "beta").
"""

from __future__ import annotations

import tomllib
from bisect import bisect_right
from dataclasses import dataclass, field

from polebook.problem import Place
from polebook.text.tokens import BARE, BLANK, SCALAR, SPACE, STRING

Path = tuple[str | int, ...]


class Unscannable(ValueError):
    """The text is not the TOML that this pass knows; nothing may be edited by its offsets."""


@dataclass(frozen=True, slots=True)
class Span:
    """Characters start to end (exclusive) of a text."""

    start: int
    end: int


@dataclass(frozen=True, slots=True)
class Entry:
    """A key with its value. `table` is what holds it: a table under a header, or an inline table (`inline`).

    `parts` are the spans of a dotted key's parts, so `path` is `table` and one step for each of them.
    """

    path: Path
    table: Path
    parts: tuple[Span, ...]
    value: Span
    inline: bool

    @property
    def key(self) -> Span:
        """The whole key, dots included."""
        return Span(self.parts[0].start, self.parts[-1].end)


@dataclass(frozen=True, slots=True)
class Header:
    """A table's header, brackets included."""

    path: Path
    span: Span
    array: bool


@dataclass(slots=True)
class Spans:
    """What `scan` found. Entries and headers are in the text's order."""

    text: str
    values: dict[Path, Span] = field(default_factory=dict)
    keys: dict[Path, Span] = field(default_factory=dict)
    entries: dict[Path, Entry] = field(default_factory=dict)
    headers: dict[Path, Header] = field(default_factory=dict)
    lines: list[int] = field(default_factory=list)

    def value(self, path: Path) -> Span | None:
        """The value at `path`, quotes and brackets included; None for a table under a header."""
        return self.values.get(path)

    def key(self, path: Path) -> Span | None:
        """The key, or the part of a dotted key or header, that names `path` where it first stands."""
        return self.keys.get(path)

    def header(self, path: Path) -> Span | None:
        """The header of the table at `path`, brackets included."""
        header = self.headers.get(path)
        return header.span if header else None

    def place(self, path: Path, file: str, key: bool = False) -> Place:
        """Where to point a reader for `path`: its value (or its key), its header, else the nearest thing around it."""
        for length in range(len(path), 0, -1):
            part = path[:length]
            first = self.keys.get(part) if key and length == len(path) else None
            if span := first or self.values.get(part) or self.header(part) or self.keys.get(part):
                return self.at(span, file)
        return Place(file)

    def at(self, span: Span, file: str) -> Place:
        """`span` as a place; of a value over several lines the part on its first."""
        row = bisect_right(self.lines, span.start)
        begin = self.lines[row - 1]
        end = self.lines[row] - 1 if row < len(self.lines) else len(self.text)
        end = min(span.end, end - 1 if self.text[end - 1 : end] == "\r" else end)
        return Place(file, row, span.start - begin + 1, max(end - span.start, 1))


def scan(text: str) -> Spans:
    """Every key, value and header of `text`, in time linear in its length. Raises Unscannable."""
    spans = Spans(text)
    spans.lines = [0]
    at = text.find("\n")
    while at >= 0:
        spans.lines.append(at + 1)
        at = text.find("\n", at + 1)
    _Scanner(spans).document()
    return spans


class _Scanner:
    """Reads a text from front to back; `at` is the next character."""

    def __init__(self, spans: Spans) -> None:
        self.spans = spans
        self.text = spans.text
        self.at = 0
        self.counts: dict[Path, int] = {}  # arrays of tables -> how many of their tables were met

    def document(self) -> None:
        table: Path = ()
        while True:
            self.space()
            if self.at >= len(self.text):
                return
            if self.text[self.at] == "[":
                table = self.table_header()
            else:
                self.entry(table, inline=False)

    def space(self) -> None:
        match = SPACE.match(self.text, self.at)
        self.at = match.end() if match else self.at

    def blank(self) -> None:
        match = BLANK.match(self.text, self.at)
        self.at = match.end() if match else self.at

    def expect(self, char: str) -> None:
        if not self.text.startswith(char, self.at):
            raise Unscannable(f"{char!r} expected at character {self.at}")
        self.at += len(char)

    def peek(self) -> str:
        return self.text[self.at : self.at + 1]

    def table_header(self) -> Path:
        start = self.at
        array = self.text.startswith("[[", start)
        self.at += 2 if array else 1
        names, parts = self.dotted_key()
        self.expect("]]" if array else "]")
        path: Path = ()
        for number, name in enumerate(names):
            path += (name,)
            self.spans.keys.setdefault(path, parts[number])
            if array and number == len(names) - 1:
                count = self.counts.get(path, 0)
                self.counts[path] = count + 1
                path += (count,)
            elif path in self.counts:
                path += (self.counts[path] - 1,)
        self.spans.headers[path] = Header(path, Span(start, self.at), array)
        self.spans.keys.setdefault(path, parts[-1])
        return path

    def dotted_key(self) -> tuple[list[str], list[Span]]:
        names: list[str] = []
        parts: list[Span] = []
        while True:
            self.blank()
            start = self.at
            match = (STRING if self.peek() in ("'", '"') else BARE).match(self.text, start)
            if not match:
                raise Unscannable(f"a key expected at character {start}")
            self.at = match.end()
            names.append(_name(match[0]))
            parts.append(Span(start, self.at))
            self.blank()
            if self.peek() != ".":
                return names, parts
            self.at += 1

    def entry(self, table: Path, inline: bool) -> None:
        names, parts = self.dotted_key()
        self.expect("=")
        self.blank()
        path = table
        for name, part in zip(names, parts, strict=True):
            path += (name,)
            self.spans.keys.setdefault(path, part)
        value = self.value(path)
        self.spans.entries[path] = Entry(path, table, tuple(parts), value, inline)

    def value(self, path: Path) -> Span:
        start, first = self.at, self.peek()
        if first == "[":
            self.array(path)
        elif first == "{":
            self.inline_table(path)
        else:
            match = (STRING if first in ("'", '"') else SCALAR).match(self.text, start)
            if not match:
                raise Unscannable(f"a value expected at character {start}")
            self.at = match.end()
        span = Span(start, self.at)
        self.spans.values[path] = span
        return span

    def array(self, path: Path) -> None:
        self.at += 1
        number = 0
        while True:
            self.space()
            if self.peek() == "]":
                break
            self.value((*path, number))
            number += 1
            self.space()
            if self.peek() != ",":
                break
            self.at += 1
        self.expect("]")

    def inline_table(self, path: Path) -> None:
        self.at += 1
        self.space()
        while self.peek() != "}":
            self.entry(path, inline=True)
            self.space()
            if self.peek() != ",":
                break
            self.at += 1
            self.space()
        self.expect("}")


def _name(raw: str) -> str:
    """The key that `raw` spells."""
    if raw[0] == "'":
        return raw[1:-1]
    if raw[0] != '"':
        return raw
    if "\\" not in raw:
        return raw[1:-1]
    return str(tomllib.loads(f"name = {raw}")["name"])
