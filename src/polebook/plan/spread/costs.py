"""Which draw costs the most yield, and what half its tolerance would bring: the same builds, all else as it was."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from polebook.chain.model import Chain
from polebook.plan.spread.draws import Draw
from polebook.plan.spread.figures import Figure
from polebook.plan.spread.judge import all_met
from polebook.plan.spread.linear import Slopes
from polebook.plan.spread.normal import Array

if TYPE_CHECKING:
    from numpy.typing import NDArray

HALF = 0.5
MOST_NEPER = 300.0  # a slope through few builds may point anywhere
MOST = 100_000  # builds that an estimate is made from


@dataclass(frozen=True, slots=True)
class Cost:
    """What one draw costs.

    yield_gain  share of builds more that would meet all targets with half the tolerance, negative for fewer
    solved      True: those builds were solved again, False: estimated from the figures of the builds as they are,
                each moved by its draw times the slope of the figure
    at_none     the same for no tolerance at all, always an estimate
    builds      how many builds were compared
    """

    draw: Draw
    yield_gain: float
    solved: bool
    at_none: float
    builds: int


@dataclass(frozen=True, slots=True)
class Sample:
    """Figures of builds, their draws by name, and who judges them."""

    chain: Chain
    targets: Mapping[str, Figure]
    columns: Mapping[str, Array]
    state: NDArray[np.int8]
    seed: int

    @property
    def size(self) -> int:
        return min(self.state.size, MOST)

    def met(self) -> int:
        """How many meet all targets."""
        return int(all_met(self.chain, self.targets, self._first(), self.state[:self.size]).sum())

    def _first(self) -> dict[str, Array]:
        return {figure.name: self.columns[figure.name][:self.size] for figure in self.targets.values()}

    def met_with(self, draw: Draw, slopes: Mapping[str, Slopes], times: tuple[float, ...]) -> list[int]:
        """How many would meet them all with the draw's tolerance times each of `times`, to first order."""
        u = draw.off(self.seed, 0, self.size)
        columns = self._first()
        slope = {figure.name: self._slope(figure, draw, slopes, columns, u) for figure in self.targets.values()}
        found = []
        for each in times:
            moved = {}
            for figure in self.targets.values():
                change = slope[figure.name] * (each - 1.0) * u
                column = columns[figure.name]
                moved[figure.name] = column * np.exp(np.clip(change, -MOST_NEPER, MOST_NEPER)) if figure.ratio \
                    else column + change
            found.append(int(all_met(self.chain, self.targets, moved, self.state[:self.size]).sum()))
        return found

    @staticmethod
    def _slope(figure: Figure, draw: Draw, slopes: Mapping[str, Slopes], columns: Mapping[str, Array],
               u: Array) -> float:
        """By leverage; of a figure without one, by the straight line through the builds."""
        if figure.name in slopes:
            return slopes[figure.name][draw.name]
        column = np.log(columns[figure.name]) if figure.ratio else columns[figure.name]
        there = ~np.isnan(column)
        if there.sum() < 3:
            return 0.0
        off = u[there] - u[there].mean()
        return float((off * column[there]).sum() / np.square(off).sum())


def estimated(sample: Sample, draws: tuple[Draw, ...], slopes: Mapping[str, Slopes]) -> tuple[Cost, ...]:
    """Every draw's cost to first order, the dearest first."""
    now, size = sample.met(), sample.size
    found = []
    for draw in draws if size else ():
        half, none = sample.met_with(draw, slopes, (HALF, 0.0))
        found.append(Cost(draw, (half - now) / size, False, (none - now) / size, size))
    return tuple(sorted(found, key=lambda cost: -cost.yield_gain))
