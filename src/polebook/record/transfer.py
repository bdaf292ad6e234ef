"""The transfer of a chain at the frequencies of a sweep, and what parts do to it."""

from __future__ import annotations

from collections.abc import Sequence
from math import pi
from typing import TYPE_CHECKING, TypeAlias

import numpy as np

from polebook.book.leverage import of_elements
from polebook.circuit.build import Circuit
from polebook.solve.contributions import contributions
from polebook.solve.edges import DECIBEL
from polebook.solve.fold import fold
from polebook.solve.transfer import adjoint, branch_currents, voltages

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from polebook.record.sweeps.sweep import Array

Complex: TypeAlias = "NDArray[np.complex128]"
_PIECE = 2000  # frequencies at a time: some ten megabytes for a long chain


def transfer(of: Circuit, hz: Array) -> Complex:
    """ln H, (f,): neper and radians; H = V(output)/EMF, or per ampere. Not finite where H is 0 or beyond a double."""
    found = np.zeros(hz.shape, dtype=complex)
    with np.errstate(all="ignore"):
        for at in range(0, hz.size, _PIECE):
            for gain in fold(of.network, 2j * pi * hz[at:at + _PIECE], "full").gains:
                found[at:at + _PIECE] += np.log(np.asarray(gain, dtype=complex))
    return found


def slopes(of: Circuit, hz: Array, paths: Sequence[str]) -> Complex:
    """d ln H/d ln(path), (f, paths): one adjoint solution a frequency, times what each path does to the elements."""
    relative, _ = of_elements(of, paths)
    net, output = of.network, of.layout.after[-1]
    found = np.zeros((hz.size, len(paths)), dtype=complex)
    with np.errstate(all="ignore"):
        for at in range(0, hz.size, _PIECE):
            s = 2j * pi * hz[at:at + _PIECE]
            folded = fold(net, s, "full")
            v = voltages(folded)
            adj = adjoint(folded, output)
            each = contributions(net, s, v, adj.u, branch_currents(folded, v, adj), "full", resistive=True)
            for index, weight in each.items():
                if relative[index].any():
                    found[at:at + _PIECE] += np.broadcast_to(weight / v[output], s.shape)[:, None] * relative[index]
    return found


def off_db(measured_db: Array, ln_transfer: Complex) -> Array:
    """Measured less planned, dB."""
    return measured_db - DECIBEL * ln_transfer.real


def off_degrees(measured: Array, ln_transfer: Complex) -> Array:
    """Measured less planned, degrees, to within half a turn."""
    found: Array = (measured - np.degrees(ln_transfer.imag) + 180.0) % 360.0 - 180.0
    return found
