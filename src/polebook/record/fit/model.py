"""What a fit compares: the sweep, and the chain's transfer and its slopes at any values of the keys."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, field

import numpy as np

from polebook.chain.model import Chain
from polebook.circuit.build import Circuit, circuit, moved
from polebook.plan.spread.alone import with_numbers
from polebook.problem import ProblemsFound
from polebook.record.fit.keys import Key
from polebook.record.sweeps.sweep import Array, Sweep
from polebook.record.transfer import slopes, transfer
from polebook.solve.edges import DECIBEL

Watch = Callable[[int, float], None]
"""Is told after every look at the chain: how many there were, and dB rms of the last one. It may raise Called."""


class Called(Exception):
    """The fit was called off."""


@dataclass(slots=True, eq=False)
class Model:
    """Residuals of a sweep against the chain, by x of every key, and behind them the gain's offset where it is free.

    chain    with every key at a value other than 0, so that its part stands
    weights  what a neper of gain and a radian of phase count
    looks    how often the chain was looked at
    """

    chain: Chain
    keys: tuple[Key, ...]
    sweep: Sweep
    offset: bool
    watch: Watch
    weights: tuple[float, float] = (1.0, 1.0)
    looks: int = 0
    _circuit: Circuit = field(init=False)
    _last: tuple[bytes, Circuit | None] = field(init=False, default=(b"", None))

    def __post_init__(self) -> None:
        self.chain = with_numbers(self.chain, {key.path: key.sign * key.start for key in self.keys})
        self._circuit = circuit(self.chain)

    @property
    def start(self) -> Array:
        return np.array([key.x(key.start) for key in self.keys] + [0.0] * self.offset)

    @property
    def bounds(self) -> tuple[Array, Array]:
        """Of x; the offset has none."""
        low, high = zip(*(key.bounds for key in self.keys), strict=True)
        return np.array([*low, *[-np.inf] * self.offset]), np.array([*high, *[np.inf] * self.offset])

    def sizes(self, x: Array) -> list[float]:
        return [key.size(float(at)) for key, at in zip(self.keys, x, strict=False)]

    def at(self, x: Array) -> Circuit | None:
        """The chain's circuit; None where it has none, or its bias is not solved."""
        told = x[:len(self.keys)].tobytes()
        if self._last[0] != told:
            values = {key.path: key.sign * size for key, size in zip(self.keys, self.sizes(x), strict=True)}
            self._last = told, _solved(self._circuit, with_numbers(self.chain, values))
        return self._last[1]

    def off(self, x: Array) -> tuple[Array, Array]:
        """Measured less planned: neper of gain (f,), and radians (f,), () without a phase. NaN without a circuit."""
        of = self.at(x)
        empty = np.full(self.sweep.hz.shape, np.nan)
        planned = empty + 0j if of is None else transfer(of, self.sweep.hz)
        gain = self.sweep.gain_db / DECIBEL - planned.real - (x[-1] if self.offset else 0.0)
        if self.sweep.degrees is None:
            return gain, np.zeros(0)
        turned = np.radians(self.sweep.degrees) - planned.imag + np.pi
        return gain, turned - 2 * np.pi * np.floor(turned / (2 * np.pi)) - np.pi

    def residuals(self, x: Array) -> Array:
        """Weighted, of gain and phase."""
        gain, phase = self.off(x)
        self.looks += 1
        self.watch(self.looks, float(np.sqrt(np.mean(np.square(gain)))) * DECIBEL)
        return np.concatenate([gain * self.weights[0], phase * self.weights[1]])

    def jacobian(self, x: Array) -> Array:
        """d residuals/dx."""
        of = self.at(x)
        count, keys = self.sweep.hz.size, self.keys
        by = np.full((count, len(keys)), np.nan, dtype=complex) if of is None else \
            slopes(of, self.sweep.hz, [key.path for key in keys])
        by = by * np.array([key.slope(size) / size for key, size in zip(keys, self.sizes(x), strict=True)])
        rows = [-by.real * self.weights[0]]
        if self.offset:
            rows[0] = np.hstack([rows[0], np.full((count, 1), -self.weights[0])])
        if self.sweep.degrees is not None:
            phase = -by.imag * self.weights[1]
            rows.append(np.hstack([phase, np.zeros((count, 1))]) if self.offset else phase)
        return np.concatenate(rows)


def _solved(of: Circuit, chain: Chain) -> Circuit | None:
    try:
        with np.errstate(all="ignore"):
            there = moved(of, chain)
    except (ProblemsFound, ArithmeticError):
        return None
    return there if all(bool(point.converged) for point in there.points.values()) else None


def felt(model: Model, keys: Sequence[Key]) -> list[float]:
    """Of each key the size that moves the response by a hundredth of a neper (0.09 dB) rms; 0 where none does."""
    of = model.at(model.start)
    if of is None:
        return [0.0] * len(keys)
    by = slopes(of, model.sweep.hz, [key.path for key in keys])
    size = np.sqrt(np.mean(np.square(np.abs(by)), axis=0))
    return [0.01 * key.start / float(one) if one > 0.0 and np.isfinite(one) else 0.0
            for key, one in zip(keys, size, strict=True)]
