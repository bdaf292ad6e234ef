"""Touchstone 1.x (.s2p): the S parameters of a two-port, of which S21 is the gain.

Touchstone File Format Specification, revision 1.1, EIA/IBIS Open Forum, 2002. A comment runs from ! to the end of its
line. The option line `# Hz|kHz|MHz|GHz S MA|DB|RI R n` stands before the data; what it leaves out is GHz, S, MA and
50 ohms, case does not matter, further option lines are ignored. Each frequency has S11 S21 S12 S22, two numbers each,
angles in degrees. Noise data of five numbers follow where the frequency falls back.

With the reference resistance R on both sides S21 = 2·V2/Vs, so that V(load)/EMF = S21/2 for a source and a load of R.
"""

from __future__ import annotations

from collections.abc import Iterator
from math import inf, isfinite, log10
from typing import NoReturn

from polebook.problem import Place, Problem, ProblemsFound
from polebook.quantity import engineering
from polebook.record.sweeps.gather import COMPLEX, DECIBELS, MAGNITUDE, Rows
from polebook.record.sweeps.numbers import NUMBER
from polebook.record.sweeps.source import refuse
from polebook.record.sweeps.sweep import Sweep
from polebook.refusal import quoted

ENDING = ".s2p"
HALF_DB = 20.0 * log10(2.0)
_UNITS = {"hz": 1.0, "khz": 1e3, "mhz": 1e6, "ghz": 1e9}
_NAMES = {"hz": "Hz", "khz": "kHz", "mhz": "MHz", "ghz": "GHz"}
_FORMS = {"ma": MAGNITUDE, "db": DECIBELS, "ri": COMPLEX}
_OTHERS = {"y": "Y", "z": "Z", "h": "H", "g": "G"}
_RECORD, _NOISE = 9, 5  # numbers of a frequency
_EXAMPLE = "write it like # MHz S MA R 50"


def check(name: str, ending: str) -> None:
    """Raises ProblemsFound for a name that says Touchstone, but of another number of ports, or of version 2."""
    ports = ending[2:-1]
    if ending == ".ts":
        raise ProblemsFound([Problem(Place(name), "this is a Touchstone file of version 2",
                                     "version 1 is read, in files that end in .s2p", "save it in version 1")])
    if ending.startswith(".s") and ending.endswith("p") and ports.isdecimal() and ports != "2":
        raise ProblemsFound([Problem(Place(name), f"this is a file of {ports} port{'s' * (ports != '1')}",
                                     "the gain of a chain is S21 of a two-port",
                                     "save the two ports of the chain as .s2p")])


def parse(name: str, text: str) -> Sweep:
    """The sweep that a Touchstone text holds. Raises ProblemsFound."""
    return _Reader(name, text).sweep()


class _Reader:
    """One file at work: `rows` from the option line on."""

    def __init__(self, name: str, text: str) -> None:
        self.name, self.text = name, text
        self.rows: Rows | None = None
        self.last_hz = -inf
        self.noise: list[int] = []
        self.begun: list[tuple[int, float]] = []  # numbers of a frequency that is not complete, with their lines

    def sweep(self) -> Sweep:
        for number, line in self._lines():
            if line[0] == "[":
                self._refuse(number, "this is a Touchstone file of version 2",
                             "keywords in brackets are of version 2, and version 1 is read", "save it in version 1")
            elif line[0] == "#":
                if self.rows is None:
                    self.rows = self._options(number, line)
            elif self.rows is None:
                self._refuse(number, "there is no option line before the data",
                             "it tells unit, form and reference resistance", _EXAMPLE)
            else:
                self._data(self.rows, number, [self._number(number, word) for word in line.split()])
        if self.begun:
            self._refuse(self.begun[0][0], f"its frequency has {len(self.begun)} numbers, and the file ends",
                         "a two-port has the frequency, and two numbers each of S11, S21, S12 and S22",
                         "complete the line, or take it out")
        if self.rows is None:
            self._refuse(0, "there is no option line", "it tells unit, form and reference resistance", _EXAMPLE)
        if self.noise:
            first, last = self.noise[0], self.noise[-1]
            where = f"line {first}" if first == last else f"lines {first} to {last}"
            self.rows.notes.append(f"noise data in {where}: not used")
        return self.rows.sweep()

    def _lines(self) -> Iterator[tuple[int, str]]:
        """Lines with their numbers, without comments and blanks."""
        for number, line in enumerate(self.text.split("\n"), 1):
            kept = line.partition("!")[0].strip()
            if kept:
                yield number, kept

    def _options(self, number: int, line: str) -> Rows:
        words = line[1:].split()
        unit, form, ohm = "ghz", "ma", 50.0
        at = 0
        while at < len(words):
            word = words[at].lower()
            if word in _UNITS:
                unit = word
            elif word in _FORMS:
                form = word
            elif word == "r":
                at += 1
                ohm = self._ohm(number, words[at] if at < len(words) else "")
            elif word in _OTHERS:
                self._refuse(number, f"the file holds {_OTHERS[word]} parameters", "a gain is read from S parameters",
                             "save it with S parameters")
            elif word != "s":
                self._refuse(number, f"{quoted(words[at])} is no option of Touchstone 1",
                             "an option line has a unit of frequency, S, a form (MA, DB, RI) and R with ohms", _EXAMPLE)
            at += 1
        ohms = engineering(ohm, "Ω")
        rows = Rows(self.name, self.text, _FORMS[form], True, _UNITS[unit], 1.0, HALF_DB, ohm)
        rows.notes.append(f"read as {_NAMES[unit]}, S21 as {_FORMS[form]}{'' if form == 'ri' else ' and degrees'}")
        rows.notes.append(f"S21 is between {ohms} and {ohms}; V(load)/EMF is half of it, 6.02 dB less")
        return rows

    def _ohm(self, number: int, word: str) -> float:
        value = float(word) if NUMBER.fullmatch(word) else 0.0
        if not (value > 0.0 and isfinite(value)):
            self._refuse(number, f"{quoted(word)} is no reference resistance" if word else "R has no number behind it",
                         "R is followed by the resistance in ohms that the parameters refer to", _EXAMPLE)
        return value

    def _number(self, line: int, word: str) -> float:
        if not NUMBER.fullmatch(word):
            self._refuse(line, f"{quoted(word)} is no number",
                         "data are numbers with a decimal point; what is none begins with !",
                         "mend it, or put ! before what is a comment", word)
        return float(word)

    def _data(self, rows: Rows, line: int, numbers: list[float]) -> None:
        """Takes the numbers of a line: a record, a part of one, or noise."""
        falls = numbers[0] <= self.last_hz
        if not self.begun and (self.noise or (falls and len(numbers) == _NOISE)):
            if len(numbers) != _NOISE:
                self._refuse(line, f"the line has {len(numbers)} numbers",
                             f"behind line {self.noise[0]} stand noise data, of {_NOISE} numbers a line",
                             "complete the line, or take it out")
            self.noise.append(line)
            return
        if not self.begun and falls:
            self._refuse(line, "the frequency does not rise", "frequencies of a Touchstone file rise, each once",
                         "sort the lines, or take this one out")
        self.begun += [(line, number) for number in numbers]
        if len(self.begun) > _RECORD:
            first = self.begun[0][0]
            what = f"the line has {len(self.begun)} numbers" if first == line else \
                f"lines {first} to {line} have {len(self.begun)} numbers together"
            self._refuse(line, what, "a frequency of a two-port has nine: itself, and two each of S11, S21, S12, S22",
                         "look for a number that is missing, or one too many")
        if len(self.begun) == _RECORD:
            first, values = self.begun[0][0], [value for _, value in self.begun]
            self.last_hz = values[0]
            self.begun = []
            rows.add(first, values[0], values[3], values[4])

    def _refuse(self, line: int, what: str, why: str, fix: str, word: str = "") -> NoReturn:
        source = self.text.split("\n")[line - 1] if line else ""
        at = source.find(word) + 1 if word else 0
        refuse(self.name, self.text, line, what, why, fix, at, max(1, len(word)))
