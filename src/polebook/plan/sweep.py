"""One value of a chain over a range: gain, both edges and whatever figure is asked, a circuit of its own each point."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass, field, replace
from types import MappingProxyType

from polebook.book import build
from polebook.book.ledger import Ledger, ledger
from polebook.book.reach import within_reach
from polebook.chain.model import Chain
from polebook.circuit.bias_region import KEPT
from polebook.plan.named import Figure, catalog, find
from polebook.problem import ProblemsFound

UNSOLVED = "the bias of {} is not solved"


@dataclass(frozen=True, slots=True)
class Point:
    """What the chain does at one value (SI units).

    gain is signed, V/V or V/A. `figures` holds those asked for by their full names. A figure that the point does not
    have is None, and `why` says why; `why` also tells where a device has left the region that its law holds for.
    """

    value: float
    gain: float | None = None
    lower_hz: float | None = None
    upper_hz: float | None = None
    figures: dict[str, float | None] = field(default_factory=dict)
    why: str = ""


def with_value(chain: Chain, path: str, value: float) -> Chain:
    """The chain with the number at `path` replaced; nothing is judged anew."""
    numbers = MappingProxyType({**chain.numbers, path: value})
    return replace(chain, numbers=numbers, given=chain.given | {path})


def resolved(chain: Chain, path: str, values: Sequence[float], asked: Sequence[str]) -> list[Figure]:
    """The figures that `asked` names, from the chain as it is, else from the first of `values` that has a ledger.

    Raises NoFigure for a name that is none. [] where no value gives a ledger.
    """
    if not asked:
        return []
    for one in (chain, *(with_value(chain, path, value) for value in values)):
        try:
            known = catalog(build.document(ledger(one)))
        except ProblemsFound:
            continue
        return list({figure.name: figure for figure in (find(known, words) for words in asked)}.values())
    return []


def sweep(chain: Chain, path: str, values: Sequence[float], names: Sequence[str] = (),
          stop: Callable[[], bool] = lambda: False) -> Iterator[tuple[int, int, Point]]:
    """(done, total, point) for each of `values` at `path` in turn; ends early once `stop` says so.

    path    a number of the chain, "Q1.rc"; the chain's structure is that of the file
    names   full names of further figures, as `resolved` gives them
    """
    for at, value in enumerate(values):
        if stop():
            return
        yield at + 1, len(values), point(with_value(chain, path, value), value, names)


def point(chain: Chain, value: float, names: Sequence[str] = ()) -> Point:
    """The figures of `chain`, in which what is swept has `value`."""
    try:
        of = ledger(chain)
        unsolved = [name for name, one in of.solution.circuit.points.items() if not one.converged]
        if unsolved:
            return Point(value, figures=dict.fromkeys(names), why=UNSOLVED.format(", ".join(unsolved)))
        with within_reach(chain):
            return _solved(of, value, names)
    except ProblemsFound as found:
        return Point(value, figures=dict.fromkeys(names), why="; ".join(problem.what for problem in found.problems))


def _solved(of: Ledger, value: float, names: Sequence[str]) -> Point:
    figures: dict[str, float | None] = {}
    if all(name.startswith("overall.") for name in names):  # spares the sections that nobody asks for
        overall = build.overall(of)
        figures = {name: overall[name.removeprefix("overall.")] for name in names}
    else:
        known = catalog(build.document(of))
        figures = {name: known[name].value if name in known else None for name in names}
    return Point(value, of.solution.gain, of.lower_hz, of.upper_hz, figures, _why(of))


def _why(of: Ledger) -> str:
    """Why edges are missing, and who has left the region of its law."""
    told = []
    if of.unstable:
        told.append("unstable")
    elif not of.judged:
        told.append("stability can't be told")
    elif not of.solution.band.clean:
        told.append("no clean midband")
    told += [problem.what.partition(":")[0] for problem in of.cautions if problem.why == KEPT]
    return "; ".join(dict.fromkeys(told))
