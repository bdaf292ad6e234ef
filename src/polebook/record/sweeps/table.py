"""A table of a sweep: comments, a header that names the columns, and one line of numbers for each frequency.

Between cells stand semicolons, tabs, commas or blanks, whichever of them comes first in this order in the line of the
first numbers. A comma is a decimal point only where semicolons or tabs stand between cells. Comments begin with #, !,
% or // (a semicolon, where that is no separator); # and ! begin one within a line too.
"""

from __future__ import annotations

import csv
import re
from collections.abc import Iterator
from dataclasses import dataclass
from math import isnan
from typing import NoReturn

from polebook.record.sweeps import columns as heads
from polebook.record.sweeps.columns import Columns, Unclear
from polebook.record.sweeps.gather import Rows
from polebook.record.sweeps.numbers import NUMBER, number
from polebook.record.sweeps.source import MOST_POINTS, refuse, too_many
from polebook.record.sweeps.sweep import Sweep
from polebook.refusal import quoted

_COMMENT = re.compile(r"[#!%]|//")
_SEPARATORS = ";\t,"
_DECIMAL = re.compile(r"[+-]?[0-9]*,[0-9]+(?:[eE][+-]?[0-9]+)?")
_EITHER = re.compile(r"[+-]?[0-9]+(?:,[0-9]+)?[ ]+[+-]?[0-9]+,[0-9]+")
_SAYS = re.compile(r"\"?sep=(.)\"?", re.IGNORECASE)
_SEPARATE = "put semicolons or tabs between the cells, or write decimal points"


def parse(name: str, text: str) -> Sweep:
    """The sweep that the text of a table holds. Raises ProblemsFound."""
    return _Reader(name, text).sweep()


@dataclass(frozen=True, slots=True)
class _Line:
    """A line that is no comment, and what of it is none."""

    number: int
    text: str


class _Reader:
    """One table at work."""

    def __init__(self, name: str, text: str) -> None:
        self.name, self.text = name, text
        self.source = text.split("\n")
        self.separator = ""
        self.comma = False  # stands for the decimal point
        self.comments: list[_Line] = []

    def sweep(self) -> Sweep:
        lines = list(self._lines())
        begin = lines[self._first(lines)]
        if self.separator != ";":
            lines = [line for line in lines if not line.text.startswith(";")]
        first = lines.index(begin)
        table = [(line.number, self._cells(line.text)) for line in lines[first:]]
        if len(table) > 2 * MOST_POINTS:  # all that follows takes each line in turn
            too_many(self.name, self.text, table[2 * MOST_POINTS][0])
        self._decimals(table)
        width = max(len(_trimmed(cells)) for _, cells in table)
        columns, notes = self._columns(lines[:first], table[0][0], width)
        rows = Rows(self.name, self.text, columns.form, columns.second >= 0, columns.scale, columns.turn)
        rows.notes += notes
        for line, cells in table:
            self._row(rows, columns, line, cells)
        return rows.sweep()

    def _lines(self) -> Iterator[_Line]:
        """Every line that is neither blank nor a comment; comments are kept beside."""
        for at, line in enumerate(self.source, 1):
            bare = line.strip()
            if not bare:
                continue
            if match := _COMMENT.match(bare):
                self.comments.append(_Line(at, bare[match.end():].strip("#!%/ ")))
            elif (said := _SAYS.fullmatch(bare)) and not self.separator:
                self.separator = said[1]
            else:
                kept = _uncommented(line).strip(" ")
                yield _Line(at, kept)

    def _first(self, lines: list[_Line]) -> int:
        """Place of the first line of numbers; tells what stands between cells."""
        said = self.separator
        for at, line in enumerate(lines):
            self.separator = said or next((mark for mark in _SEPARATORS if mark in line.text), " ")
            if self.separator == "," and _EITHER.match(line.text):
                self._refuse(line.number, "a comma could be a decimal point or stand between two cells",
                             "it is a decimal point only where semicolons or tabs stand between the cells", _SEPARATE)
            cells = self._cells(line.text)
            found = [number(cell.replace(",", ".") if self.separator != "," else cell) for cell in cells]
            if found[0] is not None and not isnan(found[0]) and any(one is not None for one in found[1:]):
                return at
        if not lines:
            self._refuse(0, "the file holds no numbers", "a sweep has one line for each frequency",
                         "export frequency and gain as text")
        single = next((line for line in lines if NUMBER.fullmatch(line.text)), None)
        one = single or lines[0]
        self._refuse(one.number, "no line of the file holds a frequency and a gain",
                     f"{quoted(one.text)} is one column" if single else
                     f"{quoted(one.text)} is the first line that is no comment",
                     "write lines such as 1000, 32.5, or name another file")

    def _cells(self, line: str) -> list[str]:
        """The cells of a line, without quotes and blanks."""
        if self.separator == " ":
            return [cell.strip('"') for cell in line.split()]
        parts = next(csv.reader([line], delimiter=self.separator)) if '"' in line else line.split(self.separator)
        return [part.strip(" \t\u00a0") for part in parts]

    def _decimals(self, table: list[tuple[int, list[str]]]) -> None:
        """Whether the comma is the decimal point; it and the point together are refused."""
        if self.separator == ",":
            return
        comma = point = 0
        for line, cells in table:
            for cell in cells:
                if "," in cell and self.separator == " ":
                    self._refuse(line, f"{quoted(cell)} is no number",
                                 "between the cells of this file stand blanks, and a comma is a decimal point only "
                                 "where semicolons or tabs do", _SEPARATE, cell)
                comma = comma or (line if _DECIMAL.fullmatch(cell) else 0)
                point = point or (line if "." in cell and NUMBER.fullmatch(cell) else 0)
        if comma and point:
            self._refuse(max(comma, point), "decimal points and decimal commas stand in one file",
                         f"line {min(comma, point)} has the one and line {max(comma, point)} the other, so that "
                         "either could separate thousands", "write all numbers alike")
        self.comma = bool(comma)

    def _columns(self, ahead: list[_Line], first: int, width: int) -> tuple[Columns, list[str]]:
        """The columns by the last line ahead of the numbers, else by a comment ahead of them, else as they come."""
        if ahead:
            found = self._header(ahead[-1], width)
            passed = ahead[:-1]
            lines = f"line {passed[0].number}" if len(passed) == 1 else \
                f"lines {passed[0].number} to {passed[-1].number}" if passed else ""
            return found, [*found.notes, *([f"passed over ahead of the header: {lines}"] if lines else [])]
        for comment in reversed([one for one in self.comments if one.number < first]):
            if said := self._said(comment.text, width):
                return said, list(said.notes)
        try:
            plain = heads.plain(width)
        except Unclear as unclear:
            self._refuse(first, unclear.what, unclear.why, unclear.fix)
        return plain, list(plain.notes)

    def _header(self, line: _Line, width: int) -> Columns:
        """The columns by a header; one that is separated otherwise than the numbers is taken as a comment would be."""
        headings = _trimmed(self._cells(line.text))
        if len(headings) == 1 and (found := self._said(line.text, width)):
            return found
        try:
            return heads.columns(headings)
        except Unclear as unclear:
            self._refuse(line.number, unclear.what, unclear.why, unclear.fix)

    def _said(self, comment: str, width: int) -> Columns | None:
        """The columns that a comment names, None where it is no header of so many columns."""
        for mark in dict.fromkeys((self.separator, ",", ";", "\t", " ")):
            names = _trimmed([part.strip() for part in (comment.split() if mark == " " else comment.split(mark))])
            if len(names) == width:
                try:
                    return heads.columns(names)
                except Unclear:
                    continue
        return None

    def _row(self, rows: Rows, columns: Columns, line: int, cells: list[str]) -> None:
        kept = _trimmed(cells)
        if len(kept) > columns.count or (len(kept) < columns.count and self.separator == " "):
            hint = " (a decimal comma needs semicolons or tabs between the cells)" if self.separator == "," else ""
            self._refuse(line, f"the line has {len(kept)} cell{'s' * (len(kept) != 1)}",
                         f"the table has {columns.count} columns{hint}", "complete the line, or take it out")
        kept += [""] * (columns.count - len(kept))
        hz, first = (self._number(line, kept[at]) for at in (columns.frequency, columns.first))
        second = self._number(line, kept[columns.second]) if columns.second >= 0 else 0.0
        if isnan(hz):
            self._refuse(line, "the line has no frequency", "every row of a sweep is at a frequency",
                         "take the line out, or begin it with # to keep it")
        rows.add(line, hz, first, second)

    def _number(self, line: int, cell: str) -> float:
        found = number(cell.replace(",", ".") if self.comma else cell)
        if found is None:
            self._refuse(line, f"{quoted(cell)} is no number",
                         "behind the first line of numbers each line is one, or a comment",
                         "mend it, or begin the line with #", cell)
        return found

    def _refuse(self, line: int, what: str, why: str, fix: str, cell: str = "") -> NoReturn:
        at = self.source[line - 1].find(cell) + 1 if line and cell else 0
        refuse(self.name, self.text, line, what, why, fix, at, max(1, len(cell)))


def _trimmed(cells: list[str]) -> list[str]:
    """The cells without empty ones at the end, which separators there make."""
    count = len(cells)
    while count and not cells[count - 1]:
        count -= 1
    return cells[:count]


def _uncommented(line: str) -> str:
    """The line up to a # or ! that stands in no quotes."""
    if "#" not in line and "!" not in line:
        return line
    quoted_now = False
    for at, char in enumerate(line):
        if char == '"':
            quoted_now = not quoted_now
        elif char in "#!" and not quoted_now:
            return line[:at]
    return line
