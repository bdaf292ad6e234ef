"""Edges and peaking of many builds from their response on a grid: where the ledger's definitions apply as they stand.

The ledger looks outward from the band seed for the first crossing of the half-power line (solve.edges). Where a build
lies above that line in one run of the grid, its seed lies in that run, and the run's ends hold its edges. What is not
so plain (a seed that may lie in either of two runs, a dip or a zero that may show between two points only) is left to
the ledger itself.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from polebook.plan.spread.normal import Array
from polebook.plan.spread.roots import Function, Whole, maxima, roots
from polebook.solve.edges import DECIBEL, FLAT

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Flags = NDArray[np.bool_]

LEAP = 1.5  # rad that a build's transfer over the nominal one turns between two points where a zero lies near the axis
BUMPS = 4  # of one build that are climbed
PINNED = 0.2  # neper that a pole may rise over what was seen within half a radian of it (-ln cos 0.5 = 0.13)


@dataclass(slots=True)
class Runs:
    """first, last (builds,) index of the grid where each build's band begins and ends; of use where `plain`.

    plain    its band is known, and nothing in it may reach the line;  nowhere  below the line on all of the grid
    """

    first: Whole
    last: Whole
    plain: Flags
    nowhere: Flags


def runs(excess: Array, leaps: Flags, inside: tuple[int, int]) -> Runs:
    """Of the response over the half-power line, neper, (frequencies, builds).

    leaps   (frequencies - 1, builds) whether something between two frequencies may not show at either
    inside  places on the grid a decade below and above the nominal band seed. A build's own seed lies between them:
            where all of that is above the line, it is in the band, whatever other runs there are.
    """
    above = excess >= 0.0
    begins = above.copy()
    begins[1:] &= ~above[:-1]
    count = begins.sum(axis=0)
    first = above.argmax(axis=0)
    last = above.shape[0] - 1 - above[::-1].argmax(axis=0)
    low, high = inside
    several = (count > 1) & above[low:high + 1].all(axis=0)
    if several.any():
        first = np.where(several, _until(above[high::-1], high), first)
        last = np.where(several, above.shape[0] - 1 - _until(above[low:], above.shape[0] - 1 - low), last)
    plain = (excess < np.inf).all(axis=0) & ((count == 1) | several)  # false where it is no number
    at = np.arange(above.shape[0])[:, None]
    within = (at >= first) & (at <= last)
    plain &= ~(_dips(excess) & within[1:-1]).any(axis=0)
    if leaps.any():
        plain &= ~(leaps & (at[1:] >= first) & (at[:-1] <= last)).any(axis=0)
    return Runs(first, last, plain, (count == 0) & (excess < 0.0).all(axis=0))


def _until(above: Flags, end: int) -> Whole:
    """Place of the first build's point below the line, one before it, counted down from `end`."""
    below = ~above
    steps: Whole = np.where(below.any(axis=0), below.argmax(axis=0), above.shape[0])
    return end + 1 - steps


def _dips(excess: Array) -> Flags:
    """Minima of the inner points of the grid that may reach the line between two of them."""
    middle, before, after = excess[1:-1], excess[:-2], excess[2:]
    deep = 0.5 * (np.maximum(before, after) - middle)
    result: Flags = (middle <= before) & (middle <= after) & (middle < deep)
    return result


def crossings(f: Function, x: Array, excess: Array, at: Whole, outward: int, builds: Whole) -> Array:
    """ln f where the builds' responses cross the line behind point `at` of the grid; NaN where the grid ends first.

    outward  1 upward in frequency, -1 downward;  f gives the excess in neper
    """
    found = np.full(builds.size, np.nan)
    beyond = at + outward
    held = (beyond >= 0) & (beyond < x.size)
    if held.any():
        builds, at, beyond = builds[held], at[held], beyond[held]
        fa, fb = excess[at, builds], excess[beyond, builds]
        guess = _guess(x, excess, at, outward, builds)
        found[held] = roots(f, builds, x[at], x[beyond], fa, fb, guess)
    return found


def _guess(x: Array, excess: Array, at: Whole, outward: int, builds: Whole) -> Array:
    """Where the cubic x(excess) through the four nearest points of the grid crosses 0, else the line through two."""
    a, b = x[at], x[at + outward]
    fa, fb = excess[at, builds], excess[at + outward, builds]
    with np.errstate(all="ignore"):
        straight = a + (b - a) * np.where(np.isfinite(fb), fa / (fa - fb), 0.5)
    places = at + outward * np.arange(-1, 3)[:, None]
    within = ((places >= 0) & (places < x.size)).all(axis=0)
    places = np.clip(places, 0, x.size - 1)
    xs, ys = x[places], excess[places, builds]
    with np.errstate(all="ignore"):
        cubic = sum(xs[k] * np.prod([ys[j] / (ys[j] - ys[k]) for j in range(4) if j != k], axis=0) for k in range(4))
        falling = (np.diff(ys, axis=0) < 0.0).all(axis=0)
        share = (cubic - a) / (b - a)
        return np.where(within & falling & (share > 0.001) & (share < 0.999), cubic, straight)


def summit(f: Function, x: Array, y: Array, builds: Whole, least: float) -> tuple[Array, Flags]:
    """(greatest f of each build, whether every bump that may be it was climbed); what stays below `least` is not.

    y (frequencies, builds of the block) is f on the grid.
    """
    y = y[:, builds]
    best = y.max(axis=0)
    middle, before, after = y[1:-1], y[:-2], y[2:]
    with np.errstate(invalid="ignore"):
        rise, fall = middle - before, middle - after
    bump = (rise >= 0.0) & (fall >= 0.0)
    reach = np.where(bump, middle + np.maximum(rise, fall), -np.inf)
    for _ in range(BUMPS):
        at = reach.argmax(axis=0)
        columns = np.nonzero(reach[at, np.arange(builds.size)] > np.maximum(best, least))[0]
        if not columns.size:
            break
        three = at[columns] + np.arange(3)[:, None]
        best[columns] = np.maximum(best[columns], maxima(f, builds[columns], x[three], y[three, columns]))
        reach[at[columns], columns] = -np.inf
    return best, ~(reach.max(axis=0) > np.maximum(best, least))


@dataclass(slots=True)
class Beside:
    """Responses of some builds beside poles near the axis, where the grid may be too coarse: builds, ln f, neper."""

    builds: Whole
    x: Array
    y: Array


def peaking(f: Function, x: Array, loss: Array, beside: Beside, builds: Whole) -> tuple[Array, Flags]:
    """(dB by which each build's response rises over its midband gain, whether every bump that may be it was climbed).

    loss (frequencies, builds of the block) is ln|H|/|gain|; f gives it. As in solve.edges, what rises less than 1e-9
    neper is level.
    """
    best, told = summit(f, x, loss, builds, FLAT)
    if beside.builds.size:
        place = np.full(loss.shape[1], -1)
        place[builds] = np.arange(builds.size)
        _climb(f, x, loss, _highest(beside, x, place), best, told, builds)
    return np.maximum(0.0, best * DECIBEL), told


def _highest(beside: Beside, x: Array, place: Whole) -> Beside:
    """Of each build that has a place and each interval of the grid the highest response, the highest first."""
    interval = np.searchsorted(x, beside.x)
    order = np.argsort(-beside.y)
    order = order[place[beside.builds[order]] >= 0]
    _, once = np.unique(beside.builds[order] * (x.size + 1) + interval[order], return_index=True)
    order = order[np.sort(once)]
    return Beside(place[beside.builds[order]], beside.x[order], beside.y[order])


def _climb(f: Function, x: Array, loss: Array, beside: Beside, best: Array, told: Flags, builds: Whole) -> None:
    """Climbs from what was seen beside poles, and tells of what it could not: `best` and `told` are changed."""
    at, start, height = beside.builds, beside.x, beside.y
    for turn in range(BUMPS + 1):
        left = height + PINNED > np.maximum(best[at], FLAT)
        at, start, height = at[left], start[left], height[left]
        if not at.size:
            return
        if turn == BUMPS:
            told[at] = False
            return
        _, once = np.unique(at, return_index=True)  # each build's highest, one at a time
        who, above = at[once], np.clip(np.searchsorted(x, start[once]), 1, x.size - 1)
        three = np.array([x[above - 1], start[once], x[above]])
        heights = np.array([loss[above - 1, builds[who]], height[once], loss[above, builds[who]]])
        bump = (heights[1] >= heights[0]) & (heights[1] >= heights[2]) & (three[0] < three[1]) & (three[1] < three[2])
        told[who[~bump]] = False
        climbed = maxima(f, builds[who[bump]], three[:, bump], heights[:, bump])
        best[who[bump]] = np.maximum(best[who[bump]], climbed)
        rest = np.ones(at.size, dtype=bool)
        rest[once] = False
        at, start, height = at[rest], start[rest], height[rest]
