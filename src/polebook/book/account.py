"""The bandwidth-shrinkage account: how many dB each node loses at the edge, and what it was allotted."""

from __future__ import annotations

from dataclasses import dataclass
from math import log10, pi

from polebook.book.miller import Bridge
from polebook.book.sites import interstage_names
from polebook.book.solution import Solution
from polebook.formula import Formula
from polebook.solve.edges import DECIBEL
from polebook.solve.fold import fold
from polebook.solve.sweep import neper

BUDGET_DB = 10.0 * log10(2.0)
FORMULAS = (
    Formula("nodes.lost_upper_db", "-20·log10(|A(f_a)|/|A|) of the line into the node; f_a is the target's upper "
                                   "edge, else the exact one", "definition"),
    Formula("nodes.lost_lower_db", "-20·log10(|A(f_a)|/|A|) of the line into the node; f_a is the target's lower "
                                   "edge, else the exact one", "definition"),
    Formula("nodes.allotted_upper_db", "the node's allot, else an even share of what is left of 10·log10(2) dB",
            "definition"),
    Formula("nodes.allotted_lower_db", "an even share of 10·log10(2) dB for each node that loses", "definition"),
    *(formula for end in ("upper", "lower") for formula in (
        Formula(f"account.{end}.edge_hz", f"the target's {end} edge, else the exact one", "definition"),
        Formula(f"account.{end}.budget_db", "10·log10(2): half the power", "definition of the edge"),
        Formula(f"account.{end}.lost_db", "sum over the nodes: the chain's loss at the account's edge", "definition"),
        Formula(f"account.{end}.left_db", "budget - lost", "definition"),
    )),
)


@dataclass(frozen=True, slots=True)
class Account:
    """One end of the band: lost and allotted dB by node name; edge in Hz, None where there is no edge to take it at."""

    edge_hz: float | None
    lost: dict[str, float | None]
    allotted: dict[str, float | None]
    total_db: float | None

    @property
    def left_db(self) -> float | None:
        return None if self.total_db is None else BUDGET_DB - self.total_db


def holding(of: Solution, split: dict[str, list[Bridge]]) -> set[str]:
    """Stages that hold their input node: transimpedance, or with a bridge resistor that makes most of its load."""
    result = set()
    for segment in of.circuit.layout.segments[1:]:
        if segment.kind == "transimpedance" and segment.after != segment.before:
            result.add(segment.name)
            continue
        for bridge in split.get(segment.name, []):
            if bridge.type == "R" and bridge.at_input and segment.kind != "inverting":
                ohm = of.inverse.point(segment.before)
                if ohm and 1.0 / bridge.at_input > 0.5 / ohm:
                    result.add(segment.name)
    return result


def line_losses(of: Solution, hz: float) -> list[float]:
    """dB that each line loses against its midband gain at hz, source first."""
    gains = fold(of.circuit.network, 2j * pi * hz, "full").gains
    return [-DECIBEL * neper(abs(gain) / abs(reference)) for gain, reference in zip(gains, of.gains, strict=True)]


def account(of: Solution, held: set[str], edge_hz: float | None, claims: dict[str, float]) -> Account:
    """Books the losses at edge_hz (Hz) to the nodes; `claims` are dB that nodes were allotted in the file."""
    layout = of.circuit.layout
    between = interstage_names(layout)
    order = list(dict.fromkeys(between[node] for node in layout.after))
    lost: dict[str, float | None] = dict.fromkeys(order)
    if edge_hz is None:
        return Account(None, lost, dict.fromkeys(order), None)
    booked = dict.fromkeys(order, 0.0)
    losses = line_losses(of, edge_hz)
    for index, db in enumerate(losses):
        booked[between[layout.after[index]]] += db
    held_nodes = {between[segment.before] for segment in layout.segments[1:] if segment.name in held}
    passed = 0.0
    for name in order:
        passed += booked[name]
        if name not in held_nodes or name == order[-1]:
            lost[name], passed = passed, 0.0
    allotted = {name: claims.get(name) for name in order}
    sharing = [name for name in order if lost[name] is not None and allotted[name] is None]
    for name in sharing:
        allotted[name] = (BUDGET_DB - sum(claims.values())) / len(sharing)
    return Account(edge_hz, lost, allotted, sum(losses))


def claims(of: Solution) -> dict[str, float]:
    """dB allotted in the file, by node name."""
    layout, chain = of.circuit.layout, of.chain
    between = interstage_names(layout)
    result: dict[str, float] = {}
    for index, segment in enumerate(layout.segments):
        db = chain.get(f"{segment.name}.allot")
        left_out = 0 < index < len(layout.segments) - 1 and chain.stages[index - 1].left_out
        if db is not None and not left_out:
            name = between[layout.after[index]]
            result[name] = result.get(name, 0.0) + db
    return result
