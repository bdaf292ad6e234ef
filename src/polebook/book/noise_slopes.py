"""What each element and each noise source does to the input-referred noise density at the reference frequency."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np

from polebook.book.noise import Noise
from polebook.devices.spectrum import Spectrum
from polebook.solve.contributions import contributions
from polebook.solve.noise_slopes import slopes
from polebook.solve.transfer import Adjoint, branch_currents, voltages


@dataclass(slots=True)
class Slopes:
    """d ln(density)/d ln X.

    output   of the output density, by part number: of a resistor through its own noise too, the others standing still
    signal   of |H| at the reference frequency, by part number
    sources  of the density (not its square) of each source that is no resistor, in the layout's order
    """

    noise: Noise
    output: dict[int, float]
    signal: dict[int, float]
    sources: list[float]

    @property
    def elements(self) -> dict[int, float]:
        """Of the input-referred density, by part number."""
        return {index: x - self.signal[index] for index, x in self.output.items()}

    def moved(self, spectra: Sequence[Spectrum], count: int, step: float) -> Any:
        """(count,) what sources, moved by an imaginary step in as many keys, do to the density."""
        total = np.zeros(count)
        spot = self.noise.at_reference
        for one, lever, strength in zip(spectra, self.sources, self._strengths(), strict=True):
            if spot is not None and strength:
                density = np.asarray(one.white * (1.0 + one.corner / spot.hz))
                total = total + 0.5 * lever * density.imag / step / strength
        return total

    def _strengths(self) -> list[float]:
        spot, first = self.noise.at_reference, len(self.noise.sources.resistors)
        return [] if spot is None else [float(x) for x in spot.strength[first:]]


def slopes_of(noise: Noise) -> Slopes | None:
    """The slopes at the reference frequency; None where no density is known, or nothing makes noise."""
    spot = noise.at_reference
    if spot is None or not spot.square:
        return None
    net, s = noise.of.circuit.network, 2j * np.pi * spot.hz
    with np.errstate(all="ignore"):
        adj = spot.adjoint
        referred = Adjoint([x / spot.gain for x in adj.u], [x / spot.gain for x in adj.b])
        weights = [complex(x) for x in spot.strength * spot.transfer.conj()]
        each = slopes(spot.folded, referred, s, noise.sources, weights)
        v = voltages(spot.folded)
        signal = contributions(net, s, v, referred.u, branch_currents(spot.folded, v, referred), resistive=True)
    share, numbers = spot.parts / spot.square, range(len(net.layout.parts))
    output = {index: float(np.real(each.get(index, 0.0)) / spot.square) for index in numbers}
    for (index, *_), own in zip(noise.sources.resistors, share.tolist(), strict=False):
        output[index] -= 0.5 * own  # its current's density² is as 1/R
    return Slopes(noise, output, {index: float(np.real(signal.get(index, 0.0))) for index in numbers},
                  share[len(noise.sources.resistors):].tolist())
