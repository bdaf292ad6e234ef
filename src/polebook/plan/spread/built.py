"""Part values of built chains with their operating points: bias, cards and stages for arrays of numbers."""

from __future__ import annotations

from collections.abc import Mapping

from polebook.circuit import bias, terminals
from polebook.circuit.bias import Operating
from polebook.circuit.build import Circuit, given_of
from polebook.circuit.recorder import Collector
from polebook.devices.spectrum import Spectrum
from polebook.plan.spread.normal import Array
from polebook.stages.registry import KINDS, STAMPS
from polebook.stages.stamper import Value


def built(of: Circuit, numbers: Mapping[str, Array]) -> tuple[list[Value], list[Spectrum], dict[str, Operating]]:
    """As `circuit.build.values_and_noise`, with the operating points behind it; what nothing spreads is a float."""

    def get(path: str) -> Value | None:
        return numbers[path] if path in numbers else of.chain.numbers.get(path)

    points = bias.solve(of.plan, get)
    stamper = Collector(of.layout.recorder)
    terminals.source(stamper, of.chain.source_kind == "voltage", get)
    for stage in of.chain.stages:
        if not stage.left_out:
            STAMPS[KINDS[stage.kind].topology](stamper, 0, given_of(of.chain, stage, get, points)[0])
    terminals.load(stamper, 0, get)
    return stamper.values, stamper.spectra, points
