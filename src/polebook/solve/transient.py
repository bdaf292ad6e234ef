"""A sum of decaying modes over time: by poles and residues, or by the matrix exponential where residues lose digits."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field
from typing import TYPE_CHECKING

import numpy as np

from polebook.solve.orthonormal import Expansion, expand, matrix, residues, widths

if TYPE_CHECKING:
    from polebook.solve.aberth import Complex
    from polebook.solve.orthonormal import Floats

LOSS = 1e-11  # by which residues may spoil a sum that is of the order of 1
ROUNDING = 2.0 ** -52
SHORT = 0.5  # norm of the matrix over the shortest step
TERMS = 17  # of its Taylor series: 0.5^18/18! lies far below rounding


@dataclass(slots=True)
class Transient:
    """A function of time with the Laplace transform that `transient` was given.

    poles     rad/s;  residues at them, None where they would cost digits: then the matrix exponential is used
    miss      error that the transform was met with, as of s times it (a response), over the greatest of that or 1
    sizes     size of each mode's term at t = 0, for judging what is still felt; infinite where it can't be told
    """

    poles: Complex
    residues: Complex | None
    miss: float
    sizes: Floats
    _form: _Matrix | None
    _bounds: tuple[Floats, Floats] | None = None

    def at(self, t: Floats) -> Floats:
        """Values at times t (s, one-dimensional, none negative)."""
        if self.residues is None:
            assert self._form is not None
            return self._form.at(t)
        terms = np.exp(self.poles[:, None] * t) * self.residues[:, None]
        result: Floats = terms.real.sum(axis=0)
        return result

    def one(self, t: float) -> float:
        """Value at one time (s)."""
        return float(self.at(np.array([t]))[0])

    def rest(self, t: float) -> float:
        """Bound that no value from t (s) on exceeds; it never rises with t."""
        if self.residues is None:
            assert self._form is not None
            return self._form.rest(t)
        return float((np.abs(self.residues) * np.exp(self.poles.real * t)).sum())


def transient(poles: Complex, transform: Callable[[Complex], Complex]) -> Transient:
    """From the poles (rad/s, in conjugate pairs, real parts negative) and the transform at any s that is no pole."""
    none = np.zeros(0)
    if not poles.size:
        return Transient(poles, poles, 0.0, none, None)
    with np.errstate(all="ignore"):
        found = expand(poles, transform)
        each, total = residues(found)
    sizes = np.where(np.isfinite(each), np.abs(each), np.inf)
    if np.isfinite(total) and total * ROUNDING < LOSS:
        return Transient(poles, each, found.miss, sizes, None)
    return Transient(poles, None, found.miss, sizes, _Matrix(found))


@dataclass(slots=True)
class _Matrix:
    """exp(t·A) by doubling steps. A is dissipative in the orthonormal form: nothing grows, and errors only add up.

    Of each step exp(h·A) - 1 is kept, so that slow modes keep their digits beside fast ones.
    """

    found: Expansion
    a: Complex = field(init=False)
    start: Complex = field(init=False)
    steps: list[Complex] = field(init=False)
    step: float = field(init=False)

    def __post_init__(self) -> None:
        self.a = matrix(self.found.poles)
        self.step = SHORT / float(np.linalg.norm(self.a, 1))
        self.a = self.a * self.step
        self.start = widths(self.found.poles).astype(complex)
        term: Complex = np.eye(self.start.size, dtype=complex)
        first = np.zeros_like(term)
        for k in range(1, TERMS + 1):
            term = term @ self.a / k
            first = first + term
        self.steps = [first]

    def at(self, t: Floats) -> Floats:
        result: Floats = (self.found.coefficients @ self._state(t)).real
        return result

    def rest(self, t: float) -> float:
        state = self._state(np.array([t]))
        return float(np.linalg.norm(self.found.coefficients) * np.linalg.norm(state))

    def _state(self, t: Floats) -> Complex:
        """phi at each time, (poles, times)."""
        whole = np.floor(t / self.step)
        part = t / self.step - whole
        state: Complex = np.repeat(self.start[:, None], t.size, axis=1)
        term = state
        for k in range(1, TERMS + 1):
            term = self.a @ term * (part / k)
            state = state + term
        number = 0
        while whole.any():
            if number == len(self.steps):
                last = self.steps[-1]
                self.steps.append(2.0 * last + last @ last)
            state = state + np.where(whole % 2.0 == 1.0, self.steps[number] @ state, 0.0)
            whole = np.floor(whole / 2.0)
            number += 1
        return state
