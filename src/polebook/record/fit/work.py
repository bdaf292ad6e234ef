"""The rounds of a fit: least squares, what ends at a bound, what is not felt, and again without those.

Keys that the sweep feels and can't tell apart go on moving, so that the others are fitted with the best that they can
be together; they themselves get no value. A fit begins at several places, which finds the best answer more surely, and
shows where there is another that is as good: then the one nearest to the file is taken, and the other told.
"""

from __future__ import annotations

from collections.abc import Mapping
from typing import TYPE_CHECKING

import numpy as np

from polebook.chain.model import Chain
from polebook.problem import Place, Problem, ProblemsFound
from polebook.record.fit import result as told
from polebook.record.fit.judge import PAIRED, Group, Judged, judge, rounded
from polebook.record.fit.model import Model
from polebook.record.fit.result import Fitted
from polebook.record.sweeps.sweep import Array
from polebook.solve.edges import DECIBEL

if TYPE_CHECKING:
    from numpy.typing import NDArray

MOST_LOOKS = 100  # of one solution
ROUNDS = 3  # of weights, with a phase
AGAIN = 5  # times that keys are held and the others fitted again, at most
ASTRAY, ASTRAY_LEVEL = 1.5, 0.1  # how far off a fit begins as well: of a key's coordinate, of the level in neper
AS_WELL = 4.0  # variances by which the sum of the squares may be more where a fit is as good: two standard errors
APART = 3.0  # standard errors from which two answers are two
_TIGHT, _LOOSE = 1e-9, 1e-5  # relative, of where a solution ends: the one that counts, and one from elsewhere
_STEADY = 0.01  # change of the weights that asks for no more rounds
_NO_NOISE = 1e-9  # neper, radians: data without any are no better than that
_AT_ZERO = 0.05  # of a standard error: a value that is this near to 0 is 0; one that is no part of the file within one
_NEAR = 1e-3  # of x


class Work:
    """A fit at work. Coordinates are those of the keys, and of the offset behind them where it is free."""

    def __init__(self, model: Model) -> None:
        self.model, self.keys = model, model.keys
        self.low, self.high = model.bounds
        self.x = model.start
        self.moving: NDArray[np.bool_] = np.ones(self.x.size, dtype=bool)
        self.states = [told.FITTED] * self.x.size
        self.converged = True
        self.others: list[Array] = []
        self.also: dict[int, float] = {}
        self.judged = Judged(0, np.zeros(0), (), (), (), np.zeros((0, 0)))
        self.seen: list[int] = []  # the coordinates that `judged` is of

    def run(self) -> None:
        """Raises ProblemsFound where the chain has no figures where the fit begins."""
        if not np.isfinite(self.model.residuals(self.x)).all():
            raise ProblemsFound([Problem(
                Place(self.model.chain.path), "the chain has no figures where the fit begins",
                "with what is free next to nothing its bias is not solved, or nothing passes",
                "give the keys that are free values to begin at")])
        self._rounds()
        self._elsewhere()
        self._settle()
        for _ in range(AGAIN):
            unfelt = [k for at, k in enumerate(self.seen) if self.moving[k] and not self.judged.felt[at]]
            if not unfelt:
                break
            for k in unfelt:
                self.states[k], self.moving[k], self.x[k] = told.UNFELT, False, self._filed(k)
            self._rounds()
            self._settle()
        for at, k in enumerate(self.seen):
            if self.moving[k] and not self.judged.determined[at]:
                self.states[k] = told.BLIND
        self._several()

    def _elsewhere(self) -> None:
        """Begins at other places too, and goes on from the best answer; of several from the one nearest to the file.

        Keys are moved apart: the first up and the second down, and so on, then by twos, and each the other way round.
        """
        number, astray = np.arange(self.x.size), np.where(np.isfinite(self.low), ASTRAY, ASTRAY_LEVEL)
        found = [self.x.copy()]
        for every in (1, 2)[:len(self.keys)]:
            way = np.where(number // every % 2, -astray, astray)
            for begin in (self.model.start + way, self.model.start - way):
                begin = np.clip(begin, self.low, self.high)
                if np.isfinite(self.model.residuals(begin)).all():
                    self.x = begin
                    self._least(_LOOSE)
                    found.append(self.x.copy())
        self.x, self.others = found[0].copy(), found
        best = min(self._as_well(), key=lambda x: float(np.square(x - self.model.start).sum()))
        if best is not found[0]:
            self.x = best.copy()
            self._rounds()

    def _as_well(self) -> list[Array]:
        """What was found and fits as well as the best of it."""
        squares = [self._square(x) for x in self.others]
        most = min(squares) * (1.0 + AS_WELL / max(self.judged.figures - len(self.seen), 1))
        return [x for x, square in zip(self.others, squares, strict=True) if square <= most]

    def _several(self) -> None:
        """What an answer elsewhere that fits as well says of the keys that it has elsewhere."""
        errors = dict(zip(self.seen, self.judged.errors.tolist(), strict=True))
        settled = [k for k in self.seen if self.states[k] == told.FITTED]
        for x in self._as_well():
            away = {k: float(x[k]) for k in settled if abs(x[k] - self.x[k]) > APART * errors[k]}
            if len(away) > len(self.also):
                self.also = away

    def _square(self, x: Array) -> float:
        """The sum of the weighted squares."""
        gain, phase = self.model.off(x)
        found = np.square(gain * self.model.weights[0]).sum() + np.square(phase * self.model.weights[1]).sum()
        return float(found) if np.isfinite(found) else np.inf

    def _filed(self, k: int) -> float:
        """The coordinate as the file has it."""
        if k == len(self.keys):
            return 0.0
        key = self.keys[k]
        return key.x(key.now) if key.now else float(self.low[k])

    def _settle(self) -> None:
        """Holds what has ended at a bound, and solves for the others, until nothing more ends at one."""
        for _ in range(AGAIN):
            held = self._at_bounds()
            if not held:
                break
            for k, state in held.items():
                self.states[k] = state
                self.moving[k] = False
            self._rounds()

    def _rounds(self) -> None:
        """Least squares, with a phase in rounds: gain and phase weigh by what they are off."""
        if not self.moving.any():
            self._judge()
            return
        for _ in range(ROUNDS):
            self._least()
            if self.model.sweep.degrees is None:
                break
            gain, phase = self.model.off(self.x)
            share = 1.0 - self.moving.sum() / (gain.size + phase.size)
            before, self.model.weights = self.model.weights, (_weight(gain, share), _weight(phase, share))
            if np.allclose(before, self.model.weights, rtol=_STEADY, atol=0.0):
                break
        self._judge()

    def _least(self, tight: float = _TIGHT) -> None:
        from scipy.optimize import least_squares  # deferred: 0.4 s, which only a fit pays for

        at, moving = self.x.copy(), self.moving

        def whole(part: Array) -> Array:
            at[moving] = part
            return at

        low, high = self.low[moving], self.high[moving]
        inside = np.clip(self.x[moving], low, high)
        with np.errstate(all="ignore"):
            found = least_squares(
                lambda part: self.model.residuals(whole(part)), inside,
                lambda part: self.model.jacobian(whole(part))[:, moving], bounds=(low, high),
                ftol=tight, xtol=tight, gtol=tight, max_nfev=MOST_LOOKS)
        self.converged = found.status > 0
        self.x[moving] = found.x

    def _judge(self) -> None:
        """What moves, and what is held at 0 or because it is not felt, but might be elsewhere: that is in the errors of
        all that goes with it."""
        free = self.moving | np.array([state in (told.NONE, told.UNFELT) for state in self.states])
        self.seen = np.nonzero(free)[0].tolist()
        gain, phase = self.model.off(self.x)
        weights = self.model.weights
        residuals = np.concatenate([gain * weights[0], phase * weights[1]])
        self.judged = judge(self.model.jacobian(self.x)[:, free], residuals)

    def _at_bounds(self) -> dict[int, str]:
        """Of the keys that move those that ended at a bound, and at which."""
        held: dict[int, str] = {}
        for at, k in enumerate(self.seen):
            if not self.moving[k] or k >= len(self.keys):
                continue
            key, error = self.keys[k], float(self.judged.errors[at])
            at_zero = max(_NEAR, error * (_AT_ZERO if key.now else 1.0))
            if key.optional and self.judged.determined[at] and self.x[k] - self.low[k] < at_zero:
                held[k], self.x[k] = told.NONE, self.low[k]
            elif not key.optional and self.x[k] - self.low[k] < 10 * _NEAR:
                held[k] = told.LEAST
            elif self.high[k] - self.x[k] < 10 * _NEAR:
                held[k] = told.MOST
        return held

    def together(self) -> list[Group]:
        """What the sweep feels and does not settle, by what it shares."""
        return [Group(tuple(self.seen[at] for at in group.members), group.hold,
                      tuple(self.seen[at] for at in group.beside)) for group in self.judged.groups]

    def fitted(self, chain: Chain, texts: Mapping[str, str]) -> tuple[tuple[Fitted, ...], dict[str, float]]:
        """Every key as it is told, and the values that are proposed: those that are settled.

        texts  path -> what the file has there
        """
        found, values = [], {}
        errors = dict(zip(self.seen, self.judged.errors.tolist(), strict=True))
        for k, key in enumerate(self.keys):
            state = self.states[k]
            now, text = chain.get(key.path), texts[key.path]
            if state in (told.BLIND, told.UNFELT):
                found.append(Fitted(key.path, key.dimension, state, now, text, None))
                continue
            size = 0.0 if state == told.NONE else key.size(float(self.x[k]))
            error = errors[k] * key.slope(size) if state == told.FITTED else None
            value = rounded(key.sign * size, error) + 0.0
            most = 2.0 * errors[k] * key.scale if state == told.NONE else None
            also = key.sign * key.size(self.also[k]) if k in self.also else None
            found.append(Fitted(key.path, key.dimension, state, now, text, value, error, most, also))
            if value or now:
                values[key.path] = value
        return tuple(found), values

    def proposed(self, values: dict[str, float], written: bool) -> Array:
        """x with every value as it is proposed; keys that can't be told apart as they fit best, or where `written` as
        the file has them."""
        x = self.x.copy()
        for k, key in enumerate(self.keys):
            if size := abs(values.get(key.path, 0.0)):
                x[k] = key.x(size)
            elif written and self.states[k] == told.BLIND:
                x[k] = self._filed(k)
        if written and self.model.offset and self.states[-1] != told.FITTED:
            x[-1] = 0.0
        return x

    def offset(self) -> tuple[float, float | None] | None:
        """(dB, standard error) of the gain's offset, where it is free; 0 without an error where it is not settled."""
        k = len(self.keys)
        if not self.model.offset:
            return None
        if self.states[k] != told.FITTED:
            return 0.0, None
        error = float(self.judged.errors[self.seen.index(k)]) * DECIBEL
        return rounded(float(self.x[k]) * DECIBEL, error), error

    def pairs(self) -> list[tuple[int, int, float]]:
        """Coordinates that are settled and go together, with their correlation."""
        r = self.judged.correlation
        return [(a, b, float(r[i, j])) for i, a in enumerate(self.seen) for j, b in enumerate(self.seen[:i])
                if abs(r[i, j]) >= PAIRED and self.states[a] == self.states[b] == told.FITTED]


def _weight(residuals: Array, share: float) -> float:
    """One over what residuals are off, degrees of freedom counted."""
    return 1.0 / max(float(np.sqrt(np.mean(np.square(residuals)) / share)), _NO_NOISE)
