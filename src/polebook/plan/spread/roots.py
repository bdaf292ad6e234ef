"""Roots and maxima of many builds at once, each inside a bracket of its own."""

from __future__ import annotations

from collections.abc import Callable
from typing import TYPE_CHECKING, TypeAlias

import numpy as np

from polebook.plan.spread.normal import Array

if TYPE_CHECKING:
    from numpy.typing import NDArray

Whole: TypeAlias = "NDArray[np.int64]"
Function: TypeAlias = "Callable[[Whole, Array], Array]"  # (builds, x) -> y

ENOUGH = 1e-9  # a step of quadratic interpolation as short as this leaves an error far below 1e-13
LEAST = 1e-14
ROUNDS = 80
LEVEL = 1e-8  # neper by which a maximum may still lie higher
NARROW = 1e-7  # ln f; the square of this is nothing
GOLDEN = 0.3819660112501051  # (3 - sqrt 5)/2


def roots(f: Function, builds: Whole, a: Array, b: Array, fa: Array, fb: Array, guess: Array) -> Array:
    """The x between a and b at which f is 0, by build; fa and fb are of opposite sign. To about 1e-13.

    Inverse quadratic interpolation through the newest three points, halving wherever that is not to be trusted
    (T. R. Chandrupatla, Advances in Engineering Software 28, 1997, from memory, as in solve.root), from `guess`. A
    build is done as soon as the next step would be shorter than 1e-9, so that its root depends on no other build.
    """
    result = guess.copy()
    at = np.arange(builds.size)  # those still at work
    x = guess
    for _ in range(ROUNDS):
        y = f(builds[at], x)
        same = (y > 0) == (fa > 0)
        c, fc = np.where(same, a, b), np.where(same, fa, fb)
        b, fb = np.where(same, b, a), np.where(same, fb, fa)
        a, fa = x, y
        width = b - a
        with np.errstate(all="ignore"):
            xi, phi = (a - b) / (c - b), (fa - fb) / (fc - fb)
            trusted = (phi * phi < xi) & ((1.0 - phi) ** 2 < 1.0 - xi)
            share = fa / (fb - fa) * fc / (fb - fc) + (c - a) / (b - a) * fa / (fc - fa) * fb / (fc - fb)
        share = np.where(trusted & (share > 0.0) & (share < 1.0), share, 0.5)
        x = a + share * width
        result[at] = np.where(fa == 0.0, a, x)
        done = (fa == 0.0) | (np.abs(x - a) < ENOUGH) & trusted | (np.abs(width) < LEAST * np.maximum(1.0, np.abs(a)))
        left = ~done
        if not left.any():
            return result
        at, a, b, fa, fb, x = at[left], a[left], b[left], fa[left], fb[left], x[left]
    return result


def maxima(f: Function, builds: Whole, x: Array, y: Array) -> Array:
    """The greatest f between x[0] and x[2], by build, where y[1] is not below y[0] and y[2]; x and y are (3, builds).

    Steps to the vertex of the parabola through three points, every fifth time and where there is none to the golden
    section of the longer side, until f can rise by no more than 1e-8 over what was found, or over 0: a hump that bends
    down all along lies below the two chords prolonged.
    """
    best: Array = y[1].copy()
    at = np.arange(builds.size)  # those still at work
    for turn in range(ROUNDS):
        before, after = (y[1] - y[0]) / (x[1] - x[0]), (y[2] - y[1]) / (x[2] - x[1])
        rise = np.maximum(before * (x[2] - x[1]), after * (x[0] - x[1]))
        left = (y[1] + rise > np.maximum(y[1], 0.0) + LEVEL) & (x[2] - x[0] > NARROW)
        if not left.any():
            break
        at, x, y, before, after = at[left], x[:, left], y[:, left], before[left], after[left]
        with np.errstate(all="ignore"):
            vertex = 0.5 * (x[0] + x[1]) - 0.5 * before * (x[2] - x[0]) / (after - before)
        longer = np.where(x[2] - x[1] > x[1] - x[0], x[2] - x[1], x[0] - x[1])
        direct = (vertex > x[0]) & (vertex < x[2]) & (np.abs(vertex - x[1]) > 0.1 * NARROW) & (turn % 5 != 4)
        new = np.where(direct, vertex, x[1] + GOLDEN * longer)
        x, y = _narrowed(x, y, new, f(builds[at], new))
        best[at] = np.maximum(best[at], y[1])
    return best


def _narrowed(x: Array, y: Array, new: Array, value: Array) -> tuple[Array, Array]:
    """The bracket of three points with a fourth one taken in: the best stays in the middle."""
    above, better = new > x[1], value > y[1]
    # a better point becomes the middle and the old middle the end behind it; a worse one becomes an end
    low = np.where(above & better, 1, np.where(~above & ~better, 3, 0))
    high = np.where(~above & better, 1, np.where(above & ~better, 3, 2))
    middle = np.where(better, 3, 1)
    columns = np.arange(new.size)
    four_x: Array = np.concatenate([x, new[None]])
    four_y: Array = np.concatenate([y, value[None]])
    order = np.array([low, middle, high])
    return four_x[order, columns], four_y[order, columns]
