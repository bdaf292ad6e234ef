"""What a branch is carried as over frequency: real part once, imaginary part by omega, for all builds at once."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from polebook.circuit.elements import Branch
from polebook.circuit.layout import Layout
from polebook.stages.stamper import Value


@dataclass(frozen=True, slots=True)
class Form:
    """A branch's impedance (series) or admittance is real + j·(omega·up + down/omega), or one over that.

    impedance  whether the bracket is an impedance;  turned  whether one over it is what is carried
    up, down   whether there is such a term;  mixed  whether it counts as a factor of the determinant
    """

    impedance: bool
    turned: bool
    up: bool
    down: bool
    mixed: bool


def form(layout: Layout, branch: Branch) -> Form:
    """Parts in parallel add as admittances, groups of one part each add as impedances: the stages stamp no other."""
    kinds = {layout.parts[index].type for group in branch.groups for index in group}
    chained = len(branch.groups) > 1
    impedance = branch.series if len(kinds) == 1 else chained
    turned, mixed = impedance != branch.series, len(kinds) > 1
    if (chained and any(len(group) > 1 for group in branch.groups)) or (mixed and not turned):
        raise NotImplementedError("a branch of parts in parallel and in series")
    return Form(impedance, turned, ("L" if impedance else "C") in kinds, ("C" if impedance else "L") in kinds, mixed)


def parts(layout: Layout, branch: Branch, values: Sequence[Value], shape: Form) -> tuple[Value, Value, Value]:
    """(real, up, down) of the bracket for part values that are floats or arrays; 0.0 for what is not there."""
    sums: dict[str, Value] = {"R": 0.0, "C": 0.0, "L": 0.0}
    chained = len(branch.groups) > 1
    for group in branch.groups:
        for index in group:
            kind, value = layout.parts[index].type, values[index]
            # in parallel conductances and capacitances add, in a chain resistances and coils do
            direct = (kind == "C") != chained
            sums[kind] = sums[kind] + (value if direct else 1.0 / value)
    if chained == shape.impedance:
        real, storing, other = sums["R"], sums["L" if chained else "C"], sums["C" if chained else "L"]
        return real, storing, -other
    kind = next(kind for kind in "RCL" if not isinstance(sums[kind], float) or sums[kind] != 0.0)
    turned = 1.0 / sums[kind]
    if kind == "R":
        return turned, 0.0, 0.0
    return (0.0, turned, 0.0) if (kind == "L") == shape.impedance else (0.0, 0.0, -turned)
