"""Group delay of the chain, exact at every frequency: no phase is differenced.

H depends on frequency only through s·X of every C, L and time constant X, so that d ln H/d ln s is the sum of
d ln H/d ln X over them (Euler's theorem on homogeneous functions), and one adjoint solution gives them all.
"""

from __future__ import annotations

from dataclasses import dataclass
from math import exp, isfinite, pi
from typing import TYPE_CHECKING, Any

import numpy as np

from polebook.book.solution import Solution
from polebook.circuit.views import Network
from polebook.formula import Formula
from polebook.solve.contributions import contributions
from polebook.solve.fold import fold
from polebook.solve.transfer import adjoint, branch_currents, voltages

if TYPE_CHECKING:
    from polebook.solve.sweep import Array

HOMOGENEITY = "group delay -d arg H/d omega; H depends on s·X of every C, L and tau only (Euler's theorem on " \
              "homogeneous functions)"
FORMULAS = (
    Formula("overall.group_delay_s", "-(sum of Im d ln H/d ln X over all C, L and tau)/(2·pi·f) at the reference "
                                     "frequency", HOMOGENEITY),
    Formula("overall.group_delay_spread_s", "greatest less least group delay between the edges", HOMOGENEITY),
)
FAR = 1e4  # below the sweep: where the band reaches down to d.c.
FINE, ROUNDS = 8, 12  # points and rounds by which an extreme is closed in on
LEVEL = 1e-8  # of the delay; three points that differ less are joined by a parabola
FINEST = 1e-12  # of the delay; a difference below this is rounding


@dataclass(frozen=True, slots=True)
class Spread:
    """The greatest and the least group delay of the band, s, and where they lie, Hz."""

    most_s: float
    most_hz: float
    least_s: float
    least_hz: float

    @property
    def seconds(self) -> float:
        return self.most_s - self.least_s


def turns(net: Network, hz: Array | float) -> dict[int, Any]:
    """Im d ln H/d ln X of every C, L and time constant by part number, rad, at one frequency or an array of them."""
    s = 2j * pi * hz
    with np.errstate(all="ignore"):
        folded = fold(net, s, "full")
        output = net.layout.after[-1]
        v = voltages(folded)
        adj = adjoint(folded, output)
        each = contributions(net, s, v, adj.u, branch_currents(folded, v, adj))
        return {index: (x / v[output]).imag for index, x in each.items()}


def delay(net: Network, hz: Array) -> Array:
    """Group delay (s) at frequencies (Hz)."""
    total: Array = np.zeros(hz.shape)
    for turned in turns(net, hz).values():
        total = total - turned
    result: Array = total / (2.0 * pi * hz)
    return result


def delay_at(of: Solution, hz: float | None) -> float | None:
    """Group delay (s) at one frequency (Hz)."""
    if hz is None:
        return None
    found = float(delay(of.circuit.network, np.array([hz]))[0])
    return found if isfinite(found) else None


def spread(of: Solution, lower_hz: float | None, upper_hz: float | None) -> Spread | None:
    """Extremes of the group delay over the band; where it has no edge it is taken to reach to d.c. or without end."""
    hz = of.sweep.hz
    low = lower_hz if lower_hz is not None else float(hz[0]) / FAR
    high = upper_hz if upper_hz is not None else float(hz[-1])
    inside = hz[(hz > low) & (hz < high)]
    ends = np.concatenate([[low], inside, [high]])
    grid = np.log(np.sort(np.concatenate([ends, np.sqrt(ends[1:] * ends[:-1])])))
    found = delay(of.circuit.network, np.exp(grid))
    if not np.isfinite(found).all():
        return None
    most, most_x = _greatest(of, grid, found, 1.0)
    least, least_x = _greatest(of, grid, found, -1.0)
    return Spread(most, exp(most_x), -least, exp(least_x))


def _greatest(of: Solution, x: Array, y: Array, sign: float) -> tuple[float, float]:
    """(greatest of sign·delay, ln f there): every bump that may reach the top is climbed."""
    y = sign * y
    best, at = float(y.max()), float(x[np.argmax(y)])
    reach = 2.0 * y[1:-1] - np.minimum(y[:-2], y[2:])
    bumps = (y[1:-1] >= y[:-2]) & (y[1:-1] >= y[2:]) & (reach > best + FINEST * abs(best))
    for k in (np.nonzero(bumps)[0] + 1).tolist():
        height, place = _climb(of, x[k - 1:k + 2], sign)
        if height > best:
            best, at = height, place
    return best, at


def _climb(of: Solution, x: Array, sign: float) -> tuple[float, float]:
    """Top of a bump between x[0] and x[2], many points at a time; the last three are joined by a parabola."""
    low, high = float(x[0]), float(x[2])
    for _ in range(ROUNDS):
        fine = np.linspace(low, high, FINE + 1)
        y = sign * delay(of.circuit.network, np.exp(fine))
        k = min(max(int(np.argmax(y)), 1), FINE - 1)
        low, high = float(fine[k - 1]), float(fine[k + 1])
        if y[k] - min(y[k - 1], y[k + 1]) < LEVEL * abs(y[k]):
            break
    step, (a, b, c) = float(fine[1] - fine[0]), y[k - 1:k + 2].tolist()
    bend = a - 2.0 * b + c
    if bend >= 0.0:
        return max(a, b, c), float(fine[k])
    aside = 0.5 * (a - c) / bend
    return b - 0.25 * (a - c) * aside, float(fine[k]) + step * aside
