"""What a working is written on: the numbers put in, and steps whose values are those of their text."""

from __future__ import annotations

import re
from collections.abc import Mapping
from functools import cached_property
from typing import Any

from polebook.book.build import SECTIONS as SECTIONS_OF_DOCUMENT
from polebook.book.build import document
from polebook.book.ledger import Ledger
from polebook.book.lumped import merged
from polebook.book.sites import interstage_names, site_names
from polebook.book.workings.expression import evaluate
from polebook.book.workings.index import Entry, entries
from polebook.book.workings.units import about, device_figure, unit
from polebook.chain.tables import SECTIONS
from polebook.circuit.elements import Part
from polebook.devices.registry import FAMILIES
from polebook.formula import Formula, Number, Step, Working
from polebook.quantity import DIMENSIONS
from polebook.stages.ladder import ARM
from polebook.stages.registry import KINDS

_SECTIONS = frozenset(SECTIONS_OF_DOCUMENT) - {"verdict", "cautions"}
_UNFIT = re.compile(r"[^\w.]")


class Books:
    """A ledger with its document (without poles and zeros unless `roots`), and where to find things in it."""

    def __init__(self, of: Ledger, roots: bool) -> None:
        self.ledger, self.chain, self.solution = of, of.chain, of.solution
        self.layout, self.net = of.solution.circuit.layout, of.solution.circuit.network
        self.document: Mapping[str, Any] = document(of, _SECTIONS if roots else _SECTIONS - {"poles", "zeros"})
        self.entries = entries(self.document)

    def value(self, name: str) -> Any:
        """A figure by its full name; None where it is null or there is none."""
        entry = self.entries.get(name)
        return None if entry is None else entry.value

    @cached_property
    def part_of(self) -> dict[str, int]:
        """Part number by full name, "Q1.cmu"."""
        return {f"{part.stage}.{part.name}": index for index, part in enumerate(self.layout.parts)}

    @cached_property
    def segment_of(self) -> dict[str, int]:
        return {segment.name: index for index, segment in enumerate(self.layout.segments)}

    @cached_property
    def between(self) -> dict[int, str]:
        """Interstage node -> its name."""
        return interstage_names(self.layout)

    @cached_property
    def site_of(self) -> dict[int, str]:
        return site_names(self.layout)

    @cached_property
    def left_out(self) -> set[str]:
        return {stage.name for stage in self.chain.stages if stage.left_out}

    def about(self, entry: Entry) -> str:
        """What a figure is, in a line."""
        if entry.section == "parts" and entry.key == "value":
            return self._part(entry.row["stage"], entry.row["part"])
        if entry.section == "cards" and entry.key == "value":
            return _key(self, f"device.{entry.row['device']}.{entry.row['figure']}")[1]
        return about(entry.section, entry.key)

    def _part(self, stage: str, name: str) -> str:
        path = path_of(self, stage, name)
        return _key(self, path)[1] if path in self.chain.numbers else device_figure(name)

    def following(self, index: int) -> str:
        """The line that loads what stands before line `index`, left-out ones passed over; "" behind the load."""
        rest = self.layout.segments[index:]
        return next((segment.name for segment in rest if segment.name not in self.left_out), "")

    def preceding(self, index: int) -> str:
        """The line that drives line `index`, left-out ones passed over."""
        rest = reversed(self.layout.segments[:index])
        return next((segment.name for segment in rest if segment.name not in self.left_out), "")

    @cached_property
    def root(self) -> dict[int, int]:
        """Node -> a node that stands for all those that are one with it at midband."""
        return merged(self.solution)

    def node_label(self, node: int) -> str:
        """A node as a reader knows it: n1, also behind what is a short at midband; else Q1.inner."""
        same = (name for other, name in self.between.items() if self.root[other] == self.root[node])
        return self.between.get(node) or next(same, self.layout.names[node])

    def full_name(self, part: Part) -> str:
        return f"{part.stage}.{part.name}"


class Sheet:
    """Collects one working. Symbols are made fit for the arithmetic, and unique."""

    def __init__(self, books: Books, entry: Entry) -> None:
        self.books, self.entry = books, entry
        self.numbers: list[Number] = []
        self.steps: list[Step] = []
        self.symbols: dict[str, float] = {}

    def put(self, symbol: str, value: float, unit: str, about: str, origin: str, kind: str = "solution") -> str:
        """Enters a number; returns the symbol that it goes by."""
        for number in self.numbers:
            if (number.origin, number.about, number.value) == (origin, about, value) and kind != "solution":
                return number.symbol
        symbol = self._free(symbol)
        self.symbols[symbol] = float(value)
        self.numbers.append(Number(symbol, float(value), unit, about, origin, kind))
        return symbol

    def figure(self, symbol: str, name: str, text: str = "") -> str:
        """Enters another figure of the ledger."""
        entry = self.books.entries[name]
        shown = text or self.books.about(entry)
        return self.put(symbol, entry.value, unit(self.books.document, entry), shown, name, "figure")

    def file(self, symbol: str, path: str, text: str = "") -> str:
        """Enters a number of the file, or the default that stands in for it."""
        chain = self.books.chain
        dimension, purpose = _key(self.books, path)
        place = chain.places.get(path)
        stated = path in chain.given
        origin = f"line {place.line}: {path}" if stated and place is not None and place.line else path
        known = DIMENSIONS[dimension].unit if dimension in DIMENSIONS else ""
        if dimension == "amplitude":
            known = "V" if chain.source_kind == "voltage" else "A"
        return self.put(symbol, chain.numbers[path], known, text or purpose, origin, "file" if stated else "default")

    def step(self, text: str, unit: str = "", about: str = "", result: bool = False) -> str:
        """Enters "symbol = expression" and computes it; returns the symbol that it goes by."""
        wanted, _, expression = text.partition(" = ")
        symbol = self._free(wanted)
        value = evaluate(expression, self.symbols)
        self.symbols[symbol] = value
        self.steps.append(Step(symbol, expression, value, unit, about, result))
        return symbol

    def result(self, text: str, about: str = "") -> None:
        """Enters a step that comes to the figure itself."""
        self.step(text, unit(self.books.document, self.entry), about, True)

    def _free(self, symbol: str) -> str:
        """The symbol made fit for the arithmetic, with a number behind it where it is taken."""
        symbol = base = _UNFIT.sub("_", symbol)
        count = 1
        while symbol in self.symbols:
            count += 1
            symbol = f"{base}_{count}"
        return symbol

    def check(self, text: str, must: str, unit: str = "", about: str = "") -> None:
        """Enters an equation that has to hold: `text` comes to what `must` comes to."""
        value, wanted = evaluate(text, self.symbols), evaluate(must, self.symbols)
        self.steps.append(Step("", text, value, unit, about, False, must, wanted))

    def done(self, formula: Formula, note: str = "", why: str = "") -> Working:
        """The working by a formula."""
        return self.stated(formula.text, formula.source, note, why)

    def stated(self, text: str, source: str, note: str = "", why: str = "") -> Working:
        entry = self.entry
        return Working(entry.name, entry.value, unit(self.books.document, entry), self.books.about(entry), text,
                       source, tuple(self.numbers), tuple(self.steps), why, note)


def plus(symbols: list[str]) -> str:
    """"a + b + c"; "0" for none."""
    return " + ".join(symbols) if symbols else "0"


def times(symbols: list[str]) -> str:
    return "·".join(symbols) if symbols else "1"


def path_of(books: Books, stage: str, name: str) -> str:
    """Number path of a part that a key of its table sets, as far as it can be one."""
    if name.startswith("arm") and name[3:4].isdigit():
        number, _, letter = name[3:].partition(".")
        prefix = f"{stage}.arms.{number}."
        return next((path for path in books.chain.numbers if path.startswith(prefix)
                     and path[-1] == (letter or path[-1])), "")
    for word, key in (("pole", "poles"), ("lower", "lower_poles")):
        if name.startswith(word) and name[len(word):].isdigit():
            return f"{stage}.{key}.{name[len(word):]}"
    return f"{stage}.{name}"


def _key(books: Books, path: str) -> tuple[str, str]:
    """(dimension, purpose) of the key behind a number path."""
    owner, _, rest = path.partition(".")
    key = rest.rpartition(".")[2]
    if owner == "device":
        rows = FAMILIES[books.chain.cards[rest.rpartition(".")[0]].family]
    elif owner in SECTIONS:
        rows = SECTIONS[owner]
    else:
        stage = next(stage for stage in books.chain.stages if stage.name == owner)
        return _stage_key(books, stage.kind, stage.device, rest, key)
    return next(((row.dimension, row.about) for row in rows if row.key == key), ("factor", ""))


def _stage_key(books: Books, kind: str, device: str, rest: str, key: str) -> tuple[str, str]:
    family = books.chain.cards[device].family if device else ""
    if rest.startswith(("poles.", "lower_poles.")):
        return "frequency", KINDS[kind].keys()[rest.partition(".")[0]].about
    if rest.startswith("arms."):
        return next((row.dimension, row.about) for row in ARM if row.key == key)
    row = KINDS[kind].keys(family)[key]
    return row.dimension, row.about
