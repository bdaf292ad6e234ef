"""Noise of the chain: its density and who makes it, its total over a band, noise figure."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import cached_property
from math import inf, log10, pi, sqrt
from typing import TYPE_CHECKING

import numpy as np

from polebook.book.noise_band import Totals, none, totals
from polebook.book.solution import Solution
from polebook.chain.suggest import listed
from polebook.circuit.noise import Array, Sources, sources
from polebook.devices.num import BOLTZMANN
from polebook.devices.spectrum import T0_K
from polebook.formula import Formula
from polebook.solve.fold import Folded, fold
from polebook.solve.noise import powers, transfers
from polebook.solve.transfer import Adjoint, adjoint

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from polebook.stages.stamper import Value

NETWORK_NOISE = "one adjoint solution of the full network (R. Rohrer, L. Nagel, R. Meyer and L. Weber, " \
                "Computationally efficient electronic-circuit noise calculations, IEEE J. Solid-State Circuits 6, " \
                "1971, from memory)"
FRIIS = "H. T. Friis, Noise figures of radio receivers, Proc. IRE 32, 1944 (from memory)"
FORMULAS = (
    Formula("overall.noise_density", "e = sqrt(sum of S·|T|^2 over all sources)/|H| at the reference frequency",
            NETWORK_NOISE),
    Formula("overall.noise_total_output", "E = sqrt(integral of sum of S·|T|^2 over the noise band)", NETWORK_NOISE),
    Formula("levels.noise_v", "E = sqrt(integral of sum of S·|T|^2 over the noise band), T from each source "
                              "to the node", NETWORK_NOISE),
    Formula("overall.noise_total_input", "E_in = E/|gain|, gain at midband", "definition"),
    Formula("overall.noise_from_hz", "target.noise_from; else 0 where the integral has a bound there, else 0.1 Hz",
            "definition"),
    Formula("overall.noise_to_hz", "target.noise_to; else no end where the integral needs none, else 100·f_H",
            "definition"),
    Formula("overall.noise_figure_db", "10·log10(1 + (S_out - S_source - S_load)/(4·k_B·T_0·R_s·|H|^2)), T_0 = 290 K",
            FRIIS),
    Formula("lines.noise_share", "sum of the shares of the line's parts", "definition"),
    Formula("parts.noise_share", "S·|T|^2 of the part over the sum of all, at the reference frequency", NETWORK_NOISE),
)

UNTOLD = "the current of {} is not known, so that its shot noise is not either"
SILENT = "nothing in the chain makes noise"


@dataclass(frozen=True, slots=True)
class Spot:
    """The noise at one frequency.

    gain      H there, V/V or V/A;  folded, adjoint  the solution
    transfer  (n,) of every source, over H;  strength (n,) its density², A²/Hz or V²/Hz
    parts     (n,) what each adds to the input-referred density²; square their sum, V²/Hz or A²/Hz
    """

    hz: float
    gain: complex
    folded: Folded
    adjoint: Adjoint
    transfer: NDArray[np.complex128]
    strength: Array
    parts: Array
    square: float


@dataclass(frozen=True, slots=True)
class Density:
    """Over frequencies (f,) in Hz: output (V/√Hz) and input-referred (V/√Hz, A/√Hz) densities (f,); share (n, f) of
    every source in the output power."""

    hz: Array
    output: Array
    input: Array
    share: Array


class Noise:
    """All figures of a stable chain's noise, each when it is first asked for.

    reference_hz  where density and shares are told;  upper_hz  upper edge, None without one
    """

    def __init__(self, of: Solution, reference_hz: float | None, upper_hz: float | None) -> None:
        self.of, self.reference_hz, self.upper_hz = of, reference_hz, upper_hz
        self.output = of.circuit.layout.after[-1]

    @property
    def untold(self) -> str:
        """Why no noise figure can be had; "" where they can."""
        stages = dict.fromkeys(stage for stage, _ in self.of.circuit.layout.recorder.untold)
        return UNTOLD.format(listed(stages)) if stages else ""

    @cached_property
    def sources(self) -> Sources:
        circuit = self.of.circuit
        celsius = self.of.chain.get("supply.temperature")
        return sources(circuit.network, circuit.layout.recorder.spectra, 25.0 if celsius is None else celsius)

    def spot(self, hz: float) -> Spot:
        """The noise at one frequency, Hz."""
        s, net = 2j * pi * hz, self.of.circuit.network
        folded = fold(net, s, "full")
        gain: Value = 1.0
        for one in folded.gains:
            gain = gain * one
        adj = adjoint(folded, self.output)
        strength = self.sources.at(np.array([hz]))[:, 0]
        with np.errstate(all="ignore"):
            transfer = np.array(transfers(folded, adj, s, self.sources), dtype=complex) / gain
            parts = strength * (transfer.real**2 + transfer.imag**2)
        return Spot(hz, complex(gain), folded, adj, transfer, strength, parts, float(parts.sum()))

    @cached_property
    def at_reference(self) -> Spot | None:
        """None where no noise can be told, or it is beyond all numbers, or next to nothing passes but rounding."""
        if self.untold or self.reference_hz is None or not self.of.told_at(self.reference_hz):
            return None
        found = self.spot(self.reference_hz)
        return found if np.isfinite(found.square) else None

    @property
    def density(self) -> float | None:
        """Input-referred density at the reference frequency, V/√Hz or A/√Hz."""
        return None if self.at_reference is None else sqrt(self.at_reference.square)

    def over(self, hz: Sequence[float] | Array) -> Density | None:
        """Densities over frequency; None where no noise can be told."""
        if self.untold:
            return None
        at = np.array(hz, dtype=float)
        s = 2j * pi * at
        with np.errstate(all="ignore"):
            folded = fold(self.of.circuit.network, s, "full")
            size = np.ones(at.shape)
            for one in folded.gains:
                size = size * np.abs(one)
            power = powers(folded, adjoint(folded, self.output), s, self.sources, abs(self.of.gain))
            each = power * self.sources.at(at)
            total = each.sum(axis=0)
            output = np.sqrt(total) * abs(self.of.gain)
            return Density(at, output, output / size, each / total)

    @cached_property
    def shares(self) -> dict[tuple[str, str], float]:
        """Share of the output power at the reference frequency by (stage, part); they sum to 1. {} without noise."""
        spot = self.at_reference
        if spot is None or not spot.square:
            return {}
        result: dict[tuple[str, str], float] = {}
        for owner, part in zip(self.sources.owners, (spot.parts / spot.square).tolist(), strict=True):
            result[owner] = result.get(owner, 0.0) + part
        return result

    @cached_property
    def by_line(self) -> dict[str, float]:
        """The shares summed by line; {} without noise."""
        if not self.shares:
            return {}
        sums = {segment.name: 0.0 for segment in self.of.circuit.layout.segments}
        for (stage, _), share in self.shares.items():
            sums[stage] += share
        return sums

    @cached_property
    def figure_db(self) -> float | None:
        """Noise figure at the reference frequency, against the source's resistance at 290 K; None of an ideal one."""
        spot, ohm = self.at_reference, self.of.chain.get("source.resistance")
        if spot is None or not ohm:
            return None
        least = 4.0 * BOLTZMANN * T0_K * (ohm if self.of.chain.source_kind == "voltage" else 1.0 / ohm)
        ends = {("source", "resistance"), ("load", "resistance")}
        own = [part for owner, part in zip(self.sources.owners, spot.parts.tolist(), strict=True) if owner not in ends]
        return 10.0 * log10(1.0 + sum(own) / least)

    @cached_property
    def totals(self) -> Totals:
        """Noise at the output over the noise band."""
        if self.untold:
            return none(1, self.untold)
        return totals(self.of, self.sources, [self.output], self.upper_hz)

    @property
    def output_rms(self) -> float | None:
        """V."""
        return self.totals.rms[0]

    @property
    def input_rms(self) -> float | None:
        """V or A: by the midband gain."""
        rms = self.output_rms
        return None if rms is None else rms / abs(self.of.gain)

    @property
    def from_hz(self) -> float | None:
        return None if self.output_rms is None else self.totals.band.from_hz

    @property
    def to_hz(self) -> float | None:
        """None too where the band has no upper end."""
        return None if self.output_rms is None or self.totals.band.to_hz == inf else self.totals.band.to_hz

    def at_nodes(self, nodes: Sequence[int]) -> Totals:
        """Noise of the noise band at nodes of the network; None where a node's has no bound."""
        if self.output_rms is None:
            return none(len(nodes), self.totals.why)
        return totals(self.of, self.sources, nodes, self.upper_hz, self.totals.band)
