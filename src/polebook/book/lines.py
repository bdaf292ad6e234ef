"""The lines of the ledger: the source, each stage, the load, with what each is driven by and loaded with."""

from __future__ import annotations

from dataclasses import dataclass

from polebook.book.miller import Bridge, leading
from polebook.book.solution import Solution
from polebook.formula import Formula

FORMULAS = (
    Formula("lines.gain", "A_k = V(n_k)/V(n_k-1) at midband, loaded", "definition"),
    Formula("lines.open_gain", "V(n_k)/V(n_k-1) with everything after n_k taken away", "definition"),
    Formula("lines.loading", "A_k/open gain", "definition"),
    Formula("lines.input_ohm", "V/I into the stage, what follows attached", "definition"),
    Formula("lines.output_ohm", "V/I at n_k, what precedes attached, what follows taken away", "definition"),
    Formula("lines.transfer_ohm", "A_k·input resistance, of a stage that holds its input node", "definition"),
    Formula("lines.gain_db", "20·log10|A_k|", "definition"),
    Formula("lines.k", "K of the bridge with the largest capacitance at the input, else resistance", "definition"),
    Formula("lines.owns_upper", "sum of what its parts own", "definition"),
    Formula("lines.owns_lower", "sum of what its parts own", "definition"),
    Formula("overall.gain", "product of the lines' gains", "definition"),
)


@dataclass(frozen=True, slots=True)
class Line:
    """Gains in V/V (the source's in V/A where it is a current), resistances in Ω; None where a figure has no value."""

    name: str
    kind: str
    gain: float
    open_gain: float | None
    loading: float | None
    transfer_ohm: float | None
    k: float | None
    input_ohm: float | None
    output_ohm: float | None
    bridges: tuple[Bridge, ...]
    left_out: bool = False


def lines(of: Solution, split: dict[str, list[Bridge]], held: set[str]) -> list[Line]:
    """Every line, source first, load last; their gains multiply to the overall gain."""
    layout = of.circuit.layout
    left_out = {stage.name for stage in of.chain.stages if stage.left_out}
    result = []
    for index, segment in enumerate(layout.segments):
        gain, opened = of.gains[index], of.open_lines[index]
        if segment.name in left_out:
            result.append(Line(segment.name, segment.kind, 1.0, None, None, None, None, None, None, (), True))
            continue
        own = tuple(split.get(segment.name, ()))
        lead = leading(list(own))
        admittance = of.midband.inputs[index]
        input_ohm = 1.0 / admittance if admittance else None
        transfer = gain * input_ohm if segment.name in held and input_ohm is not None else None
        loading = gain / opened.gain if opened.gain else None
        result.append(Line(segment.name, segment.kind, gain, opened.gain, loading, transfer, lead.k if lead else None,
                           input_ohm, opened.output_ohm, own))
    return result
