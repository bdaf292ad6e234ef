"""Noise over a band: the integral of the output density, right to 1e-4 whatever the corners.

Panels in ln f follow the sweep's grid, which stands closer wherever a pole lies near the axis, and are halved where
they must. Towards 0 and infinity the integrand falls by a power of f, or the integral has no limit there.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise
from math import inf, log, pi, sqrt

import numpy as np

from polebook.book.solution import Solution
from polebook.circuit.noise import Array, Sources
from polebook.solve.fold import fold
from polebook.solve.noise import powers
from polebook.solve.quadrature import Panels, nodes, panels, refined
from polebook.solve.transfer import adjoint

LEAST_HZ = 0.1  # lower end of the band where the noise grows without bound towards 0
TIMES_UPPER = 100.0  # upper edges to its upper end where it has no bound upward
BEYOND = 8 * log(10.0)  # ln Hz past the sweep up to which an open end is integrated: what is left is below 1e-7
WIDEST = 2.5 * log(10.0)  # ln Hz
STEPS = 10  # widths of its narrowest grid step that a panel may span
NOTHING = 1e-14  # share of the whole below which a density that does not fall any more is none

NO_UPPER = "the noise has no bound upward, and the band has no upper edge to set one: state noise_to"
NO_LOWER = "the noise grows without bound towards 0 Hz: state a noise_from above 0"
EMPTY = "noise_from lies above the upper end of the noise band: state noise_to"
LOSSLESS = "a resonance without loss makes the noise at its frequency infinite"


@dataclass(frozen=True, slots=True)
class Band:
    """Limits in Hz, 0.0 and infinity where the integral has no need of any; `why` where there is no band."""

    from_hz: float
    to_hz: float
    why: str = ""


Pieces = tuple[tuple[float, float, float], ...]


@dataclass(frozen=True, slots=True)
class Totals:
    """Noise over a band, V rms at each of several nodes; None where a node's has no bound.

    bands   the limits of each node
    pieces  of each node (from Hz, to Hz, V²) that its square is the sum of, by rising frequency; () for None
    why     why the first has none, "" where it has
    """

    bands: tuple[Band, ...]
    rms: tuple[float | None, ...]
    pieces: tuple[Pieces, ...]
    why: str = ""

    @property
    def band(self) -> Band:
        """The limits of the first."""
        return self.bands[0]


def none(count: int, why: str) -> Totals:
    """No noise at any of `count` nodes."""
    return Totals((Band(0.0, 0.0, why),) * count, (None,) * count, ((),) * count, why)


def totals(of: Solution, sources: Sources, outputs: Sequence[int], upper_hz: float | None,
           band: Band | None = None) -> Totals:
    """Noise at each of `outputs`, by its own default limits where the file states none.

    With `band`, the chain's own, its limits hold for all; an open one is closed for a node that has no bound there.
    """
    stated = of.chain.get("target.noise_from"), of.chain.get("target.noise_to")
    low, high = stated if band is None else (band.from_hz, band.to_hz)
    low, high = low or None, None if high == inf else high
    marks = [log(LEAST_HZ)] if low is None else []
    if high is None and upper_hz:
        marks.append(log(TIMES_UPPER * upper_hz))
    edges = _edges(of, low, high, marks)
    ends = np.array([edges[0], edges[0] + log(10.0), edges[-1], edges[-1] - log(10.0)])
    hz = np.concatenate([np.exp(ends), nodes(edges[:-1], edges[1:])])
    scales = [abs(of.gain) if node == of.circuit.layout.after[-1] else abs(of.volts[node]) or 1.0 for node in outputs]
    each = _powers(of, sources, outputs, scales, hz)
    whole = panels(edges[:-1], edges[1:], hz[4:], _densities(sources, [x[:, 4:] for x in each], hz[4:]))
    bands = []
    middle = np.exp(0.5 * (whole.left + whole.right))
    for k, x in enumerate(each):
        above = high is not None or _bounded(sources, float(whole.fine[k].sum()), x[:, 2:4], hz[2], 1.5, 1.5)
        # what has no bound upward must not make little of what has none towards 0
        end = inf if above or not upper_hz else TIMES_UPPER * upper_hz
        inside = float(whole.fine[k][middle < end].sum())
        below = low is not None or _bounded(sources, inside, x[:, :2], hz[0], -0.5, 0.5)
        bands.append(_band((below, above), stated[0], low, high, upper_hz))
    return _integrated(of, sources, (outputs, scales), bands, whole)


def _integrated(of: Solution, sources: Sources, asked: tuple[Sequence[int], Sequence[float]], bands: list[Band],
                whole: Panels) -> Totals:
    """The integrals over the panels, each within its own band."""
    kept = [k for k, band in enumerate(bands) if not band.why]
    outputs, scales = [asked[0][k] for k in kept], [asked[1][k] for k in kept]
    low, high = (np.array([getattr(bands[k], end) for k in kept])[:, None] for end in ("from_hz", "to_hz"))

    def density(hz: Array) -> Array:
        each = _powers(of, sources, outputs, scales, hz)
        return np.where((hz > low) & (hz < high), _densities(sources, each, hz), 0.0)

    rms: list[float | None] = [None] * len(bands)
    pieces: list[Pieces] = [()] * len(bands)
    if kept:
        middle = np.exp(0.5 * (whole.left + whole.right))
        inside = (middle > low) & (middle < high)
        some = inside.any(axis=0)
        start = Panels(whole.left[some], whole.right[some], *(np.where(inside, x[kept], 0.0)[:, some]
                                                              for x in (whole.fine, whole.off)))
        found = refined(start, density)
        for place, k in enumerate(kept):
            if found.settled(place):
                rms[k] = sqrt(float(found.total[place])) * asked[1][k]
                pieces[k] = _pieces(found.panels, place, asked[1][k])
    why = "" if rms[0] is not None else bands[0].why or LOSSLESS
    return Totals(tuple(bands), tuple(rms), tuple(pieces), why)


def _pieces(whole: Panels, place: int, scale: float) -> Pieces:
    order = [k for k in np.argsort(whole.left).tolist() if whole.fine[place, k]]
    square = scale * scale
    return tuple((float(np.exp(whole.left[k])), float(np.exp(whole.right[k])), float(whole.fine[place, k]) * square)
                 for k in order)


def _powers(of: Solution, sources: Sources, outputs: Sequence[int], scales: Sequence[float], hz: Array) -> list[Array]:
    s = 2j * pi * hz
    with np.errstate(all="ignore"):
        folded = fold(of.circuit.network, s, "full")
        return [powers(folded, adjoint(folded, node), s, sources, scale)
                for node, scale in zip(outputs, scales, strict=True)]


def _densities(sources: Sources, each: Sequence[Array], hz: Array) -> Array:
    """(m, f) of powers (n, f) to each of m outputs."""
    with np.errstate(all="ignore"):
        return np.array([sources.white @ x + (sources.white * sources.corner) @ x / hz for x in each])


def _edges(of: Solution, low: float | None, high: float | None, marks: Sequence[float]) -> Array:
    """Where panels meet, ln Hz, from low to high (Hz); an open end lies far beyond the sweep and all `marks`."""
    grid = np.log(of.sweep.hz)
    start = log(low) if low is not None else min([float(grid[0]) - BEYOND, *marks])
    stop = log(high) if high is not None else max([float(grid[-1]) + BEYOND, *marks])
    stop = max(stop, start + 1e-9)
    inner = [x for x in (*_strided(grid.tolist()), *marks) if start < x < stop]
    edges = [start]
    for x in (*sorted(inner), stop):
        pieces = int((x - edges[-1]) / WIDEST) + 1
        edges += [edges[-1] + (x - edges[-1]) * k / pieces for k in range(1, pieces)]
        edges.append(x)
    return np.unique(np.array(edges))


def _strided(grid: list[float]) -> list[float]:
    """The grid points between which a panel spans no more than STEPS of its narrowest step."""
    kept, narrow = [grid[0]], inf
    for before, x in pairwise(grid):
        narrow = min(narrow, x - before)
        if x - kept[-1] > STEPS * narrow * (1.0 + 1e-9):
            kept.append(before)
            narrow = x - before
    return [*kept, grid[-1]]


def _bounded(sources: Sources, total: float, ends: Array, hz: float, white_fall: float, flicker_fall: float) -> bool:
    """Whether the integral has a bound at one end of the axis.

    ends (n, 2): |transfer|² at the far frequency hz and a decade before it. White noise needs a transfer that does not
    rise towards 0 and falls upward, noise below its corner one that falls both ways: by the powers of f given.
    """
    far, near = ends[:, 0], ends[:, 1]
    with np.errstate(all="ignore"):
        fall = np.log(near / far) / log(10.0)  # powers of f by which |transfer|² falls outward
        white, flicker = sources.white * far * hz, sources.white * sources.corner * far
    bad = (white > NOTHING * total) & ~(fall > white_fall)
    bad |= (flicker > NOTHING * total) & ~(fall > flicker_fall)
    return not bool(bad.any())


def _band(bounded: tuple[bool, bool], stated: float | None, low: float | None, high: float | None,
          upper_hz: float | None) -> Band:
    """The limits of a node. stated: noise_from of the file, which may be 0; low and high: limits that stand, Hz."""
    below, above = bounded
    if stated == 0.0 and not below:
        return Band(0.0, 0.0, NO_LOWER)
    from_hz = low if low is not None else 0.0 if below else LEAST_HZ
    if high is None and not above and not upper_hz:
        return Band(from_hz, 0.0, NO_UPPER)
    to_hz = high if high is not None else inf if above else TIMES_UPPER * (upper_hz or 0.0)
    return Band(from_hz, to_hz, "" if from_hz < to_hz else EMPTY)
