"""Poles and zeros of the whole chain, each with the stage that makes it."""

from __future__ import annotations

from dataclasses import dataclass
from math import pi
from typing import TYPE_CHECKING

from polebook.book.solution import Solution
from polebook.formula import Formula
from polebook.solve.zeros import zeros as all_zeros

if TYPE_CHECKING:
    from collections.abc import Mapping

FORMULAS = (
    Formula("poles.re", "p = re + j·im with det(G + p·C) = 0 of the full network", "all at once by simultaneous Newton "
            "steps that repel each other (D. A. Bini, L. Gemignani and F. Tisseur, The Ehrlich-Aberth method for the "
            "nonsymmetric tridiagonal eigenvalue problem, SIAM J. Matrix Anal. Appl. 27, 2005; from memory)"),
    Formula("poles.hz", "|p|/(2·pi), det(G + p·C) = 0 of the full network", "definition"),
    Formula("poles.q", "|p|/(2·|re p|) of a complex pair", "definition"),
    Formula("zeros.re", "z = re + j·im at which the stage's forward cofactor is 0: nothing of the signal passes it",
            "definition"),
    Formula("zeros.q", "|z|/(2·|re z|) of a complex pair", "definition"),
    Formula("poles.stage", "the stage with the largest Re(-sum of d ln p/d ln X) over its C and L",
            "derivative of an eigenvalue by its left and right vectors (any text on matrix perturbation)"),
    Formula("zeros.hz", "|z|/(2·pi) of the stage's forward cofactor", "definition"),
)


@dataclass(frozen=True, slots=True)
class Root:
    """A pole or a zero, rad/s; `stage` None for a pole at 0. weight: share of that stage in a pole, None for a zero."""

    value: complex
    stage: str | None
    weight: float | None = None

    @property
    def hz(self) -> float:
        return abs(self.value) / (2 * pi)

    @property
    def q(self) -> float | None:
        """Quality of a complex pair, None for a real root and for one on the axis."""
        if not self.value.imag or not self.value.real:
            return None
        return abs(self.value) / (2 * abs(self.value.real))


@dataclass(frozen=True, slots=True)
class Resolved:
    """Poles by rising size, or None with the reason why they were not resolved."""

    roots: tuple[Root, ...] | None
    why: str


def poles(of: Solution) -> Resolved:
    """All finite poles, those at 0 first; None unless count, trace and winding agree."""
    found = of.poles
    if not found.trusted or of.winding.finite != found.roots.size:
        return Resolved(None, found.why or "their number is not that of the winding")
    roots = [Root(0j, None)] * found.at_zero
    return Resolved((*roots, *_named(of)), "")


def _named(of: Solution) -> list[Root]:
    layout, found = of.circuit.layout, of.poles
    by_stage: Mapping[str, list[float]] = {segment.name: [0.0] * found.roots.size for segment in layout.segments}
    for index, weights in of.modes.by_part.items():
        own = by_stage[layout.parts[index].stage]
        for k, weight in enumerate(weights.tolist()):
            own[k] += weight
    result = []
    for k, value in enumerate(found.roots.tolist()):
        stage = max(by_stage, key=lambda name: by_stage[name][k])
        result.append(Root(value, stage, by_stage[stage][k]))
    return result


def zeros(of: Solution) -> tuple[Root, ...] | None:
    """All finite zeros by rising size, stage by stage; None where a stage's could not be counted."""
    found = all_zeros(of.circuit.network, float(of.sweep.hz[0]), float(of.sweep.hz[-1]))
    roots: list[Root] = []
    for one in found:
        if one.roots is None:
            return None
        roots += [Root(value, one.stage) for value in one.roots.tolist()]
    return tuple(sorted(roots, key=lambda root: (abs(root.value), root.value.imag)))

