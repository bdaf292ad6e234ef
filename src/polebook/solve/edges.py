"""Band seed, edges and peaking: read off no grid, only bracketed by one and then solved."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from math import exp, inf, log, sqrt

import numpy as np

from polebook.circuit.views import Network
from polebook.solve.fold import fold
from polebook.solve.root import Function, bracketed_maximum, bracketed_root
from polebook.solve.sweep import Array, Sweep, relative, relative_at

HALF_POWER = -0.5 * log(2.0)  # neper
FLAT = 1e-9  # neper; what rises less above the midband gain is a plateau, what is nearer to another is like it
OUTWARD = 8.0  # ln f by which a limit is looked for beyond the sweep
DECIBEL = 20.0 / log(10.0)  # dB in a neper


@dataclass(frozen=True, slots=True)
class Band:
    """Hz and dB; None where there is none. `seed_hz` lies inside the band, clean is False where no band was found."""

    seed_hz: float
    clean: bool
    lower_hz: float | None
    upper_hz: float | None
    peaking_db: float


def first_seed(lower_estimate_hz: float | None, upper_estimate_hz: float | None) -> float:
    """The middle of the band as the sums of time constants give it; 1 kHz where neither does."""
    if lower_estimate_hz and upper_estimate_hz:
        return sqrt(lower_estimate_hz * upper_estimate_hz)
    if upper_estimate_hz:
        return upper_estimate_hz / 1000.0
    return 1000.0 * lower_estimate_hz if lower_estimate_hz else 1000.0


def seed(net: Network, midband: list[float], start_hz: float, taus: Iterable[float]) -> tuple[float, bool]:
    """(band seed in Hz, whether |H| there is within 3 dB of the midband gain)."""
    if relative_at(net, start_hz, midband) >= HALF_POWER:
        return start_hz, True
    corners = [1.0 / (2 * np.pi * abs(tau)) for tau in taus if 1e-300 < abs(tau) < inf]
    if not corners:
        return start_hz, False
    first = np.ceil(40 * np.log10(min(corners) / 10) - FLAT)
    last = np.floor(40 * np.log10(max(corners) * 10) + FLAT)
    hz = 10.0 ** (np.arange(first, last + 1) / 40)
    with np.errstate(all="ignore"):
        loss = relative(fold(net, 2j * np.pi * hz, "full"), midband)
        off = np.abs(np.expm1(loss))
        # where next to nothing passes every frequency is as far off: rounding is not to choose among them
        best = int(np.flatnonzero(off <= np.nanmin(off) + FLAT)[0])
    return float(hz[best]), bool(loss[best] >= HALF_POWER)


def band(net: Network, midband: list[float], sweep: Sweep, seed_hz: float, clean: bool) -> Band:
    """Edges outward from the seed, and peaking over all frequencies of the sweep."""
    def at(x: float) -> float:
        return relative_at(net, exp(x), midband)

    x, loss = np.log(sweep.hz), sweep.loss
    peaking = _peak(at, x, loss)
    if not clean:
        return Band(seed_hz, False, None, None, peaking)
    start = log(seed_hz)
    above = x > start
    up = _crossing(at, start, x[above], loss[above])
    down = _crossing(at, start, x[~above][::-1], loss[~above][::-1])
    return Band(seed_hz, True, None if down is None else exp(down), None if up is None else exp(up), peaking)


def _crossing(at: Function, start: float, x: Array, loss: Array) -> float | None:
    """ln f of the first crossing of the half-power line along x; dips between points are looked into."""
    points = [start, *x.tolist()]
    excess = [at(start) - HALF_POWER, *(loss - HALF_POWER).tolist()]

    def over(y: float) -> float:
        return at(y) - HALF_POWER

    for k in range(1, len(points)):
        if excess[k] < 0:
            return bracketed_root(over, points[k - 1], points[k], excess[k - 1], excess[k])
        if k + 1 < len(points) and excess[k] < 0.1 and excess[k] <= min(excess[k - 1], excess[k + 1]):
            bottom, depth = _bottom(over, points[k - 1:k + 2], excess[k - 1:k + 2])
            if depth < 0:
                return bracketed_root(over, points[k - 1], bottom, excess[k - 1], depth)
    return None


def _bottom(over: Function, x: list[float], y: list[float]) -> tuple[float, float]:
    """The minimum between three points."""
    x, y = (x, y) if x[0] < x[2] else (x[::-1], y[::-1])
    bottom, depth = bracketed_maximum(lambda z: -over(z), (x[0], x[1], x[2]), (-y[0], -y[1], -y[2]))
    return bottom, -depth


def _peak(at: Function, x: Array, loss: Array) -> float:
    """20·log10 of the greatest |H|/|gain|, not below 0 dB: every bump of the grid that may reach the top is climbed.

    A size that still rises towards an end of the sweep has its limit a little beyond it.
    """
    top = float(loss.max())
    best = max([top, *(at(x[end] + step) for end, step in ((0, -OUTWARD), (-1, OUTWARD)) if loss[end] > top - 0.1)])
    with np.errstate(invalid="ignore"):  # below all numbers on both sides: not a number, and no bump
        sides = np.diff(loss)
    for k in np.nonzero((sides[:-1] >= 0) & (sides[1:] <= 0))[0] + 1:
        reach = float(loss[k] + max(sides[k - 1], -sides[k]))
        if reach > max(best, FLAT):
            a, b, c = x[k - 1:k + 2].tolist()
            best = max(best, bracketed_maximum(at, (a, b, c), tuple(loss[k - 1:k + 2].tolist()))[1])
    return max(0.0, best * DECIBEL)
