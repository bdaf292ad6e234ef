"""Input-referred noise density of many builds at one frequency: one adjoint solution, builds on the last axis."""

from __future__ import annotations

from collections.abc import Sequence
from math import pi

import numpy as np

from polebook.circuit.build import Circuit
from polebook.circuit.noise import sources
from polebook.circuit.views import network
from polebook.devices.num import BOLTZMANN, ICE_K
from polebook.devices.spectrum import Spectrum
from polebook.plan.spread.normal import Array
from polebook.solve.fold import fold
from polebook.solve.noise import powers
from polebook.solve.transfer import adjoint
from polebook.stages.stamper import Value

AT_A_TIME = 512  # builds: the folded network stays in the processor's cache


def density(of: Circuit, values: Sequence[Value], spectra: Sequence[Spectrum], celsius: float | Array, hz: float,
            gain: float, builds: int) -> Array:
    """(builds,) V/√Hz or A/√Hz at hz, NaN where it is beyond all numbers; as book.noise has it of one chain.

    values   of the parts, spectra of the sources that are no resistors, celsius: floats or arrays (builds,)
    gain     size that the transfers are scaled by, to keep them from the ends of what a number can hold
    """
    found = np.empty(builds)
    for first in range(0, builds, AT_A_TIME):
        some = slice(first, min(first + AT_A_TIME, builds))
        spectra_of = [Spectrum(_cut(one.white, some), _cut(one.corner, some)) for one in spectra]
        found[some] = _density(of, [_cut(value, some) for value in values], spectra_of, _cut(celsius, some), hz, gain,
                               some.stop - some.start)
    return found


def _cut(value: Value, some: slice) -> Value:
    return value[some] if np.ndim(value) else value


def _density(of: Circuit, values: list[Value], spectra: Sequence[Spectrum], celsius: Value, hz: float, gain: float,
             builds: int) -> Array:
    every = sources(of.network, of.layout.recorder.spectra, 25.0)  # which there are; what each makes comes below
    s = np.full(builds, 2j * pi * hz)
    with np.errstate(all="ignore"):
        net = network(of.layout, values)
        net.conductance = [np.asarray(entry) for entry in net.conductance]  # a sweep of one network has them plain
        folded = fold(net, s, "full")
        size = np.full(builds, 1.0 / gain)
        for one in folded.gains:
            size = size * np.abs(one)
        each = powers(folded, adjoint(folded, of.layout.after[-1]), s, every, gain)
        thermal = 4.0 * BOLTZMANN * (celsius + ICE_K)
        white = [thermal / values[part] for part, *_ in every.resistors]
        white += [one.white * (1.0 + one.corner / hz) for one in spectra]
        total = np.zeros(builds)
        for power, strength in zip(each, white, strict=True):
            total += power * strength
        found: Array = np.sqrt(total) / size
    found[~np.isfinite(found)] = np.nan
    return found
