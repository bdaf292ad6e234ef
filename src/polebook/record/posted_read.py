"""A record's text to its posts, or the fault that keeps it from being one."""

from __future__ import annotations

import os
import re
from collections.abc import Mapping
from datetime import date, datetime
from typing import Any

from polebook.problem import Place, Problem, ProblemsFound
from polebook.record.posted import EARLIER, FORMAT, GROUPS, NEWEST, NOTE, WHOLE, Post, Record, Row, Scalar
from polebook.refusal import quoted
from polebook.text import toml
from polebook.text.spans import Path, Unscannable, scan
from polebook.text.tokens import ROUGH

_TOP = ("format", "chain", NEWEST, EARLIER)
_HEAD = (("date", date, "a date such as 2026-12-01"), ("message", str, "a text"),
         ("digest", str, "64 hexadecimal digits"), ("version", str, "a text"))
_MOST = 1e300  # beyond it nothing is finite, or it is a whole number of thousands of digits
_DIGEST = re.compile(r"[0-9a-f]{64}")
_CONFLICT = re.compile(r"^<{7}(?= |\r?$)", re.MULTILINE)


def read(text: str, file: str) -> Record:
    """The record of a text; `file` is the name that messages carry. Raises ProblemsFound where it is none."""
    return _Reader(text, file).record()


def comment(text: str, file: str) -> Problem | None:
    """The first comment that was put into a record by hand, which the next post would lose; None for none."""
    known = {line.rstrip() for line in NOTE.splitlines()}
    for match in ROUGH.finditer(text):
        if match[0].startswith("#") and match[0].rstrip() not in known:
            return Problem(Place.of(text, match.start(), file, len(match[0].rstrip())),
                           "a comment stands in the record",
                           "a post writes the record anew, and the comment would be lost",
                           "move it to a note in the chain file, and post again")
    return None


class _Reader:
    """Reads one text; the first fault ends it, for what is not as it was written is not to be guessed at."""

    def __init__(self, text: str, file: str) -> None:
        self.text, self.file = text, file

    def record(self) -> Record:
        if match := _CONFLICT.search(self.text):
            raise ProblemsFound([Problem(
                Place.of(self.text, match.start(), self.file, 7), "two versions of the record stand here",
                "a merge left both, each with a newest post of its own", "take one side whole, then post again",
            )], self.text)
        data, problems = toml.read(self.text, self.file)
        if data is None:
            raise ProblemsFound(problems, self.text)
        if not {"format", "chain", NEWEST} <= data.keys():
            raise self.fault((), "this is no record of a chain", "it does not begin as polebook post begins one")
        if type(data["format"]) is not int or data["format"] != FORMAT:
            raise self.fault(("format",), f"{quoted(data['format'])} is no known format of a record",
                             f"this polebook knows format {FORMAT}")
        chain, earlier = data["chain"], data.get(EARLIER, [])
        if not isinstance(chain, str) or not chain or os.path.basename(chain) != chain:
            raise self.fault(("chain",), f"{quoted(chain)} is no chain", "here stands the name of the chain's file")
        if not isinstance(earlier, list):
            raise self.fault((EARLIER,), "this is no list of posts", "every earlier one begins with [[earlier]]")
        self.known((), data, _TOP)
        return Record(chain, (self.post((NEWEST,), data[NEWEST]),
                              *(self.post((EARLIER, at), one) for at, one in enumerate(earlier))))

    def post(self, path: Path, raw: Any) -> Post:
        """The post at `path`."""
        table = self.table(path, raw)
        for name, kind, noun in _HEAD:
            value = table.get(name)
            good = isinstance(value, kind) and not isinstance(value, datetime)
            if not good or (name == "digest" and not _DIGEST.fullmatch(str(value))):
                raise self.fault((*path, name), f"the {name} of a post is missing, or is not {noun}",
                                 "every post has its date, message, digest and version")
        self.known(path, table, (*(name for name, _, _ in _HEAD), *GROUPS))
        figures = {group: self.rows((*path, group), table.get(group, {})) for group in GROUPS}
        return Post(table["date"], table["message"], table["digest"], table["version"], figures)

    def rows(self, path: Path, raw: Any) -> Mapping[str, Row]:
        """The rows of a group of figures."""
        if path[-1] == GROUPS[0]:
            return {WHOLE: row} if (row := self.row(path, raw)) else {}
        return {name: self.row((*path, name), row) for name, row in self.table(path, raw).items()}

    def row(self, path: Path, raw: Any) -> Row:
        """A row of figures."""
        result: dict[str, Scalar] = {}
        for name, value in self.table(path, raw).items():
            number = not isinstance(value, bool | str)
            if number and not (isinstance(value, int | float) and abs(value) < _MOST):
                raise self.fault((*path, name), f"{quoted(value)} is no figure",
                                 "a figure is a finite number, true or false, or a text")
            result[name] = float(value) if number else value
        return result

    def table(self, path: Path, raw: Any) -> dict[str, Any]:
        """`raw`, which must be a table."""
        if not isinstance(raw, dict):
            raise self.fault(path, f"{quoted(raw)} stands where a table belongs", "its figures have names")
        return raw

    def known(self, path: Path, raw: Mapping[str, Any], names: tuple[str, ...]) -> None:
        """Nothing may stand in `raw` that the next post would lose."""
        for name in raw:
            if name not in names:
                raise self.fault((*path, name), f"{quoted(name)} has no place in a record",
                                 "a later polebook may know it; this one would lose it with the next post")

    def fault(self, path: Path, what: str, why: str) -> ProblemsFound:
        """A fault at `path`."""
        try:
            place = scan(self.text).place(path, self.file, key=True)
        except Unscannable:
            place = Place(self.file)
        return ProblemsFound([Problem(place, what, why, "bring it back as it was, or move it away and post anew")],
                             self.text)
