"""What one reading of a chain file gathers: numbers, their places, and every fault."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

from polebook.chain.suggest import nearest
from polebook.problem import Place, Problem
from polebook.text.spans import Spans

TextPath = tuple[str | int, ...]
_MOST_SEARCHES = 200  # for near words: a file of ten thousand wrong keys must not take seconds
MOST_FAULTS = 1000


class TooMany(Exception):
    """Ends a reading that found MOST_FAULTS faults: the file is no chain, and nobody reads on."""


@dataclass(frozen=True, slots=True)
class Owner:
    """A table of the file: where it stands, the beginning of its number paths, and its name in sentences."""

    path: TextPath
    prefix: str
    words: str

    def number(self, key: str) -> str:
        """Number path of `key`."""
        return f"{self.prefix}.{key}" if self.prefix else key


class Desk:
    """Collects what a reading finds. Faults are kept with the text path they concern, to compare two readings."""

    def __init__(self, text: str, file: str, spans: Spans) -> None:
        self.text, self.file, self.spans = text, file, spans
        self.found: list[tuple[Problem, TextPath]] = []
        self.numbers: dict[str, float] = {}
        self.given: set[str] = set()
        self.places: dict[str, Place] = {}
        self._searches = 0

    def fault(self, path: TextPath, what: str, why: str, fix: str, at: str = "value") -> None:
        """A fault about `path`, shown at its value, at its "key", or at the "table" that should hold it."""
        self.found.append((Problem(self.place(path, at), what, why, fix), path))
        if len(self.found) >= MOST_FAULTS:
            raise TooMany

    def place(self, path: TextPath, at: str = "value") -> Place:
        """Where `path` stands in the file; line 0 where the file does not have it."""
        return self.spans.place(path[:-1] if at == "table" else path, self.file, at == "key")

    def mark(self, name: str, path: TextPath) -> None:
        """Remembers the place of a number, a table or a stage."""
        self.places[name] = self.place(path)

    def put(self, name: str, value: float, path: TextPath | None) -> None:
        """A number as read, its place marked; `path` is None for a default."""
        self.numbers[name] = value
        if path is not None:
            self.given.add(name)
            if name not in self.places:
                self.mark(name, path)

    def near(self, word: str, known: Iterable[str]) -> str:
        """The nearest known word, "" where none is near."""
        self._searches += 1
        return nearest(word, known) if self._searches <= _MOST_SEARCHES else ""

    def problems(self) -> list[Problem]:
        """Every fault, in the order of the file; each once."""
        unique = dict.fromkeys(problem for problem, _ in self.found)
        return sorted(unique, key=lambda p: (p.place.line, p.place.column) if p.place else (0, 0))
