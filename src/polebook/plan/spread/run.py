"""A spread from its request: builds block by block, then the corners and what each tolerance costs."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import replace

import numpy as np

from polebook.chain.model import Chain
from polebook.chain.suggest import listed
from polebook.circuit.build import CURRENT_KEYS
from polebook.plan.spread.corner import SIDES, Corner, corner
from polebook.plan.spread.costs import HALF, Cost, Sample, estimated
from polebook.plan.spread.draws import Drawn
from polebook.plan.spread.figures import Figure, figures
from polebook.plan.spread.helper import Setting
from polebook.plan.spread.judge import all_met, judged
from polebook.plan.spread.linear import Slopes, as_filed, deviation, shares, slopes
from polebook.plan.spread.model import Request, Result, check
from polebook.plan.spread.nominal import Nominal
from polebook.plan.spread.workers import LONG, Crew, Workers, block_size, cores
from polebook.problem import Problem

Step = tuple[int, int, Result]
AGAIN = 3  # draws whose cost is not only estimated but solved
AGAIN_BUILDS = 20_000  # at most, each time
AT_A_TIME, AT_LEAST = 32_000, 1024  # builds times lines in a block, for a block to take some tenth of a second


def spread(request: Request, stop: Callable[[], bool] = lambda: False, crew: Crew | None = None) -> Iterator[Step]:
    """(done, total, result so far), from the first block on; ends early once `stop` says so.

    done and total count solved chains, those that are solved again for the costs among them. The last result holds
    what was done: `complete` tells whether that is all. A `crew` is kept for the next spread. Raises ProblemsFound
    where the request is none, or the chain has no ledger.
    """
    check(request)
    if crew is not None:
        yield from _Run(request, stop, crew).steps()
    else:
        with Crew() as own:
            yield from _Run(request, stop, own).steps()


class _Run:
    """One spread at work."""

    def __init__(self, request: Request, stop: Callable[[], bool], crew: Crew) -> None:
        self.request, self.stop = request, stop
        self.figures: tuple[Figure, ...] = figures(request.chain, request.figures)
        self.targets = judged(request.chain, self.figures)
        self.again = min(request.builds, AGAIN_BUILDS) if request.costs and self.targets else 0
        self.total = request.builds + AGAIN * self.again
        lines = len(request.chain.stages) + 2
        count = request.workers or (cores() if self.total * lines >= LONG else 1)
        size = block_size(request.builds, min(request.block, max(AT_LEAST, AT_A_TIME // lines)), count)
        setting = Setting(request.chain, request.temperature, request.figures, request.seed, size)
        self.workers = Workers(setting, crew, count - 1)
        self.drawn: Drawn = self.workers.bench.drawn
        self.nominal: Nominal = self.workers.bench.nominal
        self.at = as_filed(self.drawn)
        self.slopes: dict[str, Slopes] = slopes(self.nominal.ledger, self.drawn, self.at, self.figures)

    def steps(self) -> Iterator[Step]:
        builds = self.request.builds
        result = self._empty()
        columns = {figure.name: np.full(builds, np.nan) for figure in self.figures}
        state = np.zeros(builds, dtype=np.int8)
        outside: dict[str, int] = {}
        for piece in self.workers.pieces(None, builds, self.stop):
            done = piece.first + piece.builds
            for name, column in piece.columns.items():
                columns[name][piece.first:done] = column
            state[piece.first:done] = piece.state
            for stage, count in piece.outside.items():
                outside[stage] = outside.get(stage, 0) + count
            result = replace(result, done=done, columns={name: column[:done] for name, column in columns.items()},
                             state=state[:done], outside=dict(outside), alone=result.alone + piece.alone)
            yield done, self.total, result
        if result.done == builds:
            yield from self._after(result)

    def _empty(self) -> Result:
        of = self.nominal.ledger
        told = {figure.name: figure.single(of) if of.judged else None for figure in self.figures}
        linear, variance = {}, {}
        for figure in self.figures:
            value = told[figure.name]
            if figure.name in self.slopes and value is not None:
                linear[figure.name] = deviation(figure, self.slopes[figure.name], self.drawn.draws, value)
                variance[figure.name] = shares(self.slopes[figure.name], self.drawn.draws)
        return Result(self.request, self.figures, told, self.drawn.draws, 0,
                      {figure.name: np.zeros(0) for figure in self.figures}, np.zeros(0, dtype=np.int8), {}, 0,
                      tuple(cautions(self.request.chain, self.drawn)), linear, variance)

    def _after(self, result: Result) -> Iterator[Step]:
        """Corners, costs estimated, then the dearest of them solved."""
        total = self.total
        result = replace(result, corners=tuple(self._corners(result)))
        if self.again:
            sample = Sample(self.request.chain, self.targets, result.columns, result.state, self.request.seed)
            result = replace(result, costs=estimated(sample, self.drawn.draws, self.slopes))
            yield result.done, total, result
            done = result.done
            for cost in [cost for cost in result.costs[:AGAIN] if cost.yield_gain > 0.0]:
                solved = self._solved(cost, result)
                if solved is None:
                    return
                done += self.again
                costs = [solved if one is cost else one for one in result.costs]
                result = replace(result, costs=tuple(sorted(costs, key=lambda one: -one.yield_gain)))
                yield done, total, result
        yield total, total, replace(result, complete=True)

    def _corners(self, result: Result) -> Iterator[Corner]:
        for figure in self.figures if self.request.corners else ():
            value = result.nominal[figure.name]
            if value is not None and figure.name in self.slopes and self.drawn.draws:
                for side in SIDES.get(figure.target, ()):
                    yield corner(figure, side, value, self.slopes[figure.name], self.at, self.drawn)

    def _solved(self, cost: Cost, result: Result) -> Cost | None:
        """The cost with its builds solved again; None where that was called off."""
        chain, again = self.request.chain, self.again
        met, done = 0, 0
        for piece in self.workers.pieces((cost.draw.name, HALF), again, self.stop):
            met += int(all_met(chain, self.targets, piece.columns, piece.state).sum())
            done += piece.builds
        if done < again:
            return None
        first = {name: column[:again] for name, column in result.columns.items()}
        before = int(all_met(chain, self.targets, first, result.state[:again]).sum())
        return replace(cost, yield_gain=(met - before) / again, solved=True, builds=again)


def cautions(chain: Chain, of: Drawn) -> Iterator[Problem]:
    """What a reader of a spread should know of it."""
    stated = []
    for stage in chain.stages:
        family = chain.cards[stage.device].family if stage.device and not stage.left_out else ""
        if family and f"{stage.name}.{CURRENT_KEYS.get(family, 'id')}" in chain.given:
            stated.append(stage.name)
    if stated:
        place = chain.places.get(stated[0])
        one = len(stated) == 1
        yield Problem(place, f"the quiescent current of {listed(stated)} is stated",
                      "it stands in every built chain, so what the tolerances of the bias network do to "
                      f"{'it' if one else 'them'} is not in the spread",
                      "take it out where resistors, rails and card settle it", "caution")
    if not of.draws:
        yield Problem(chain.places.get("tolerance"), "nothing spreads", "every tolerance of the chain is 0",
                      "give [tolerance] the tolerances of the parts", "caution")
