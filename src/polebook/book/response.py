"""The chain over frequency: gain, phase, loss and group delay of every line, impedances into the chain and out of it.

All at the user's frequencies, in one evaluation each. What is beyond a double is not a number, and no curve there.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property
from math import ceil, floor, log10, pi
from typing import TYPE_CHECKING, TypeAlias

import numpy as np

from polebook.book.ledger import Ledger
from polebook.book.solution import Solution
from polebook.solve.dual import Dual, rate
from polebook.solve.fold import fold
from polebook.solve.ports import output_impedance

if TYPE_CHECKING:  # numpy.typing costs 5 ms at start-up
    from numpy.typing import NDArray

    from polebook.stages.stamper import Value

Array: TypeAlias = "NDArray[np.float64]"
Complex: TypeAlias = "NDArray[np.complex128]"

LEAST_HZ, MOST_HZ = 1e-6, 1e12
LEAST_DECADES = 0.5  # of a window
BESIDE = 0.5  # decades, at least, that the whole band has beside its outermost corner
WITHOUT = 100.0  # of the corner at the other end, where the band has none at this one
ROUND = 10  # round frequencies a decade
MIDDLE_HZ = 1e3  # of a chain that has no corner at all


@dataclass(frozen=True)
class Response:
    """By line, source first, at the frequencies hz (f,): gains_db and phases_deg (n, f), both not a number where beyond
    a double; mid_db (n,) the midband gains. Phases have no jumps: a line's midband phase is 0° or 180°.

    shift_deg  what the lines' phases have too much together, so that the chain's midband phase is 0° or 180° too
    """

    hz: Array
    gains_db: Array
    phases_deg: Array
    mid_db: Array
    shift_deg: float

    @cached_property
    def gain_db(self) -> Array:
        """Of the chain, (f,)."""
        total: Array = self.gains_db.sum(axis=0)
        return total

    @cached_property
    def phase_deg(self) -> Array:
        """Of the chain, (f,)."""
        total: Array = self.phases_deg.sum(axis=0) - self.shift_deg
        return total

    @cached_property
    def losses_db(self) -> Array:
        """By line, (n, f)."""
        return self.mid_db[:, None] - self.gains_db

    @cached_property
    def lost_db(self) -> Array:
        """Of the chain, (f,)."""
        total: Array = self.losses_db.sum(axis=0)
        return total


def response(of: Ledger, hz: Array) -> Response:
    """Gain, phase and loss of every line at hz (f,), from one elimination of the full network."""
    solution = of.solution
    with np.errstate(all="ignore"):
        gains = _rows(fold(solution.circuit.network, 2j * pi * hz, "full").gains, hz)
        sizes = np.where(np.isfinite(gains) & (gains != 0), 20.0 * np.log10(np.abs(gains)), np.nan)
    middle = np.array(solution.gains)
    phases, shift = _phases(solution, hz, gains)
    return Response(hz, sizes, phases, 20.0 * np.log10(np.abs(middle)), shift)


def delays(of: Ledger, hz: Array) -> Array:
    """Group delay of every line in seconds, (n, f): exact derivatives, as good to the last digits as the gains are.

    What rounding leaves is about 1e-16 of a radian over 2·pi·f.
    """
    with np.errstate(all="ignore"):
        s = 2j * pi * hz
        folded = fold(of.solution.circuit.network, Dual(s, np.ones_like(s)), "full")
        slopes = _rows([rate(gain) for gain in folded.gains], hz)
    return np.where(np.isfinite(slopes), -slopes.real, np.nan)


def input_impedance(of: Ledger, hz: Array, line: int = 1) -> Complex:
    """Ohms (f,) into the input of a line (1: the chain, at n0), what follows attached and what precedes away."""
    with np.errstate(all="ignore"):
        folded = fold(of.solution.circuit.network, 2j * pi * hz, "full")
        return _ohms(1.0 / np.asarray(folded.inputs[line], dtype=complex), hz)


def output_impedance_of(of: Ledger, hz: Array, line: int | None = None) -> Complex:
    """Ohms (f,) at the output of a line, what precedes attached and what follows away.

    None: of the chain, which is the last node with the load away.
    """
    last = len(of.solution.circuit.layout.segments) - 2
    with np.errstate(all="ignore"):
        found = output_impedance(of.solution.circuit.network, 2j * pi * hz, last if line is None else line)
        return _ohms(np.nan if found is None else found, hz)


def grid(of: Ledger, low_hz: float, high_hz: float, count: int, poles: bool = True) -> Array:
    """`count` frequencies evenly over the decades, and between them those where a pivot turns and where an edge is, so
    that no peak falls between two; with `poles` theirs too, so that a peak has its height."""
    even = np.geomspace(low_hz, high_hz, max(count, 2))
    marked = [hz for hz in (of.lower_hz, of.upper_hz) if hz is not None]
    if poles:
        marked += [abs(root.value.imag) / (2 * pi) for root in of.poles.roots or ()]
    more = np.concatenate([of.solution.sweep.hz, np.array(marked)])
    return np.unique(np.concatenate([even, more[(more > even[0]) & (more < even[-1])]]))


def whole_band(of: Ledger) -> tuple[float, float]:
    """(low, high) in Hz: whole decades around both edges and both targets, half a decade or more beside each.

    An end that neither an edge nor a target marks lies two decades from the other. With no mark at all it is what makes
    the chain unstable that is looked at, else every corner that its parts make.
    """
    lows = [hz for hz in (of.lower_hz, of.chain.get("target.lower")) if hz]
    highs = [hz for hz in (of.upper_hz, of.chain.get("target.upper")) if hz]
    if not lows and not highs:
        grows = [root.hz for root in of.poles.roots or () if root.value.real > 0]
        corners = [1.0 / (2 * pi * tau) for tau in of.solution.constants.taus if tau > 0]
        lows = highs = grows[:1] or corners or [MIDDLE_HZ]
    low = min(lows) if lows else min(highs) / WITHOUT
    high = max(highs) if highs else max(lows) * WITHOUT
    first = floor(log10(min(max(low, LEAST_HZ), MOST_HZ)) - BESIDE)
    last = ceil(log10(min(max(high, LEAST_HZ), MOST_HZ)) + BESIDE)
    first, last = max(first, round(log10(LEAST_HZ))), min(last, round(log10(MOST_HZ)))
    return 10.0 ** min(first, last - 1), 10.0 ** max(last, first + 1)


def begin_hz(of: Ledger) -> float | None:
    """Where one looks first: the target's reference; else a round frequency near the middle of the band, so that it
    stays where it is while values are stepped. None where there is no band."""
    stated, middle = of.chain.get("target.reference"), of.reference_hz
    if stated is not None or middle is None:
        return stated if stated is None else float(stated)
    return float(f"{10 ** (round(log10(middle) * ROUND) / ROUND):.2e}")


def _rows(values: list[Value], hz: Array) -> Complex:
    """Values of any kind as one array (n, f)."""
    return np.array([np.broadcast_to(value, hz.shape) for value in values], dtype=complex)


def _ohms(found: Value, hz: Array) -> Complex:
    """Not a number where an impedance is beyond a double."""
    ohms: Complex = np.broadcast_to(np.asarray(found, dtype=complex), hz.shape).copy()
    ohms[~np.isfinite(ohms)] = np.nan
    return ohms


def _phases(of: Solution, hz: Array, gains: Complex) -> tuple[Array, float]:
    """Phases of the lines in degrees, each the turn of its gain that is nearest to what the sweep came to."""
    sweep, band = of.sweep, of.band
    begin = np.where(np.array(of.gains) > 0, 0.0, pi)
    followed = np.unwrap(sweep.turns, axis=1)
    at, seed = np.log(sweep.hz), np.log(band.seed_hz)
    result = np.empty(gains.shape)
    for row, turns in enumerate(followed):
        away = round((float(np.interp(seed, at, turns)) - float(begin[row])) / (2 * pi)) * 2 * pi
        near = np.interp(np.log(hz), at, turns - away)
        own = np.angle(gains[row])
        result[row] = own + 2 * pi * np.round((near - own) / (2 * pi))
    result[~(np.isfinite(gains) & (gains != 0))] = np.nan
    odd = bool(np.count_nonzero(begin) % 2)
    return np.degrees(result), 180.0 * (np.count_nonzero(begin) - odd)
