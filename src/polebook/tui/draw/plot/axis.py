"""Axes: where a value lies between the ends. Which values are ticked, and how they read, is told in `report.ticks`."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, TypeAlias

import numpy as np

from polebook.report.ticks import Ticks, decades, evenly, rounded, short, step_of

if TYPE_CHECKING:  # numpy.typing costs 5 ms at start-up
    from numpy.typing import NDArray

Array: TypeAlias = "NDArray[np.float64]"
__all__ = ["Array", "Axis", "Ticks", "decades", "evenly", "rounded", "short", "step_of"]


@dataclass(frozen=True, slots=True)
class Axis:
    """From low to high, linear or of equal ratios (both ends positive then).

    ticks: value and its label; unit stands behind the last one of an axis along the bottom
    """

    low: float
    high: float
    log: bool = False
    ticks: Ticks = ()
    unit: str = ""

    def places(self, values: Array) -> Array:
        """Where values lie: 0 at low, 1 at high. Not a number for what such an axis does not have."""
        with np.errstate(all="ignore"):
            if self.log:
                places = np.log(values / self.low) / np.log(self.high / self.low)
            else:
                places = (values - self.low) / (self.high - self.low)
        return np.where(np.isfinite(places), places, np.nan)

    def place(self, value: float) -> float:
        """As `places`, of one value."""
        return float(self.places(np.array([value]))[0])
