"""The Miller split of every impedance that bridges a stage."""

from __future__ import annotations

from dataclasses import dataclass

from polebook.book.solution import Solution
from polebook.formula import Formula

MILLER = "J. M. Miller, Dependence of the input impedance of a three-electrode vacuum tube upon the load in the " \
         "plate circuit, Scientific Papers of the Bureau of Standards 15, 1920 (from memory)"
FORMULAS = (
    Formula("bridges.k", "K = V(output side)/V(input side), loaded, at midband", MILLER),
    Formula("bridges.at_input", "C·(1 - K), or R/(1 - K)", MILLER),
    Formula("bridges.at_output", "C·(1 - 1/K), or R/(1 - 1/K)", MILLER),
)
NOTHING = 1e-12  # below this a half has no use, and is null


@dataclass(frozen=True, slots=True)
class Bridge:
    """One bridge of a stage and its halves, in F or Ω; i and j are its nodes at the input and the output side."""

    part: str
    type: str
    value: float
    k: float | None
    at_input: float | None
    at_output: float | None
    i: int
    j: int


def bridges(of: Solution) -> dict[str, list[Bridge]]:
    """Every bridge by stage, in the order of the stage's parts."""
    net, volts = of.circuit.network, of.volts
    result: dict[str, list[Bridge]] = {}
    for segment in net.layout.segments:
        for branch in segment.branches:
            if not branch.bridge:
                continue
            v_in, v_out = volts[branch.i], volts[branch.j]
            k = v_out / v_in if v_in else None
            for index in (index for group in branch.groups for index in group):
                part = net.layout.parts[index]
                if part.type == "R" or part.role == "high":
                    split = halves(part.type, net.values[index], k)
                    result.setdefault(segment.name, []).append(
                        Bridge(part.name, part.type, net.values[index], k, *split, branch.i, branch.j))
    return result


def halves(type_: str, value: float, k: float | None) -> tuple[float | None, float | None]:
    """(at the input, at the output) of a bridging C (F) or R (Ω) with the gain K across it; exact where K is taken."""
    if k is None:
        return None, None
    return _half(type_, value, 1.0 - k), _half(type_, value, 1.0 - 1.0 / k) if k else None


def _half(type_: str, value: float, share: float) -> float | None:
    if abs(share) < NOTHING:
        return None
    return value * share if type_ == "C" else value / share


def leading(of_stage: list[Bridge]) -> Bridge | None:
    """The bridge whose K the stage's line shows: the largest capacitance at the input, else resistance."""
    for type_ in ("C", "R"):
        candidates = [b for b in of_stage if b.type == type_ and b.at_input is not None]
        if candidates:
            return max(candidates, key=lambda b: b.at_input or 0.0)
    return next(iter(of_stage), None)
