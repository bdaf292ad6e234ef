"""Why the gain is not what was wanted: what a joint loses, what an edge takes at the reference, what moves it most."""

from __future__ import annotations

from math import log10
from typing import TYPE_CHECKING

from polebook.book.sites import interstage_names
from polebook.book.verdict_edge import name_of, ranked
from polebook.book.verdict_how import the, topology_of
from polebook.book.verdict_lever import gain_lever, lever
from polebook.book.verdict_words import decibels, figure, loss, per_cent, sentences, stated, stated_decibels

if TYPE_CHECKING:
    from polebook.book.ledger import Ledger
    from polebook.book.targets import Target

FELT_DB = 0.05  # less loading is none
STIFF = 10.0  # a driver so many times above what it drives feeds it a current
HEAVY = 0.3  # share of what is missing from which a joint is to blame


def gain_unit(of: Ledger) -> str:
    return "dB" if of.chain.source_kind == "voltage" else "dBΩ"


def difference(target: Target) -> float:
    """dB over what was wanted."""
    return 20.0 * log10((target.got or 0.0) / target.want)


def headline(of: Ledger, target: Target) -> str:
    unit, hz = gain_unit(of), of.chain.get("target.reference")
    at = f" at {stated(hz, 'Hz')}" if hz else ""
    return f"{decibels(target.got or 0.0, unit, 2)} for {stated_decibels(20.0 * log10(target.want), unit)}{at}"


def missed(of: Ledger, target: Target) -> tuple[str, str]:
    """(what follows the headline and a comma, what mends it), as sentences."""
    off, why = difference(target), cause(of, target)
    found = _at_reference(of, -off)
    mend = lever(of, *found[1:]) if found else gain_lever(of, off < 0.0)
    return f"{loss(abs(off))} {'over' if off > 0 else 'short'}{f': {why}' if why else ''}.", sentences(mend)


def cause(of: Ledger, target: Target) -> str:
    """Where what is missing has gone, or what is too much comes from."""
    off = difference(target)
    if off > 0.0:
        return _tallest(of)
    found = _at_reference(of, -off)
    if found:
        return found[0]
    db, text = worst_joint(of)
    if db >= HEAVY * -off:
        return text
    if db < FELT_DB:
        return "no node loads what drives it; the stages give too little"
    return f"no node loads what drives it by more than {loss(db)}; the stages give too little"


def _tallest(of: Ledger) -> str:
    if any(fed_by_current(of, k) for k in range(len(of.lines) - 1)):
        return ""  # voltage gains to and from such a node are small and large together, and tell nothing apart
    stages = [line for line in of.lines[1:-1] if not line.left_out]
    most = max(stages, key=lambda line: abs(line.gain), default=None)
    return f"{most.name} gives the most, {decibels(most.gain)}" if most and abs(most.gain) > 1.0 else ""


def _at_reference(of: Ledger, short: float) -> tuple[str, str, int, str] | None:
    """(clause on the edge that has taken most of what is missing by the reference frequency, end, owner, its name)."""
    hz = of.reference_hz
    if "target.reference" not in of.chain.given or hz is None or not of.gain_at_reference:
        return None
    taken = 20.0 * log10(abs(of.solution.gain) / of.gain_at_reference)
    if short <= 0.0 or taken < 0.5 * short:
        return None
    end = "upper" if hz > of.solution.band.seed_hz else "lower"
    edge = of.upper_hz if end == "upper" else of.lower_hz
    owners = ranked(of, end)
    if edge is None or not owners:
        return None
    text = f"the {end} edge at {figure(edge, 'Hz')} takes {loss(taken)} of it"
    first, share = owners[0]
    name = name_of(of, first)
    return f"{text}; of that edge {name} owns {per_cent(share)}", end, first, name


def fed_by_current(of: Ledger, k: int) -> bool:
    """Whether line k drives the next one by its current: a current source, a held node, an emitter far below it."""
    line, after = of.lines[k], of.lines[k + 1]
    if k == 0 and of.chain.source_kind == "current":
        return True
    low = after.name in of.held or topology_of(of, after.name) == "common_control"
    return low and bool(line.output_ohm and after.input_ohm and line.output_ohm > STIFF * after.input_ohm)


def worst_joint(of: Ledger) -> tuple[float, str]:
    """(dB, clause) of the node where the next line loads the one that drives it most; 0 dB where none does.

    Where the current is what is passed on, the voltage that drops is no loss.
    """
    lines = of.lines
    found = [(-20.0 * log10(abs(line.loading)), k) for k, line in enumerate(lines[:-1])
             if line.loading and line.output_ohm and abs(line.loading) < 1.0 and not line.left_out
             and not fed_by_current(of, k)]
    if not found:
        return 0.0, ""
    db, k = max(found)
    line, after = lines[k], next((one for one in lines[k + 1:] if not one.left_out), lines[-1])
    node = interstage_names(of.solution.circuit.layout)[of.solution.circuit.layout.after[k]]
    into = f" into {figure(after.input_ohm, 'Ω')} of {the(after.name)}" if after.input_ohm else ""
    return db, f"{node} loses {loss(db)}, {figure(line.output_ohm, 'Ω')} of {the(line.name)}{into}"
