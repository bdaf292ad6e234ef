"""The noise sources of a network with what each makes: resistors that a user fits, then devices and data sheets.

    resistor    4·k_B·T_K/R across it (H. Nyquist, Thermal agitation of electric charge in conductors, Physical Review
                32, 1928; J. B. Johnson, the same volume; both from memory)
    others      as the stages stamp them (Stamper.noise_current, noise_voltage)
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, TypeAlias

import numpy as np

from polebook.circuit.layout import Layout
from polebook.circuit.views import Network
from polebook.devices.num import BOLTZMANN, ICE_K
from polebook.devices.spectrum import Spectrum

if TYPE_CHECKING:  # numpy.typing costs 5 ms at start-up
    from numpy.typing import NDArray

Array: TypeAlias = "NDArray[np.float64]"


@dataclass(frozen=True, slots=True)
class Sources:
    """Every noise source, first the resistors by branch, then the layout's `noises`.

    owners     (stage, part) that each is booked to; several sources may have one owner
    resistors  (part, branch, place of its group in the branch) of the first ones
    white      (n,) A²/Hz, of voltages V²/Hz;  corner  (n,) Hz: S(f) = white·(1 + corner/f)
    """

    owners: tuple[tuple[str, str], ...]
    resistors: tuple[tuple[int, int, int], ...]
    white: Array
    corner: Array

    def at(self, hz: Array) -> Array:
        """(n, f) densities at frequencies (f,) above 0, Hz."""
        return self.white[:, None] * (1.0 + self.corner[:, None] / hz)


def noisy(layout: Layout) -> list[tuple[int, int, int]]:
    """(part, branch, place of its group) of every resistor that makes noise."""
    return [(index, number, place) for number, branch in enumerate(layout.branches)
            for place, group in enumerate(branch.groups) for index in group
            if layout.parts[index].type == "R" and not layout.parts[index].silent]


def sources(net: Network, spectra: Sequence[Spectrum], celsius: float) -> Sources:
    """The sources of a network at its values. celsius is the temperature of every part."""
    layout = net.layout
    resistors = noisy(layout)
    thermal = 4.0 * BOLTZMANN * (celsius + ICE_K)
    owners = [(layout.parts[index].stage, layout.parts[index].name) for index, *_ in resistors]
    owners += [(source.stage, source.part) for source in layout.recorder.noises]
    white = [thermal / net.values[index] for index, *_ in resistors] + [float(one.white) for one in spectra]
    corner = [0.0] * len(resistors) + [float(one.corner) for one in spectra]
    return Sources(tuple(owners), tuple(resistors), np.array(white), np.array(corner))
