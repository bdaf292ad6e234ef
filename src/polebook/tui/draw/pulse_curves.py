"""The step response and the pulse that sags as curves, computed once for a window, and what an axis of time spans."""

from __future__ import annotations

from functools import lru_cache
from math import ceil
from typing import TYPE_CHECKING

import numpy as np

from polebook.book.ledger import Ledger
from polebook.tui.draw.plot.axis import Array
from polebook.tui.draw.pulse_sight import Reach

if TYPE_CHECKING:
    from polebook.solve.transient import Transient

_KEPT = 4  # the ledger of now and the pinned one, and the window before: each holds all of its ledger
TURN = 0.4  # rad that the fastest oscillation in sight may turn between two points
SEEN = 1e-3  # of the final value: an oscillation that is smaller is not in sight
MOST = 4096  # points of a curve
BESIDE = 1.1  # of a pulse's length, that its window spans
STEP_SPAN, SAG_SPAN = 100.0, 8.0  # of the windows, up to which one can look; a sag is less sure the longer it lasts


def step_reach(of: Ledger) -> Reach:
    """What there is of the step response: from the step to where it has settled."""
    end, marks = of.pulse.window_s, of.pulse.marks
    begin = marks.high_s if marks is not None and marks.high_s else end / 2.0
    return Reach(end, STEP_SPAN * end, float(f"{min(begin, end):.1e}"))


def sag_reach(of: Ledger) -> Reach:
    """What there is of the pulse: a little more than it lasts."""
    from polebook.book.pulse import rounded  # deferred with the step response: the first paint needs none of it

    length = of.sag.pulse_s or 1.0
    end = rounded(BESIDE * length)
    return Reach(end, SAG_SPAN * end, length)


@lru_cache(_KEPT)
def step(of: Ledger, low_s: float, high_s: float, count: int) -> tuple[Array, Array]:
    """(times in s, response as a share of its final value): `count` of them at least, and where the marks are."""
    pulse, marks = of.pulse, of.pulse.marks
    assert pulse.transient is not None, pulse.why
    times = _times(pulse.transient, low_s, high_s, count)
    marked = [] if marks is None else [marks.low_s, marks.high_s, marks.top_s, marks.dip_s]
    more = np.array([t for t in marked if t is not None and low_s < t < high_s])
    t = np.unique(np.concatenate([times, more]))
    return t, pulse.at(t)


@lru_cache(_KEPT)
def sag(of: Ledger, low_s: float, high_s: float, count: int) -> tuple[Array, Array]:
    """(times in s, height of a pulse without end as a share of what it begins with), by the lower network."""
    transient = of.sag.transient
    assert transient is not None, of.sag.why
    t = _times(transient, low_s, high_s, count)
    return t, heights(transient, t)


def heights(transient: Transient, t: Array) -> Array:
    """The sagging pulse at times t (s): its transient stands beside the axis by as much as its first pole does."""
    with np.errstate(over="ignore"):
        result: Array = np.exp(-transient.poles[0].real * t) * transient.at(t)
    return result


@lru_cache(_KEPT)
def step_at(of: Ledger, t: float) -> float:
    """The step response at one time (s), as a share of its final value."""
    return of.pulse.at_one(t)


@lru_cache(_KEPT)
def sag_at(of: Ledger, t: float) -> float:
    """Height of the pulse at one time (s), as a share of what it begins with."""
    assert of.sag.transient is not None, of.sag.why
    return float(heights(of.sag.transient, np.array([t]))[0])


def _times(of: Transient, low_s: float, high_s: float, count: int) -> Array:
    """Evenly spaced, as close as the fastest oscillation in sight asks for."""
    with np.errstate(all="ignore"):
        size = np.minimum(of.sizes, 1.0 / SEEN) * np.exp(of.poles.real * low_s)
    felt = np.abs(of.poles.imag[size > SEEN])
    turns = float(felt.max()) * (high_s - low_s) / TURN if felt.size else 0.0
    result: Array = np.linspace(low_s, high_s, int(min(max(count, ceil(turns)), MOST)))
    return result
