"""Rows of numbers -> a sweep: what can't be a sweep is refused, what says nothing is passed over, and both are told."""

from __future__ import annotations

from dataclasses import dataclass, field
from math import isfinite

import numpy as np

from polebook.chain.suggest import listed
from polebook.record.sweeps.source import MOST_POINTS, refuse, too_many
from polebook.record.sweeps.sweep import Array, Sweep

MOST_DB = 400.0  # of a gain: past that the column holds something else
LEAST_HZ, MOST_HZ = 1e-9, 1e15
DECIBELS, MAGNITUDE, COMPLEX = "dB", "magnitude", "real and imaginary part"
_FEW = 3  # lines that a note names


@dataclass(slots=True)
class Rows:
    """The rows of a file as they are read.

    form     what `first` and `second` are: DECIBELS or MAGNITUDE and the phase, or COMPLEX
    phased   whether `second` counts
    scale    Hz in a unit of `hz`;  turn  degrees in a unit of the phase
    loss_db  what the file's figures are above V(load)/EMF
    """

    path: str
    text: str
    form: str = DECIBELS
    phased: bool = False
    scale: float = 1.0
    turn: float = 1.0
    loss_db: float = 0.0
    reference_ohm: float | None = None
    notes: list[str] = field(default_factory=list)
    lines: list[int] = field(default_factory=list)
    hz: list[float] = field(default_factory=list)
    first: list[float] = field(default_factory=list)
    second: list[float] = field(default_factory=list)
    _nothing: list[int] = field(default_factory=list)
    _direct: list[int] = field(default_factory=list)

    def add(self, line: int, hz: float, first: float, second: float = 0.0) -> None:
        """Takes a row, in the file's units. Raises ProblemsFound where it can't be one of a sweep."""
        if not isfinite(hz):
            refuse(self.path, self.text, line, "the frequency is no finite number",
                   "every row of a sweep is at a frequency", "take the line out, or begin it with # to keep it")
        if hz < 0.0:
            refuse(self.path, self.text, line, f"the frequency is {hz:g}", "a frequency is above zero",
                   "take the line out, or name the columns in a header if this is another one")
        if hz and not LEAST_HZ <= hz * self.scale <= MOST_HZ:
            refuse(self.path, self.text, line, f"the frequency is {hz * self.scale:g} Hz",
                   f"a sweep lies between {LEAST_HZ:g} Hz and {MOST_HZ:g} Hz", "look at the unit in the header")
        if not isfinite(first) or not isfinite(second) or (self.form == MAGNITUDE and first == 0.0) \
                or (self.form == COMPLEX and first == second == 0.0):
            self._nothing.append(line)
        elif hz == 0.0:
            self._direct.append(line)
        else:
            self._check(line, first)
            if len(self.hz) == MOST_POINTS:
                too_many(self.path, self.text, line)
            self.lines.append(line)
            self.hz.append(hz)
            self.first.append(first)
            self.second.append(second)

    def _check(self, line: int, first: float) -> None:
        if self.form == MAGNITUDE and first < 0.0:
            refuse(self.path, self.text, line, f"the magnitude is {first:g}", "a magnitude is not below zero",
                   "write dB in the heading of that column if these are decibels")
        if self.form == DECIBELS and abs(first) > MOST_DB:
            refuse(self.path, self.text, line, f"the gain is {first:g} dB",
                   f"no gain that can be measured is beyond {MOST_DB:g} dB either way",
                   "name in the header what the column holds, for example magnitude")

    def sweep(self) -> Sweep:
        """The sweep, by rising frequency. Raises ProblemsFound where nothing, or next to nothing, is left."""
        if len(self.hz) < 2:
            refuse(self.path, self.text, 0, f"there {'is one point' if self.hz else 'are no points'} in the file",
                   "a sweep has two or more" + (f", and {_at(self._nothing)} held no value" if self._nothing else ""),
                   "export frequency and gain as text, one line for each frequency")
        notes = list(self.notes)
        if self._nothing:
            notes.append(f"passed over: {_at(self._nothing)}, without a value")
        if self._direct:
            notes.append(f"passed over: {_at(self._direct)}, at 0 Hz")
        hz = np.array(self.hz) * self.scale
        gain_db, degrees = self._gain()
        hz, gain_db, degrees = _ordered(hz, gain_db, degrees, notes)
        return Sweep(self.path, hz, gain_db - self.loss_db, degrees, self.reference_ohm, tuple(notes))

    def _gain(self) -> tuple[Array, Array | None]:
        first, second = np.array(self.first), np.array(self.second)
        if self.form == COMPLEX:
            return 20.0 * np.log10(np.hypot(first, second)), np.degrees(np.arctan2(second, first))
        size = first if self.form == DECIBELS else 20.0 * np.log10(first)
        return size, second * self.turn if self.phased else None


def _ordered(hz: Array, gain_db: Array, degrees: Array | None, notes: list[str]) -> tuple[Array, Array, Array | None]:
    """By rising frequency, each once: where one stands several times the mean of the gains counts."""
    if (np.diff(hz) < 0.0).any():
        order = np.argsort(hz, kind="stable")
        hz, gain_db = hz[order], gain_db[order]
        degrees = None if degrees is None else degrees[order]
        notes.append("sorted by frequency")
    found, where, counts = np.unique(hz, return_inverse=True, return_counts=True)
    if found.size == hz.size:
        return hz, gain_db, degrees
    many = int((counts > 1).sum())
    notes.append(f"{many} frequenc{'y stands' if many == 1 else 'ies stand'} there more than once: the mean counts")
    if degrees is None:
        return found, np.bincount(where, gain_db) / counts, None
    turns = np.deg2rad(degrees)
    level = float(gain_db.max())  # keeps the powers of ten within a double
    sizes = 10.0 ** ((gain_db - level) / 20.0)
    real, imaginary = (np.bincount(where, sizes * part) / counts for part in (np.cos(turns), np.sin(turns)))
    mean = np.hypot(real, imaginary)
    mean_deg = np.degrees(np.arctan2(imaginary, real))
    mean_db = level + 20.0 * np.log10(np.where(mean > 0.0, mean, 1.0))
    single = (counts == 1)[where]
    mean_db[where[single]], mean_deg[where[single]] = gain_db[single], degrees[single]
    kept = mean > 0.0  # opposite phases of one size leave nothing
    return found[kept], mean_db[kept], mean_deg[kept]


def _at(lines: list[int]) -> str:
    """The lines in words: "line 7", "lines 7, 8 and 9", "lines 7, 8, 9 and 12 more"."""
    told = [str(line) for line in lines[:_FEW]]
    if len(lines) > _FEW:
        told.append(f"{len(lines) - _FEW} more")
    return f"line{'s' * (len(lines) > 1)} {listed(told)}"
