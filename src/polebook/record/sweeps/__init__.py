"""Measured sweeps: a table of frequency and gain as CSV, or S21 of a two-port as Touchstone 1.x."""

from __future__ import annotations

import os

from polebook.record.sweeps import source, table, touchstone
from polebook.record.sweeps.sweep import Sweep

__all__ = ["Sweep", "load"]


def load(path: str | os.PathLike[str]) -> Sweep:
    """The sweep in the file at `path`: Touchstone where its name ends in .s2p, else a table.

    Raises ProblemsFound, with the line that is at fault where it is one.
    """
    name = os.fspath(path)
    ending = os.path.splitext(name)[1].lower()
    touchstone.check(name, ending)
    text = source.text(name)
    return touchstone.parse(name, text) if ending == touchstone.ENDING else table.parse(name, text)
