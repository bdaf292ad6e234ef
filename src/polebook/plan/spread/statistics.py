"""What a column of figures comes to: mean, deviation, percentiles, a histogram; and a share with its interval."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from math import sqrt
from typing import TYPE_CHECKING

import numpy as np

from polebook.plan.spread.normal import Array

if TYPE_CHECKING:
    from numpy.typing import NDArray

PERCENTILES = ("0.1", "1", "50", "99", "99.9")
Z = 1.959964  # of 95 %


@dataclass(frozen=True, slots=True)
class Statistics:
    """Of the builds that have the figure: how many, and in the figure's unit what they come to.

    deviation    standard deviation (n - 1); None of a single build
    percentiles  by `PERCENTILES`, between two builds by the straight line
    """

    builds: int
    mean: float
    deviation: float | None
    percentiles: Mapping[str, float]
    least: float
    greatest: float


def statistics(column: Array) -> Statistics | None:
    """None where no build has the figure (NaN)."""
    there = column[~np.isnan(column)]
    if not there.size:
        return None
    mean = float(there.mean())
    deviation = sqrt(float(np.square(there - mean).sum()) / (there.size - 1)) if there.size > 1 else None
    found = np.percentile(there, [float(p) for p in PERCENTILES]).tolist()
    return Statistics(int(there.size), mean, deviation, dict(zip(PERCENTILES, found, strict=True)),
                      float(there.min()), float(there.max()))


@dataclass(frozen=True, slots=True)
class Share:
    """A share of builds with its 95 % interval: E. B. Wilson, Probable inference, 1927."""

    share: float
    low: float
    high: float


def wilson(count: int, of: int) -> Share:
    """The share count/of, and where it may lie for all that so many builds can tell. `of` is above 0."""
    share, z2 = count / of, Z * Z / of
    middle = (share + 0.5 * z2) / (1.0 + z2)
    half = Z * sqrt((share * (1.0 - share) + 0.25 * z2) / of) / (1.0 + z2)
    return Share(share, 0.0 if count == 0 else middle - half, 1.0 if count == of else middle + half)


@dataclass(frozen=True, slots=True)
class Histogram:
    """edges (n + 1,) rising, evenly spaced;  counts (n,) builds between them;  below, above: builds beyond the ends."""

    edges: Array
    counts: NDArray[np.int64]
    below: int
    above: int


def histogram(column: Array, bins: int, shown: Sequence[float] = ()) -> Histogram | None:
    """`bins` even steps over the middle 99.8 % of the builds, widened so that each of `shown` (targets) is within.

    None where no build has the figure. A column that is all the same has its value in the middle.
    """
    there = column[~np.isnan(column)]
    if not there.size:
        return None
    low, high = np.percentile(there, [0.1, 99.9]).tolist()
    low, high = min([low, *shown]), max([high, *shown])
    if not high > low:
        reach = abs(low) * 1e-3 or 1.0
        low, high = low - reach, high + reach
    edges = np.linspace(low, high, bins + 1)
    counts, _ = np.histogram(there, edges)
    return Histogram(edges, counts.astype(np.int64), int((there < low).sum()), int((there > high).sum()))
