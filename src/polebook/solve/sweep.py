"""The chain over frequency: a grid that is refined until nothing turns too far between two of its points.

Between neighbours no pivot of the elimination and no line's gain may turn by over a radian, so that no pole
and no zero near the axis is stepped over. The same grid serves stability, edges and peaking.
"""

from __future__ import annotations

from dataclasses import dataclass
from math import inf, log, pi
from typing import TYPE_CHECKING, TypeAlias

import numpy as np

from polebook.circuit.views import Network, View
from polebook.solve.determinant import determinant
from polebook.solve.fold import Folded, fold

if TYPE_CHECKING:  # numpy.typing costs 5 ms at start-up
    from numpy.typing import NDArray

Array: TypeAlias = "NDArray[np.float64]"
POINTS_A_DECADE = 12
TURN = 1.0  # rad between neighbours
LEAP = 1.5  # neper between neighbours
ROUNDS = 48
MOST = 6000  # points; a network that asks for more has lost its digits
NARROW = 1e-13  # relative distance at which neighbours are left as they are


@dataclass(slots=True)
class Sweep:
    """hz (f,) ascending; loss (f,) = ln|H|/|gain| in neper; angles (p, f) and sizes (p, f) of the pivots, in rad and
    neper; turns (n, f) the angles of the lines' gains. fine is False where it could not be refined far enough, or
    where a value was beyond all numbers."""

    hz: Array
    loss: Array
    angles: Array
    sizes: Array
    turns: Array
    fine: bool = True


def neper(ratio: float) -> float:
    """ln of a size, minus infinity for 0."""
    return log(ratio) if ratio > 0.0 else -inf


def relative(folded: Folded, midband: list[float]) -> Array:
    """ln|H|/|gain| in neper at the frequencies of a folded network, by the lines' gains so that nothing overflows."""
    total: Array = np.zeros(1)
    with np.errstate(all="ignore"):
        for gain, reference in zip(folded.gains, midband, strict=True):
            total = total + np.log(np.abs(gain) / abs(reference))
    return total


def relative_at(net: Network, hz: float, midband: list[float], view: View = "full") -> float:
    """ln|H|/|gain| in neper at one frequency."""
    folded = fold(net, 2j * pi * hz, view)
    return sum(neper(abs(gain) / abs(reference)) for gain, reference in zip(folded.gains, midband, strict=True))


def sweep(net: Network, low: float, high: float, midband: list[float], view: View = "full") -> Sweep:
    """Sweeps from low to high (Hz) or further, refined by halves where something turns. Gains at midband, by line."""
    with np.errstate(all="ignore"):
        result = _first(net, low, high, midband, view)
        for _ in range(ROUNDS):
            coarse = _coarse(result)
            if not coarse.any():
                break
            if coarse.sum() + result.hz.size > MOST:
                result.fine = False
                break
            middle = np.sqrt(result.hz[:-1][coarse] * result.hz[1:][coarse])
            result = _merge(result, _evaluate(net, middle, midband, view))
    return _finite(result)


def _finite(s: Sweep) -> Sweep:
    """Without points that hit a zero or a pole of a factor to the last digit; at the ends there may be none."""
    kept = np.isfinite(np.concatenate([s.sizes, s.turns, s.angles])).all(axis=0)
    if kept.all():
        return s
    fine = s.fine and bool(kept[:2].all() and kept[-2:].all() and kept.mean() > 0.9)
    return Sweep(s.hz[kept], s.loss[kept], s.angles[:, kept], s.sizes[:, kept], s.turns[:, kept], fine)


def _first(net: Network, low: float, high: float, midband: list[float], view: View) -> Sweep:
    """The first grid, and in the same evaluation a look beyond it: it is widened on either side until the determinant
    grows by a whole power there, twice over."""
    away = 100.0 ** np.arange(6)
    pairs = np.array([1.0, 1.1])
    outward = np.concatenate([(low / away)[:, None] * pairs, (high * away)[:, None] * pairs]).ravel()
    both = _evaluate(net, np.concatenate([outward, _grid(low, high)]), midband, view)
    count = outward.size
    slope = np.diff(both.sizes[:, :count].sum(axis=0).reshape(-1, 2), axis=1).reshape(2, -1) / log(1.1)
    below, above = _whole(slope[0]), _whole(slope[1])
    if below or above:
        return _evaluate(net, _grid(low / away[below], high * away[above]), midband, view)
    return Sweep(both.hz[count:], both.loss[count:], both.angles[:, count:], both.sizes[:, count:],
                 both.turns[:, count:])


def _grid(low: float, high: float) -> Array:
    return np.geomspace(low, high, max(8, int(log(high / low) / log(10.0) * POINTS_A_DECADE) + 1))


def _whole(slope: Array) -> int:
    """Place of the first slope that is a whole number and stays one; else of the one that comes nearest."""
    off = np.abs(slope - np.round(slope)) + np.abs(np.diff(slope, append=slope[-1]))
    off = np.where(np.isfinite(off), off, inf)
    whole = np.nonzero(off < 2e-3)[0]
    return int(whole[0] if whole.size else np.argmin(off))


def _evaluate(net: Network, hz: Array, midband: list[float], view: View) -> Sweep:
    s = 2j * pi * hz
    folded = fold(net, s, view)
    shape = hz.shape
    pivots = determinant(folded, s, view)
    gains = np.array([np.broadcast_to(gain, shape) for gain in folded.gains], dtype=complex)
    sizes = np.log(np.abs(pivots))
    loss = np.log(np.abs(gains) / np.abs(np.array(midband))[:, None]).sum(axis=0)
    return Sweep(hz, loss, np.angle(pivots), sizes, np.angle(gains))


def wrapped(angles: Array) -> Array:
    """Differences of neighbours, taken to within half a turn."""
    step = np.diff(angles, axis=-1)
    return step - 2 * pi * np.round(step / (2 * pi))


def _coarse(s: Sweep) -> NDArray[np.bool_]:
    turned = (np.abs(wrapped(s.angles)) > TURN).any(axis=0) | (np.abs(wrapped(s.turns)) > TURN).any(axis=0)
    leapt = (np.abs(np.diff(s.sizes, axis=-1)) > LEAP).any(axis=0)
    return (turned | leapt) & (np.diff(s.hz) > NARROW * s.hz[1:])


def _merge(a: Sweep, b: Sweep) -> Sweep:
    hz = np.concatenate([a.hz, b.hz])
    order = np.argsort(hz)
    return Sweep(hz[order], np.concatenate([a.loss, b.loss])[order],
                 np.concatenate([a.angles, b.angles], axis=1)[:, order],
                 np.concatenate([a.sizes, b.sizes], axis=1)[:, order],
                 np.concatenate([a.turns, b.turns], axis=1)[:, order])
