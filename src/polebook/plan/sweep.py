"""One value of a chain over a range: gain, both edges and whatever figure is asked, a circuit of its own each point."""

from __future__ import annotations

import re
from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass, field, replace
from types import MappingProxyType

from polebook.book.ledger import Ledger, ledger
from polebook.book.reach import within_reach
from polebook.chain.model import Chain
from polebook.circuit.bias_region import KEPT
from polebook.plan.named import Figure, named
from polebook.plan.named import values as get
from polebook.problem import ProblemsFound

UNSOLVED = "the bias of {} is not solved"


@dataclass(frozen=True, slots=True)
class Point:
    """What the chain does at one value (SI units).

    gain is signed, V/V or V/A. `figures` holds those asked for by their full names. A figure that the point does not
    have is None, and `why` says why; `why` also tells where a device has left the region that its law holds for.
    noise is the input-referred density at the reference frequency, V/√Hz or A/√Hz.
    """

    value: float
    gain: float | None = None
    lower_hz: float | None = None
    upper_hz: float | None = None
    figures: dict[str, float | None] = field(default_factory=dict)
    why: str = ""
    noise: float | None = None


def with_value(chain: Chain, path: str, value: float) -> Chain:
    """The chain with the number at `path` replaced; nothing is judged anew."""
    numbers = MappingProxyType({**chain.numbers, path: value})
    return replace(chain, numbers=numbers, given=chain.given | {path})


def resolved(chain: Chain, path: str, values: Sequence[float], asked: Sequence[str]) -> list[Figure]:
    """The figures that `asked` names, from the chain as it is, else from the first of `values` that has a ledger.

    Raises ProblemsFound with the near names for a name that is none. [] where no value gives a ledger.
    """
    for one in (chain, *(with_value(chain, path, value) for value in values)) if asked else ():
        try:
            of = ledger(one)
        except ProblemsFound:
            continue
        return named(of, asked)
    return []


def sweep(chain: Chain, path: str, values: Sequence[float], figures: Sequence[Figure] = (),
          stop: Callable[[], bool] = lambda: False) -> Iterator[tuple[int, int, Point]]:
    """(done, total, point) for each of `values` at `path` in turn; ends early once `stop` says so.

    path     a number of the chain, "Q1.rc"; the chain's structure is that of the file
    figures  further ones, as `resolved` gives them
    """
    for at, value in enumerate(values):
        if stop():
            return
        yield at + 1, len(values), point(with_value(chain, path, value), value, figures)


def point(chain: Chain, value: float, figures: Sequence[Figure] = ()) -> Point:
    """The figures of `chain`, in which what is swept has `value`."""
    none: dict[str, float | None] = {figure.name: None for figure in figures}
    try:
        of = ledger(chain)
        unsolved = [name for name, one in of.solution.circuit.points.items() if not one.converged]
        if unsolved:
            return Point(value, figures=none, why=UNSOLVED.format(", ".join(unsolved)))
        with within_reach(chain):
            return Point(value, of.solution.gain, of.lower_hz, of.upper_hz, get(of, figures), _why(of),
                         of.noise.density if of.noise else None)
    except ProblemsFound as found:
        return Point(value, figures=none, why="; ".join(problem.what for problem in found.problems))


def _why(of: Ledger) -> str:
    """Why edges are missing, and who has left the region of its law."""
    told = []
    if of.unstable:
        told.append("unstable")
    elif not of.judged:
        told.append("stability can't be told")
    elif not of.solution.band.clean:
        told.append("no clean midband")
    told += [re.split("[:,]", problem.what)[0] for problem in of.cautions if problem.why == KEPT]
    return "; ".join(dict.fromkeys(told))
