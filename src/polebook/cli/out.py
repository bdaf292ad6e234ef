"""Where a command writes: the two streams, what each can show, and problems in their one form."""

from __future__ import annotations

import os
import sys
from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from time import monotonic
from typing import TextIO

from polebook.problem import Problem, ProblemsFound, render
from polebook.report.look import WIDTH, Look, fit

QUICK_S, REPAINT_S = 0.4, 0.1  # work that is done by then shows no progress; least time between two paints


class OutputLost(Exception):
    """What was written could not be delivered: a full disk, not a reader that has left."""


class Pace:
    """When the progress of a piece of work, begun now, is to be shown: not where it is quick, and not too often."""

    def __init__(self) -> None:
        self._next_s = monotonic() + QUICK_S

    def due(self) -> bool:
        """Whether now; then not again for a while."""
        if (now_s := monotonic()) <= self._next_s:
            return False
        self._next_s = now_s + REPAINT_S
        return True


@dataclass(frozen=True, slots=True)
class Out:
    """`look` is of the standard output. Text goes out as it is: whoever makes it has asked `Look.text`."""

    out: TextIO
    err: TextIO
    look: Look

    def write(self, text: str) -> None:
        """Text for the standard output. Raises BrokenPipeError where its reader has left, else OutputLost."""
        try:
            self.out.write(text)
            self.out.flush()
        except BrokenPipeError:
            raise
        except OSError as fault:
            raise OutputLost(fault.strerror or str(fault)) from None

    def tell(self, text: str) -> None:
        """A message for whoever watches, on the standard error, line breaks kept."""
        look = Look(encoding=self.err.encoding or "utf-8")
        self.err.write("\n".join(look.text(line) for line in text.split("\n")) + "\n")

    def progress(self, text: str) -> None:
        """One line that the next one writes over, on the standard error where that is a terminal; "" clears it."""
        if self.err.isatty():
            shown = fit(Look(encoding=self.err.encoding or "utf-8").text(text), WIDTH - 1)
            self.err.write(f"\r{shown:{WIDTH - 1}}\r{shown}" if shown else f"\r{'':{WIDTH - 1}}\r")
            self.err.flush()

    def problems(self, problems: Iterable[Problem], text: str = "") -> None:
        """Every problem with its excerpt of `text`, and a count where there are several."""
        told = tuple(problems)
        self.tell("\n\n".join(render(problem, text) for problem in told))
        faults = sum(problem.severity == "fault" for problem in told)
        if faults > 1:
            self.tell(f"\n{faults} faults")

    def found(self, found: ProblemsFound) -> None:
        """The problems of a file that could not be used."""
        self.problems(found.problems, found.text)


def standard(environ: Mapping[str, str] = os.environ) -> Out:
    """The process's own streams. Colour only on a terminal that has it, never with NO_COLOR."""
    out, err = sys.stdout, sys.stderr
    if out is None or err is None:  # started with a closed stream: what is written there is lost, as was asked
        nowhere = open(os.devnull, "w", encoding="utf-8")  # noqa: SIM115 - lives as long as the process
        out, err = out or nowhere, err or nowhere
    colour = out.isatty() and not environ.get("NO_COLOR") and environ.get("TERM") != "dumb"
    return Out(out, err, Look(colour=colour, encoding=out.encoding or "utf-8"))
