"""The ledger as plain data, in the schema of `--json`: what is computed by later sections stands as null."""

from __future__ import annotations

from collections.abc import Callable, Collection, Mapping
from math import atan2, degrees, isfinite, log10, pi
from typing import TYPE_CHECKING, Any

from polebook import __version__
from polebook.book import noise_rows, pulse_rows
from polebook.book.account import line_losses
from polebook.book.ledger import Ledger, ledger
from polebook.book.lines import Line
from polebook.book.reach import within_reach
from polebook.book.verdict import cause
from polebook.solve.fold import fold

if TYPE_CHECKING:
    from polebook.book.poles import Root

BAND = "band"
__all__ = ["BAND", "Ledger", "at", "document", "ledger"]


def document(of: Ledger, only: Collection[str] | None = None) -> dict[str, Any]:
    """The whole ledger: base SI units at full precision, None where a figure does not apply.

    With `only`, sections (keys of SECTIONS) that are not named stand as None and are not computed. BAND in it stands
    for what "overall" says of gain and band alone.
    """
    with within_reach(of.chain):
        result = {"format": 1, "tool": f"polebook {__version__}",
                  "chain": {"title": of.chain.title, "digest": of.chain.digest}}
        result |= {name: make(of) if only is None or name in only else None for name, make in SECTIONS.items()}
        return result | {"overall": of_the_band(of)} if only is not None and BAND in only else result


def roots(found: tuple[Root, ...] | None) -> list[dict[str, Any]] | None:
    """Poles or zeros as rows, rad/s, Hz; None where they are not resolved."""
    if found is None:
        return None
    return [{"re": r.value.real, "im": r.value.imag, "hz": r.hz, "q": r.q, "stage": r.stage} for r in found]


def cards(of: Ledger) -> list[dict[str, Any]]:
    """Every figure that the file states on a card in use, with its leverage; values in the key's own unit."""
    return [{"device": card, "figure": key, "value": value, "leverage": row}
            for (card, key), (value, row) in of.leverage.cards.items()]


def _owner(of: Ledger, place: object) -> str | None:
    """Name of the stage, card or table at whose head a place stands."""
    return next((path for path, known in of.chain.places.items() if known is place and "." not in path), None)


def decibels(gain: float | None) -> float | None:
    """20·log10 of the size of a gain."""
    return None if not gain or not isfinite(gain) else 20.0 * log10(abs(gain))


def overall(of: Ledger) -> dict[str, Any]:
    return {**of_the_band(of), **pulse_rows.overall(of), **noise_rows.overall(of), **of_levels(of)}


def of_the_band(of: Ledger) -> dict[str, Any]:
    """Gain, stability and band of the whole chain: what an audit's page tells, without the figures that cost more."""
    solution = of.solution
    band = solution.band if of.judged else None
    return {
        "gain": solution.gain, "gain_db": decibels(solution.gain),
        "gain_unit": "V/V" if of.chain.source_kind == "voltage" else "V/A",
        "unstable": None if solution.winding.right is None else of.unstable, "reference_hz": of.reference_hz,
        "gain_at_reference": of.gain_at_reference, "lower_edge_hz": of.lower_hz, "upper_edge_hz": of.upper_hz,
        "peaking_db": band.peaking_db if band else None, "octc_upper_hz": solution.constants.upper_hz,
        "sctc_lower_hz": solution.constants.lower_hz, "node_upper_hz": of.node_upper_hz, "shrinkage": of.shrinkage,
    }


def of_levels(of: Ledger) -> dict[str, Any]:
    """What the whole chain draws, where it clips first, and how far its signals lie above its noise."""
    from polebook.book.levels import over_noise_db  # deferred: an audit asks for none of it

    levels, noise = of.levels, of.input_noise
    largest = levels.largest_source if levels else None
    return {
        "supply_current_a": of.supply_current, "clips_first": levels.first.stage if levels and levels.first else None,
        "largest_source": largest, "dynamic_range_db": over_noise_db(largest, noise),
        "noise_margin_db": over_noise_db(of.chain.get("source.smallest"), noise),
        "full_power_hz": levels.full_power_hz if levels else None,
    }


def by_stage(of: Ledger, shares: dict[int, float]) -> dict[str, float]:
    """Shares of the parts summed by stage; empty where there is no edge. A stage without C and L owns 0."""
    if not shares:
        return {}
    layout = of.solution.circuit.layout
    sums = {segment.name: 0.0 for segment in layout.segments}
    for index, share in shares.items():
        sums[layout.parts[index].stage] += share
    return sums


def lines(of: Ledger) -> list[dict[str, Any]]:
    """Source, stages and load."""
    owners = by_stage(of, of.owns_upper), by_stage(of, of.owns_lower), of.noise.by_line if of.noise else {}
    return [line(one, *owners) for one in of.lines]


def line(one: Line, upper: dict[str, float], lower: dict[str, float], noise: dict[str, float]) -> dict[str, Any]:
    return {
        "name": one.name, "kind": one.kind, "gain": one.gain, "gain_db": decibels(one.gain), "open_gain": one.open_gain,
        "loading": one.loading, "transfer_ohm": one.transfer_ohm, "k": one.k, "input_ohm": one.input_ohm,
        "output_ohm": one.output_ohm,
        "owns_upper": None if one.left_out else upper.get(one.name),
        "owns_lower": None if one.left_out else lower.get(one.name),
        "noise_share": None if one.left_out else noise.get(one.name),
        "bridges": [{"part": b.part, "type": b.type, "value": b.value, "k": b.k, "at_input": b.at_input,
                     "at_output": b.at_output} for b in one.bridges],
    }


def nodes(of: Ledger) -> list[dict[str, Any]]:
    upper, lower = of.upper_account, of.lower_account
    result = []
    for site in of.sites:
        room = site.pole_hz / of.equal_pole_hz if site.pole_hz is not None and of.equal_pole_hz else None
        result.append({
            "name": site.name, "stage": site.stage, "interstage": site.interstage, "ohm": site.ohm, "farad": site.farad,
            "pole_hz": site.pole_hz, "lost_upper_db": upper.lost.get(site.name),
            "allotted_upper_db": upper.allotted.get(site.name), "lost_lower_db": lower.lost.get(site.name),
            "allotted_lower_db": lower.allotted.get(site.name),
            "room": None if site.farad is None and site.ohm is not None else room,
        })
    return result


def parts(of: Ledger) -> list[dict[str, Any]]:
    """Parts of the network, noise sources, stated currents; a fitted part's leverage counts what it does to bias."""
    net, taus = of.solution.circuit.network, of.solution.constants.by_part
    lever, shares = of.leverage, of.noise.shares if of.noise else {}
    result = []
    for index, part in enumerate(net.layout.parts):
        if part.type == "gain":
            continue
        value = net.values[index]
        result.append({
            "stage": part.stage, "part": part.name, "type": part.type, "role": part.role or None,
            "value": value if isfinite(value) else None, "tau_s": taus.get(index),
            "owns_upper": of.owns_upper.get(index),
            "owns_lower": of.owns_lower.get(index), "noise_share": shares.get((part.stage, part.name)),
            "leverage": lever.parts.get((part.stage, part.name), lever.elements[index]),
        })
    result += noise_rows.parts(of)
    for (stage, key), (value, row) in lever.currents.items():
        result.append({"stage": stage, "part": key, "type": "I", "role": None, "value": value, "tau_s": None,
                       "owns_upper": None, "owns_lower": None, "noise_share": None, "leverage": row})
    return result


def operating(of: Ledger) -> list[dict[str, Any]]:
    circuit = of.solution.circuit
    result = []
    for stage in of.chain.stages:
        for name, card in ((stage.name, stage.device), (f"{stage.name}_upper", stage.upper or stage.device)):
            point = circuit.points.get(name)
            if point is None or not card:
                continue
            watts = None if point.current is None or point.across is None else point.current * point.across
            result.append({"stage": name, "device": card, "current_a": point.current, "across_v": point.across,
                           "control_v": point.control_v, "lower_v": point.lower_v, "output_v": point.output_v,
                           "dissipation_w": watts, "from": point.origin})
    return result


def rails(of: Ledger) -> list[dict[str, Any]]:
    """Ground and every rail that stands, A out of it into the circuit: they sum to 0."""
    return [{"rail": name, "current_a": of.rails.current(name)} for name in of.rails.standing]


def levels(of: Ledger) -> list[dict[str, Any]] | None:
    """Every interstage node, V peak (noise: V rms); None where the chain is not stable."""
    if of.levels is None:
        return None
    return [{"node": row.node, "largest_v": row.largest, "smallest_v": row.smallest,
             "noise_v": of.noise_at(row.node), "clip_v": row.clip,
             "clips_by": f"{row.stage} {row.clips_by}" if row.stage else None, "headroom_db": row.headroom_db}
            for row in of.levels.rows]


def account(of: Ledger) -> dict[str, Any]:
    result = {}
    for name, one in (("upper", of.upper_account), ("lower", of.lower_account)):
        result[name] = {"edge_hz": one.edge_hz, "budget_db": 10.0 * log10(2.0), "lost_db": one.total_db,
                        "left_db": one.left_db}
    return result


def targets(of: Ledger) -> list[dict[str, Any]]:
    """Every target of the file with what was got, and why it is missed or not judged."""
    return [{"name": t.name, "want": t.want, "got": t.got, "margin": t.margin, "met": t.met,
             "why": t.why or cause(of, t)}
            for t in of.targets]


def cautions(of: Ledger) -> list[dict[str, Any]]:
    """Every caution with the stage, card or table that it is about."""
    return [{"stage": _owner(of, problem.place), "text": f"{problem.what}: {problem.why}; {problem.fix}"}
            for problem in of.cautions]


SECTIONS: Mapping[str, Callable[[Ledger], Any]] = {
    "overall": overall, "lines": lines, "nodes": nodes, "parts": parts, "cards": cards, "bias": operating,
    "rails": rails, "poles": lambda of: roots(of.poles.roots), "zeros": lambda of: roots(of.zeros),
    "account": account, "targets": targets, "levels": levels, "verdict": lambda of: of.verdict, "cautions": cautions,
}
"""Key of the document -> what computes it."""


def at(of: Ledger, hz: float) -> dict[str, Any]:
    """Gain, phase and loss of every line at one frequency (Hz)."""
    with within_reach(of.chain):
        gains = fold(of.solution.circuit.network, 2j * pi * hz, "full").gains
        lost = line_losses(of.solution, hz)
    return {"hz": hz, "lines": [
        {"name": segment.name, "gain_db": decibels(abs(gain)),
         "phase_deg": degrees(atan2(complex(gain).imag, complex(gain).real)), "lost_db": db}
        for segment, gain, db in zip(of.solution.circuit.layout.segments, gains, lost, strict=True)]}
