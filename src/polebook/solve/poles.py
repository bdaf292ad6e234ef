"""All finite poles of a view of the network, block by block; accepted only where three independent counts agree."""

from __future__ import annotations

from dataclasses import dataclass
from functools import partial
from math import log, pi
from typing import TYPE_CHECKING, Any

import numpy as np

from polebook.circuit.blocks import blocks
from polebook.circuit.views import Network, View
from polebook.solve.aberth import aberth
from polebook.solve.determinant import determinant, owners, powers
from polebook.solve.fold import fold

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from polebook.solve.aberth import Complex, Ints

    Floats = NDArray[np.float64]

STARTS = ((True, 0.45), (False, 0.45), (True, 0.3), (False, 0.7))
"""How to start, one after the other if need be: sizes from the real axis or from the imaginary one (where poles on the
right count as those on the left), and the angle in half turns to either side of the negative axis."""
RAY = 0.4j  # where traces are compared: on a ray that poles seldom lie on
CLEAR = 0.3  # and not nearer to one than this share of its size
AGREE = 1e-6  # largest difference between the trace of the network and that of the poles found
EVEN = 1e-10  # a pole whose imaginary part is a smaller share of it is real; whose real part is, lies on the axis


@dataclass(slots=True)
class Poles:
    """roots in rad/s by rising size, block the block of nodes that each belongs to, at_zero how many lie at s = 0.

    trusted is False where count, trace and winding do not agree; `why` says which.
    """

    roots: Complex
    block: Ints
    at_zero: int
    trusted: bool
    why: str


@dataclass(slots=True)
class Blocks:
    """The factors of the determinant of a view by block, with the powers of s that they lack."""

    view: View
    of_node: list[int]
    factor: Ints  # block of each factor
    lacking: Ints  # powers of s by block


def split(net: Network, view: View = "full") -> Blocks:
    """Sorts the factors of the determinant into blocks."""
    of_node = blocks(net.layout)
    count = max(of_node, default=-1) + 1
    lacking = np.zeros(count, dtype=np.int64)
    for node, power in powers(net.layout, view).items():
        lacking[of_node[node]] += power
    factor = np.array([of_node[node] for node in owners(net.layout)], dtype=np.int64)
    return Blocks(view, of_node, factor, lacking)


def poles(net: Network, low: float, high: float, right: int | None, view: View = "full") -> Poles:
    """Every finite pole of a view.

    low and high (Hz) span all corners; right is the count, by the winding of the same view, of poles with a positive
    real part, which the poles found must agree with, as must their number with the growth of the determinant and their
    trace sum 1/(s - p) with tr((G + sC)^-1 C) at points all over the span.
    """
    with np.errstate(all="ignore"):
        parts = split(net, view)
        grid = 2 * pi * np.geomspace(low, high, max(8, int(log(high / low) / log(10.0) * 12) + 1))
        growth = _growth(net, parts, low, high)
        zero = np.round(growth[0]).astype(np.int64)
        count = np.round(growth[1]).astype(np.int64) - zero
        if not np.isfinite(growth).all() or (np.abs(growth - np.round(growth)) > 0.1).any() or (count < 0).any():
            return _none("the determinant's growth is no whole number")
        rest = parts.lacking - zero
        for real, spread in STARTS:
            slopes = _slopes(net, parts, grid) if real else _slopes_beside(net, parts, grid)
            start, group = _start(slopes - zero[:, None], grid, count, spread)
            ratio = partial(_ratio, net, parts, rest, group)
            roots = _paired(aberth(ratio, start, group, (grid[0] / 1e3, grid[-1] * 1e3))[0])
            order = np.lexsort((roots.imag, np.abs(roots)))
            found = Poles(roots[order], group[order], int(zero.sum()), True, "")
            found.why = _doubt(net, parts, zero, found, grid, right)
            if not found.why:
                return found
        found.trusted = False
    return found


def _none(why: str) -> Poles:
    return Poles(np.zeros(0, dtype=complex), np.zeros(0, dtype=np.int64), 0, False, why)


def _rows(net: Network, s: NDArray[np.complexfloating[Any, Any]], view: View) -> Complex:
    return determinant(fold(net, s, view), s, view)


def _growth(net: Network, parts: Blocks, low: float, high: float) -> Floats:
    """Power of s by which each block's determinant goes below and above everything, (2, blocks).

    On the imaginary axis, where a pole far away counts by the square of its distance only.
    """
    s = (np.array([low, 1.1 * low, high / 1.1, high]) * 2j * pi).astype(np.complex128)
    sizes = np.log(np.abs(_rows(net, s, parts.view)))
    each = np.array([sizes[:, 1] - sizes[:, 0], sizes[:, 3] - sizes[:, 2]]) / log(1.1)
    result = np.zeros((2, parts.lacking.size))
    for end in (0, 1):
        np.add.at(result[end], parts.factor, each[end])
    return result + parts.lacking


def _slopes(net: Network, parts: Blocks, grid: Floats) -> Floats:
    """d ln D/d ln s on the positive real axis by block, (blocks, points).

    By complex step: the factors are real there, and an imaginary part of 1e-20 carries the derivative.
    """
    rows = _rows(net, grid * (1 + 1e-20j), parts.view)
    each = rows.imag / rows.real * 1e20
    slopes = np.zeros((parts.lacking.size, grid.size))
    np.add.at(slopes, parts.factor, each)
    return slopes + parts.lacking[:, None]


def _slopes_beside(net: Network, parts: Blocks, grid: Floats) -> Floats:
    """d ln|D|/d ln ω on the imaginary axis by block, (blocks, points), by differences: for sizes alone."""
    sizes = np.log(np.abs(_rows(net, 1j * np.concatenate([grid * 1.01, grid / 1.01]), parts.view)))
    each = (sizes[:, :grid.size] - sizes[:, grid.size:]) / (2 * log(1.01))
    slopes = np.zeros((parts.lacking.size, grid.size))
    np.add.at(slopes, parts.factor, each)
    return slopes + parts.lacking[:, None]


def _traces(net: Network, parts: Blocks, s: Complex) -> Complex:
    """s·tr((G + sC)^-1 C) of each block, (blocks, points), by central differences of the logarithm.

    Of the block's whole product: its factors have poles and zeros of their own that cancel.
    """
    h = 1e-4
    both = _rows(net, np.concatenate([s * (1 + h), s * (1 - h)]), parts.view)
    each = both[:, :s.size] / both[:, s.size:]
    whole = [each[parts.factor == block].prod(axis=0) for block in range(parts.lacking.size)]
    traces: Complex = np.log(np.array(whole)) / (2 * h) + parts.lacking[:, None]
    return traces


def _start(slopes: Floats, grid: Floats, count: Ints, spread: float) -> tuple[Complex, Ints]:
    """Starting values: where a block's slope passes k - 1/2 lies its k-th pole's size; angles spread to the left."""
    starts: list[Complex] = []
    groups: list[Ints] = []
    for block, number in enumerate(count):
        if not number:
            continue
        rising = np.maximum.accumulate(slopes[block])
        sizes = np.exp(np.interp(np.arange(number) + 0.5, rising, np.log(grid)))
        together = np.concatenate([[0], np.cumsum(np.diff(np.log(sizes)) > log(3.0))])
        angles = np.empty(number)
        for cluster in range(int(together[-1]) + 1):
            inside = np.nonzero(together == cluster)[0]
            m = inside.size
            angles[inside] = pi + pi * spread * (2 * (np.arange(m) + 0.5) / m - 1) + 0.05 if m > 1 else pi - 0.1
        starts.append(sizes * np.exp(1j * angles))
        groups.append(np.full(number, block, dtype=np.int64))
    if not starts:
        return np.zeros(0, dtype=complex), np.zeros(0, dtype=np.int64)
    return np.concatenate(starts), np.concatenate(groups)


def _ratio(net: Network, parts: Blocks, rest: Ints, groups: Ints, p: Complex, q: Complex, which: Ints) -> Complex:
    """D(q)/D(p) of each root's block, poles at 0 taken out."""
    group = groups[which]
    both = _rows(net, np.concatenate([p, q]), parts.view)
    each = both[:, p.size:] / both[:, :p.size]
    each[parts.factor[:, None] != group[None, :]] = 1.0
    result: Complex = each.prod(axis=0) * (q / p) ** rest[group]
    return result


def _paired(roots: Complex) -> Complex:
    """Roots of a real function: real ones without an imaginary rest, the others as exact conjugates."""
    result = roots.copy()
    real = np.abs(roots.imag) < EVEN * np.abs(roots)
    result[real] = roots[real].real
    level = np.abs(roots.real) < EVEN * np.abs(roots)
    result[level] = 1j * roots[level].imag
    upper = np.nonzero(~real & (roots.imag > 0))[0]
    lower = list(np.nonzero(~real & (roots.imag < 0))[0])
    for j in upper:
        if not lower:
            break
        k = min(lower, key=lambda n: abs(roots[n] - np.conj(roots[j])))
        if abs(roots[k] - np.conj(roots[j])) < 1e-6 * abs(roots[j]):
            middle = (result[j] + np.conj(result[k])) / 2
            result[j], result[k] = middle, np.conj(middle)
            lower.remove(k)
    return result


def _doubt(net: Network, parts: Blocks, zero: Ints, found: Poles, grid: Floats, right: int | None) -> str:
    """What speaks against a set of poles; "" for nothing."""
    if not np.isfinite(found.roots).all():
        return "the iteration did not end"
    sizes = np.abs(found.roots)
    s: Complex = grid[(grid > sizes.min(initial=np.inf) / 30) & (grid < sizes.max(initial=0.0) * 30)][::5] * np.exp(RAY)
    traces = _traces(net, parts, s)
    for block in range(parts.lacking.size):
        own = found.roots[found.block == block]
        away = s[:, None] - own[None, :]
        clear = (np.abs(away) > CLEAR * np.abs(s)[:, None]).all(axis=1)
        off = (s[:, None] / away).sum(axis=1) + zero[block] - traces[block]
        if (np.abs(off[clear]) > AGREE * max(1, own.size)).any():
            return "the trace of the poles found is not that of the network"
    if right is None or int((found.roots.real > 0).sum()) != right:
        return "the poles found and the winding disagree on stability"
    return ""
