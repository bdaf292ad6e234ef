"""What the spread page shows: runs of built chains as they were told, and whether one holds for the text of now."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, TypeAlias

from polebook.chain.model import Chain
from polebook.problem import Problem

if TYPE_CHECKING:  # numpy.typing and the engine of spreads cost 40 ms at start-up
    import numpy as np
    from numpy.typing import NDArray

    from polebook.plan.spread.statistics import Share, Statistics
    from polebook.tui.view import Spread, State

    Counts: TypeAlias = "NDArray[np.int64]"

LEAST_BUILDS, MOST_BUILDS = 100, 1_000_000
SEEN_DB = 0.005
STEP = 10  # builds go by factors of it
TABLE = "table"  # in the place of a figure's name: all figures side by side
ALL = "all"  # in the place of a target's name: every one of them
JUDGED = ("gain", "lower", "upper", "peaking", "noise")
"""Targets that a spread judges."""
WORDS = {"gain_db": "gain", "gain_at_reference_db": "gain at ref", "lower_edge_hz": "lower edge",
         "upper_edge_hz": "upper edge", "peaking_db": "peaking", "noise_density": "noise"}
_SEGMENT_S, _BEGIN_S = 2.5e-6, 0.5  # for a segment of a chain, and to begin: measured once, elsewhere a first guess


@dataclass(frozen=True, slots=True, eq=False)
class Heap:
    """Builds by a figure: counts of even fine steps from low to high; below, above: builds beyond."""

    low: float
    high: float
    counts: Counts
    below: int
    above: int


@dataclass(frozen=True, slots=True)
class Worst:
    """A corner of the tolerances: the figure is bad on that side ("low", "high"), and has this value there.

    value  None where the chain has no such figure there: then `why` says what it is
    beyond  builds that are worse
    """

    side: str
    value: float | None
    why: str
    beyond: int


@dataclass(frozen=True, slots=True, eq=False)
class Figure:
    """One figure of all builds. Values in dB or Hz.

    nominal  of the chain as its file has it;  linear: the standard deviation by leverage
    limits   what the target allows, least and most, None for an open end; () without one
    """

    name: str
    target: str
    unit: str
    nominal: float | None
    linear: float | None
    statistics: Statistics | None
    heap: Heap | None
    limits: tuple[float | None, float | None] | tuple[()]
    worst: tuple[Worst, ...]

    @property
    def word(self) -> str:
        return WORDS.get(self.name, self.name)


@dataclass(frozen=True, slots=True, eq=False)
class Row:
    """What one tolerance does.

    name    of the draw;  path  of the key that it is of;  label  as it is shown;  sort  as `Draw` has it
    reach   share that the number is off at most, of a temperature °C
    half    share of builds more that meet all targets with half the tolerance, none: with no tolerance; None: unknown
    solved  half is of builds solved again, not estimated
    shares  figure -> share of its variance;  ends  figure -> -1, 1: the end at which its first corner has it
    """

    name: str
    path: str
    label: str
    sort: str
    reach: float
    half: float | None
    none: float | None
    solved: bool
    shares: Mapping[str, float]
    ends: Mapping[str, int]


@dataclass(frozen=True, slots=True, eq=False)
class Told:
    """What the first `done` builds came to.

    yields    target or ALL -> share of the builds that meet it;  unjudged  targets that a spread does not judge
    failures  word -> builds;  outside  stage -> builds in which its device has left the region of its law
    rows      the dearest first;  dear  whether it is known what they cost
    seconds   since it was begun;  complete  nothing is to come
    """

    builds: int
    seed: int
    done: int
    figures: tuple[Figure, ...]
    rows: tuple[Row, ...]
    dear: bool
    yields: Mapping[str, Share]
    unjudged: tuple[str, ...]
    failures: Mapping[str, int]
    outside: Mapping[str, int]
    cautions: tuple[Problem, ...]
    seconds: float
    complete: bool


@dataclass(frozen=True, slots=True, eq=False)
class Run:
    """A spread and the chain that it is of."""

    chain: Chain
    told: Told


def fresh(state: State) -> bool:
    """Whether the run that is shown holds for the text as it is now."""
    run, session = state.view.spread.run, state.session
    return run is not None and session.chain is not None and session.ledger is not None and \
        same(run.chain, session.chain)


def same(one: Chain, other: Chain) -> bool:
    """Whether two texts have the same spread."""
    return one is other or _content(one) == _content(other)


def _content(chain: Chain) -> tuple[object, ...]:
    """All that the figures and their judgement follow from."""
    def counts(path: str) -> bool:
        return path != "target.yield" and not path.endswith((".allot", ".largest", ".smallest"))

    return (chain.source_kind, chain.spread_shape, [replace(stage, note="", free=()) for stage in chain.stages],
            {name: replace(card, note="") for name, card in chain.cards.items()},
            {path: value for path, value in chain.numbers.items() if counts(path)}, set(filter(counts, chain.given)))


def compared(spread: Spread) -> Told | None:
    """The run of before the edit, where the shown one has the same draws and both are whole."""
    if spread.run is None or spread.before is None:
        return None
    now, before = spread.run.told, spread.before.told
    alike = (now.builds, now.seed) == (before.builds, before.seed) and now.done == now.builds
    return before if alike else None


def seconds(state: State) -> float:
    """About how long the next run takes: by the last one, else by the size of the chain."""
    spread, chain = state.view.spread, state.session.chain
    judged = chain is not None and any(path.startswith("target.") for path in chain.given)
    if spread.run is not None and spread.run.told.complete:
        last = spread.run.told
        return last.seconds * _solved(spread.builds, judged) / _solved(last.builds, judged)
    segments = len(chain.stages) + 2 if chain is not None else 2
    return _BEGIN_S + _solved(spread.builds, judged) * segments * _SEGMENT_S


def _solved(builds: int, judged: bool) -> int:
    """How many chains a run solves, those for what the tolerances cost among them."""
    return builds + 3 * min(builds, 20_000) * judged


def figures(run: Run | None) -> list[Figure]:
    """The figures that are looked at: those that builds have, but for what is the same in all and as wanted."""
    if run is None:
        return []
    found = [one for one in run.told.figures if one.statistics is not None]
    return [one for one in found if _differs(one) or _missed(run.told, one)] or found


def _differs(one: Figure) -> bool:
    """Whether a figure is seen to be another in some builds than in others."""
    of = one.statistics
    return of is not None and of.greatest - of.least > (SEEN_DB if one.unit == "dB" else 0.0)


def _missed(told: Told, one: Figure) -> bool:
    return bool(one.limits) and one.target in told.yields and told.yields[one.target].share < 1.0


def looked_at(spread: Spread) -> Figure | None:
    """The figure that is looked at: that of the name kept, else the one whose target most builds miss."""
    known = figures(spread.run)
    if not known or spread.run is None:
        return None
    yields = spread.run.told.yields
    worst = min(known, key=lambda one: yields[one.target].share if one.limits and one.target in yields else 2.0)
    return next((one for one in known if one.name == spread.figure), worst)


def rows(spread: Spread) -> tuple[Row, ...]:
    """What the tolerances do: the dearest first, those that cost nothing by their share of the figure looked at."""
    figure = looked_at(spread)
    if spread.run is None:
        return ()
    name = figure.name if figure is not None else ""
    return tuple(sorted(spread.run.told.rows, key=lambda row: (-(row.half or 0.0), -row.shares.get(name, 0.0))))


def chosen(spread: Spread, among: tuple[Row, ...]) -> int:
    """The row that is chosen: that of the name kept, else the first."""
    return next((at for at, row in enumerate(among) if row.name == spread.row), 0)
