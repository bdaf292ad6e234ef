"""A block of builds: drawn, solved and judged together."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from functools import cached_property
from typing import TYPE_CHECKING, TypeVar

import numpy as np

from polebook.chain.model import Chain
from polebook.circuit.build import built
from polebook.plan.spread.alone import alone, with_numbers
from polebook.plan.spread.batch import Batch, Midband
from polebook.plan.spread.draws import TEMPERATURE
from polebook.plan.spread.figures import Figure
from polebook.plan.spread.noise import density
from polebook.plan.spread.nominal import Nominal
from polebook.plan.spread.normal import Array
from polebook.plan.spread.outside import outside
from polebook.plan.spread.response import LEAP, Beside, Runs, crossings, peaking, runs, summit
from polebook.plan.spread.stability import Turning, Turns, Whole
from polebook.plan.spread.states import GOOD, NO_BAND, NO_GAIN, UNSOLVED, UNSTABLE
from polebook.solve.edges import DECIBEL, HALF_POWER
from polebook.stages.stamper import Value

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from polebook.plan.spread.draws import Drawn

    Flags = NDArray[np.bool_]

_Number = TypeVar("_Number", bound=np.generic)
FEW = 128  # builds that a small batch takes at a time
MANY = 0.3  # share of a block from which all of it is looked at rather than some


class Stopped(Exception):
    """The work was called off."""


@dataclass(frozen=True, slots=True)
class Piece:
    """Builds from `first` on. columns: figure -> (builds,), NaN for none; state (builds,); outside: how many by stage
    in which its device has left the region of its law; alone: how many only the ledger itself could judge."""

    first: int
    columns: Mapping[str, Array]
    state: NDArray[np.int8]
    outside: Mapping[str, int]
    alone: int

    @property
    def builds(self) -> int:
        return int(self.state.size)


class Engine:
    """What one worker computes blocks with; its arrays are written again for every block."""

    def __init__(self, nominal: Nominal, size: int) -> None:
        layout = nominal.circuit.layout
        self.nominal, self.size = nominal, size
        self.batch = Batch(layout, size)
        self.midband = Midband(layout, nominal.circuit.network, size)
        self.turns = Turns(size, len(self.batch.products))
        self.turning = Turning(size)
        self.loss = np.zeros((nominal.hz.size, size))
        self.leaps = np.zeros((nominal.hz.size - 1, size), dtype=bool)

    @cached_property
    def few(self) -> Batch:
        """A small batch, for builds here and there."""
        return Batch(self.nominal.circuit.layout, FEW)

    @cached_property
    def few_nominal(self) -> Batch:
        """The nominal chain at some frequencies."""
        batch = Batch(self.nominal.circuit.layout, FEW)
        batch.fill(self.nominal.circuit.network.values)
        return batch

    def run(self, drawn: Drawn, seed: int, first: int, count: int, figures: Sequence[Figure],
            stop: Callable[[], bool] = lambda: False) -> Piece:
        """Builds `first` to `first + count`, no more than `size`. Raises Stopped."""
        with np.errstate(all="ignore"):
            return Block(self, drawn, drawn.built(seed, first, self.size), stop).piece(first, count, figures)


class Block:
    """One block on an engine. Arrays of all builds, (builds,); figures are NaN where a build has none."""

    def __init__(self, engine: Engine, drawn: Drawn, numbers: Mapping[str, Array], stop: Callable[[], bool]) -> None:
        self.engine, self.drawn, self.numbers, self._stop = engine, drawn, numbers, stop
        self.values, self._spectra, self._points = built(engine.nominal.circuit, numbers)
        self.gain: Array = engine.midband.look(self.values).copy()
        self._level: Array = np.log(np.abs(self.gain))
        self.state = np.full(engine.size, GOOD, dtype=np.int8)
        self._seen: list[Beside] = []
        engine.batch.fill(self.values)
        self._judge()

    @property
    def chain(self) -> Chain:
        return self.drawn.chain

    def _judge(self) -> None:
        """The state of every build, and which of them the ledger has to judge."""
        solved = np.ones(self.state.shape, dtype=bool)
        for point in self._points.values():
            solved &= np.asarray(point.converged, dtype=bool)
        passing = np.isfinite(self.gain) & (self.gain != 0.0)
        right = self._sweep(solved & passing)
        excess = self.engine.loss - HALF_POWER
        self._runs: Runs = runs(excess, self.engine.leaps, self.engine.nominal.inside)
        stable = right == 0
        none = self._nowhere(excess, np.nonzero(stable & self._runs.nowhere)[0])
        self.state[none] = NO_BAND
        self.state[right > 0] = UNSTABLE
        self.state[~passing] = NO_GAIN
        self.state[~solved] = UNSOLVED
        self._plain: Whole = np.nonzero(stable & self._runs.plain)[0]
        self._told: Whole = np.concatenate([self._plain, none])
        self._odd: Flags = solved & passing & (right <= 0)
        self._odd[self._told] = False

    def _nowhere(self, excess: Array, builds: Whole) -> Whole:
        """Of builds below the half-power line on all of the grid, those that are so between its points too."""
        best, told = summit(lambda some, y: self.loss_at(some, y) - HALF_POWER, self._x, excess, builds, 0.0)
        return builds[told & (best < 0.0)]

    @property
    def _x(self) -> Array:
        return np.log(self.engine.nominal.hz)

    def _sweep(self, asked: Flags) -> Whole:
        """Looks at all builds on the grid; returns their poles on the right, and leaves their responses in `loss`."""
        engine, of = self.engine, self.engine.nominal
        turns, turning = engine.turns, engine.turning
        turns.begin()
        for k, hz in enumerate(of.hz.tolist()):
            if self._stop():
                raise Stopped
            engine.batch.look(hz)
            turns.at(hz, engine.batch.products, of.products[k])
            np.abs(engine.batch.transfer, out=engine.loss[k])
            turning.at(engine.batch.transfer, of.transfer[k])
            if k:
                engine.leaps[k - 1] = turning.far(LEAP)
        np.log(engine.loss, out=engine.loss)
        engine.loss -= self._level
        if of.right < 0:
            asked = np.zeros_like(asked)
        return turns.right(of.right, self._angles, asked)

    def _angles(self, builds: Whole, hz: Array) -> Array:
        """Angles of the factors of the builds' determinants over the nominal one's at hz.

        They are asked for where a pole may lie near the axis: what it does to the response is kept in `_seen`.
        """
        few, nominal = self.engine.few, self.engine.few_nominal
        result = np.zeros((len(few.products), builds.size))
        for at in range(0, builds.size, FEW):
            count = self._look_at_few(builds[at:at + FEW], hz[at:at + FEW])
            nominal.look(_padded(hz[at:at + FEW]))
            some = builds[at:at + FEW]
            loss = np.log(np.abs(few.transfer[:count])) - self._level[some]
            self._seen.append(Beside(some, np.log(hz[at:at + FEW]), loss))
            for row, product, reference in zip(result, few.products, nominal.products, strict=True):
                row[at:at + count] = np.angle(product / reference)[:count]
        return result

    def _look_at_few(self, builds: Whole, hz: Array) -> int:
        """Fills the small batch with these builds and looks at it; returns how many they are."""
        picked = _padded(builds)
        self.engine.few.fill([value[picked] if np.ndim(value) else value for value in self.values])
        self.engine.few.look(_padded(hz))
        return builds.size

    def loss_at(self, builds: Whole, x: Array) -> Array:
        """ln|H|/|gain|, neper, of some builds at ln f each."""
        batch, hz = self.engine.batch, np.exp(x)
        if builds.size > MANY * self.engine.size:
            every = np.full(self.engine.size, hz[0])
            every[builds] = hz
            batch.look(every)
            return (np.log(np.abs(batch.transfer)) - self._level)[builds]
        result = np.zeros(builds.size)
        for at in range(0, builds.size, FEW):
            count = self._look_at_few(builds[at:at + FEW], hz[at:at + FEW])
            result[at:at + count] = np.log(np.abs(self.engine.few.transfer[:count]))
        return result - self._level[builds]

    @property
    def gain_db(self) -> Array:
        """Size of the midband gain, dB."""
        return self._level * DECIBEL

    def gain_at_db(self, hz: float) -> Array:
        """|H| at one frequency, dB."""
        self.engine.batch.look(hz)
        return np.log(np.abs(self.engine.batch.transfer)) * DECIBEL

    @property
    def noise_density(self) -> Array:
        """Input-referred, at the reference frequency: V/√Hz or A/√Hz."""
        of, solution = self.engine.nominal, self.engine.nominal.ledger.solution
        stated = self.chain.get(TEMPERATURE)
        celsius = self.numbers.get(TEMPERATURE, 25.0 if stated is None else stated)
        return density(of.circuit, self.values, self._spectra, celsius, of.reference_hz, abs(solution.gain),
                       self.engine.size)

    @cached_property
    def lower_hz(self) -> Array:
        return self._edge(self._runs.first, -1)

    @cached_property
    def upper_hz(self) -> Array:
        return self._edge(self._runs.last, 1)

    def _edge(self, at: Whole, outward: int) -> Array:
        found = np.full(self.engine.size, np.nan)
        plain = self._plain
        found[plain] = np.exp(crossings(lambda builds, y: self.loss_at(builds, y) - HALF_POWER, self._x,
                                        self.engine.loss - HALF_POWER, at[plain], outward, plain))
        return found

    @cached_property
    def peaking_db(self) -> Array:
        found = np.full(self.engine.size, np.nan)
        every = [Beside(*(np.zeros(0, kind) for kind in (int, float, float))), *self._seen]
        beside = Beside(*(np.concatenate([getattr(one, name) for one in every]) for name in ("builds", "x", "y")))
        found[self._told], told = peaking(self.loss_at, self._x, self.engine.loss, beside, self._told)
        self._odd[self._told[~told]] = True
        return found

    def piece(self, first: int, count: int, figures: Sequence[Figure]) -> Piece:
        """The figures of the first builds, those of odd ones by the ledger."""
        columns = {figure.name: figure.block(self) for figure in figures}
        odd = np.nonzero(self._odd[:count])[0].tolist()
        for build in odd:
            if self._stop():
                raise Stopped
            numbers = {path: float(values[build]) for path, values in self.numbers.items()}
            self.state[build], of = alone(with_numbers(self.chain, numbers))
            for figure in figures:
                single = None if of is None else figure.single(of)
                columns[figure.name][build] = np.nan if single is None else single
        none = (self.state != GOOD) & (self.state != NO_BAND)
        for column in columns.values():
            column[none] = np.nan
        return Piece(first, {name: column[:count] for name, column in columns.items()}, self.state[:count],
                     {stage: int(left[:count].sum()) for stage, left in self._outside().items()}, len(odd))

    def _outside(self) -> dict[str, Flags]:
        def get(path: str) -> Value | None:
            return self.numbers[path] if path in self.numbers else self.chain.numbers.get(path)

        found: dict[str, Flags] = {}
        for stage, left in outside(self.engine.nominal.circuit.plan, get, self._points):
            if np.any(left):
                found[stage] = found.get(stage, False) | np.broadcast_to(left, self.state.shape)
        return found


def _padded(some: NDArray[_Number]) -> NDArray[_Number]:
    """As many as a small batch takes, the last one over and over."""
    return np.concatenate([some, np.repeat(some[-1:], FEW - some.size)]) if some.size < FEW else some
