"""A measured sweep as a value."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, TypeAlias

if TYPE_CHECKING:  # numpy.typing costs 5 ms at start-up
    import numpy as np
    from numpy.typing import NDArray

Array: TypeAlias = "NDArray[np.float64]"


@dataclass(frozen=True, slots=True, eq=False)
class Sweep:
    """What an instrument found, as the gain that a ledger counts: V(load)/EMF, V/V or V/A.

    hz             (n,) rising, above 0; n is 2 or more
    gain_db        (n,) finite, 20·log10 of the gain (of ohms where the source is a current)
    degrees        (n,) as the file has them, None where it has none
    reference_ohm  of a two-port's S parameters: what it was measured between, on both sides; None for a plain gain
    notes          sentences on how the file was read, and on what of it was passed over
    """

    path: str
    hz: Array
    gain_db: Array
    degrees: Array | None
    reference_ohm: float | None
    notes: tuple[str, ...]
