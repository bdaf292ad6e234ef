"""What is asked of a spread, and what it comes to."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from polebook.chain.model import Chain
from polebook.devices.num import ICE_K
from polebook.plan.spread.corner import Corner
from polebook.plan.spread.costs import Cost
from polebook.plan.spread.draws import Draw
from polebook.plan.spread.figures import FIGURES, Figure
from polebook.plan.spread.judge import Yields, yields
from polebook.plan.spread.normal import Array
from polebook.plan.spread.states import KEYS
from polebook.plan.spread.statistics import Histogram, Statistics, histogram, statistics
from polebook.plan.spread.streams import MOST_SEED
from polebook.problem import Problem, ProblemsFound

if TYPE_CHECKING:
    from numpy.typing import NDArray

BUILDS = 10_000
MOST_BUILDS = 10_000_000
SEED = 1


@dataclass(frozen=True, slots=True)
class Request:
    """A spread to be computed.

    temperature  lowest and highest of the surroundings in °C, all between alike; None: the file's
    figures      names of `figures.FIGURES`, () for all that the chain has
    corners      whether to solve the worst-case corners;  costs: whether to find what each tolerance costs
    workers      processes, 0 for as many as the work is worth;  block: builds at a time, at most. Neither moves a
                 figure.
    """

    chain: Chain
    builds: int = BUILDS
    seed: int = SEED
    temperature: tuple[float, float] | None = None
    figures: tuple[str, ...] = ()
    corners: bool = True
    costs: bool = True
    workers: int = 0
    block: int = 4096


def refused(request: Request) -> list[Problem]:
    """What is wrong with a request; [] where it can be computed."""
    found = []
    if not 1 <= request.builds <= MOST_BUILDS:
        found.append(Problem(None, f"{request.builds} builds can't be drawn",
                             f"a spread takes 1 to {MOST_BUILDS} built chains", "ask for 10000"))
    if not 0 <= request.seed <= MOST_SEED:
        found.append(Problem(None, f"{request.seed} is no seed", "a seed is a whole number from 0 to 2^64 - 1",
                             "take 1, or leave it out"))
    known = [figure.name for figure in FIGURES]
    found += [Problem(None, f"a spread has no figure {name}", f"it has {', '.join(known)}", "name one of these")
              for name in request.figures if name not in known]
    if request.temperature is not None:
        low, high = request.temperature
        if not -ICE_K < low <= high < np.inf:
            found.append(Problem(None, f"{low:g} to {high:g} °C is no range of temperatures",
                                 "the lower end comes first and lies above absolute zero, -273.15 °C",
                                 "write it like -20:60"))
    return found


def check(request: Request) -> None:
    """Raises ProblemsFound with everything that is wrong with a request."""
    problems = refused(request)
    if problems:
        raise ProblemsFound(problems)


@dataclass(frozen=True, slots=True)
class Result:
    """What the first `done` builds came to.

    figures   those that were asked for;  nominal  each of the chain as its file has it, None where it has none
    draws     everything that is off
    columns   figure -> (done,), NaN where a build has none;  state (done,), see `states`
    outside   stage -> builds in which its device has left the region that its law holds for
    alone     builds that only the ledger itself could judge
    linear    figure -> standard deviation by leverage, in the figure's unit, of those that have one
    shares    figure -> draw -> share of that variance
    corners, costs   only when all builds are done; costs the dearest first
    complete  whether nothing is to come
    """

    request: Request
    figures: tuple[Figure, ...]
    nominal: Mapping[str, float | None]
    draws: tuple[Draw, ...]
    done: int
    columns: Mapping[str, Array]
    state: NDArray[np.int8]
    outside: Mapping[str, int]
    alone: int
    cautions: tuple[Problem, ...]
    linear: Mapping[str, float]
    shares: Mapping[str, Mapping[str, float]]
    corners: tuple[Corner, ...] = ()
    costs: tuple[Cost, ...] = ()
    complete: bool = False

    def statistics(self, name: str) -> Statistics | None:
        """Of one figure; None where no build has it."""
        return statistics(self.columns[name])

    def histogram(self, name: str, bins: int, shown: Sequence[float] = ()) -> Histogram | None:
        """Of one figure; `shown` are values that it must hold."""
        return histogram(self.columns[name], bins, shown)

    def yields(self) -> Yields:
        """The share of the builds that meet the targets."""
        return yields(self.request.chain, self.figures, self.columns, self.state)

    def failures(self) -> dict[str, int]:
        """Builds without all figures, by the reason's key; those that there are none of are left away."""
        counts = {key: int((self.state == state).sum()) for state, key in KEYS.items()}
        return {key: count for key, count in counts.items() if count}

    def beyond(self, corner: Corner) -> int:
        """How many builds are worse than a corner."""
        if corner.value is None:
            return 0
        column = self.columns[corner.figure]
        with np.errstate(invalid="ignore"):
            worse = column < corner.value if corner.side == "low" else column > corner.value
        return int(worse.sum())
