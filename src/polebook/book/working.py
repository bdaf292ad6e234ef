"""How any figure of the ledger came about: formula, numbers put in, result, and where the method is published."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping
from contextlib import suppress

from polebook.book.ledger import Ledger
from polebook.book.reach import within_reach
from polebook.book.workings import index
from polebook.book.workings.bias import bias
from polebook.book.workings.judged import account, target
from polebook.book.workings.levels import level, rail
from polebook.book.workings.lines import line
from polebook.book.workings.nodes import node
from polebook.book.workings.nulls import why
from polebook.book.workings.parts import bridge, card, part
from polebook.book.workings.roots import root
from polebook.book.workings.sheet import Books, Sheet
from polebook.book.workings.whole import whole
from polebook.formula import Working
from polebook.problem import ProblemsFound

_MAKERS: Mapping[str, Callable[[Books, Sheet], Working]] = {
    "overall": whole, "lines": line, "bridges": bridge, "nodes": node, "parts": part, "bias": bias,
    "account": account, "targets": target, "cards": card, "poles": root, "zeros": root, "rails": rail,
    "levels": level,
}


def workings(of: Ledger) -> Iterator[Working]:
    """The working of every figure of a ledger, in the order of its document."""
    with within_reach(of.chain):
        books = Books(of, roots=True)
        for entry in books.entries.values():
            yield _made(books, entry)


def names(of: Ledger) -> list[str]:
    """The name of every figure of a ledger, null ones too, in the order of its document."""
    with within_reach(of.chain):
        return list(Books(of, roots=True).entries)


def _find(of: Ledger, name: str) -> tuple[Books, index.Entry]:
    """The figure; poles and zeros, which take the longest, are only looked for where they may be meant."""
    head = name.partition(".")[0]
    if not any(section.startswith(head) for section in ("poles", "zeros")):
        books = Books(of, roots=False)
        with suppress(ProblemsFound):
            return books, index.find(books.entries, books.document, name)
    books = Books(of, roots=True)
    return books, index.find(books.entries, books.document, name)


def working(of: Ledger, name: str) -> Working:
    """How a figure came about, by its name or a unique beginning of it (`workings.index` shows the names).

    Raises ProblemsFound, with the near names, where no figure or more than one has that name.
    """
    with within_reach(of.chain):
        books, entry = _find(of, name.strip())
        return _made(books, entry)


def _made(books: Books, entry: index.Entry) -> Working:
    sheet = Sheet(books, entry)
    if entry.value is None:
        return sheet.stated("", "", why=why(books, entry))
    return _MAKERS[entry.section](books, sheet)
