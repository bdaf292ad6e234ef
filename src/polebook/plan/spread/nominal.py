"""What all blocks of a spread share: the nominal chain solved, the grid, and its determinant there."""

from __future__ import annotations

from dataclasses import dataclass, replace
from types import MappingProxyType
from typing import TYPE_CHECKING

import numpy as np

from polebook.book.ledger import Ledger, ledger
from polebook.circuit.build import Circuit
from polebook.plan.spread.batch import Batch
from polebook.plan.spread.draws import Drawn
from polebook.plan.spread.grid import grid
from polebook.plan.spread.normal import Array
from polebook.plan.spread.stability import UNTOLD

if TYPE_CHECKING:
    from numpy.typing import NDArray

REFERENCE = "target.reference"


@dataclass(frozen=True, slots=True)
class Nominal:
    """hz (f,) the grid;  transfer (f,) there;  products by frequency, then as `Batch.products`;
    right: poles on the right;  inside: places on the grid a decade below and above the band seed;  drawn: with the
    reference frequency held."""

    ledger: Ledger
    drawn: Drawn
    hz: Array
    transfer: NDArray[np.complex128]
    products: list[list[complex]]
    right: int
    inside: tuple[int, int]
    reference_hz: float

    @property
    def circuit(self) -> Circuit:
        return self.ledger.solution.circuit


def nominal(drawn: Drawn) -> Nominal:
    """Solves the chain as its file has it. Raises ProblemsFound where it has no ledger."""
    of = ledger(drawn.chain)
    solution = of.solution
    hz = grid(solution.sweep)
    batch = Batch(solution.circuit.layout, hz.size)
    with np.errstate(all="ignore"):
        batch.fill(solution.circuit.network.values)
        batch.look(hz)
    right = solution.winding.right
    low, high = np.searchsorted(hz, [solution.band.seed_hz / 10.0, solution.band.seed_hz * 10.0]).tolist()
    stated = drawn.chain.get(REFERENCE)
    reference = solution.band.seed_hz if stated is None else stated
    return Nominal(of, _held(drawn, reference), hz, batch.transfer.copy(), np.array(batch.products).T.tolist(),
                   UNTOLD if right is None else right, (max(0, low - 1), min(high, hz.size - 1)), reference)


def _held(drawn: Drawn, hz: float) -> Drawn:
    """The same with noise told at hz in every ledger of a build; no target is stated by that."""
    numbers = MappingProxyType({**drawn.chain.numbers, REFERENCE: hz})
    return replace(drawn, chain=replace(drawn.chain, numbers=numbers))
