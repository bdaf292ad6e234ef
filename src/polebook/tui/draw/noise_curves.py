"""The density of the noise over frequency, computed once for a window: moving the cursor solves one frequency."""

from __future__ import annotations

from functools import lru_cache
from typing import TYPE_CHECKING

import numpy as np

from polebook.book.ledger import Ledger
from polebook.book.response import grid
from polebook.tui.draw.plot.axis import Array

if TYPE_CHECKING:
    from polebook.book.noise import Density, Spot

_KEPT = 4  # the ledger of now and the pinned one, and the window before: each holds all of its ledger


@lru_cache(_KEPT)
def over(of: Ledger, low_hz: float, high_hz: float, count: int) -> Density | None:
    """Densities and shares over a window, at `count` frequencies and where the chain turns; None where not told."""
    return None if of.noise is None else of.noise.over(grid(of, low_hz, high_hz, count, poles=False))


@lru_cache(_KEPT)
def here(of: Ledger, hz: float) -> Spot | None:
    """The noise at one frequency; None where it is not told, or beyond a double."""
    if of.noise is None or of.noise.untold:
        return None
    found = of.noise.spot(hz)
    return found if np.isfinite(found.square) and found.square >= 0 else None


def own(found: Density, places: tuple[int, ...], output: bool) -> Array:
    """What some of the sources make of a density by themselves, V/√Hz or A/√Hz."""
    with np.errstate(all="ignore"):
        result: Array = (found.output if output else found.input) * np.sqrt(found.share[list(places)].sum(axis=0))
    return result
