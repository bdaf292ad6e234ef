"""Compensations and coils as plain data, for JSON and for the report: base SI units at full precision."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from math import isfinite, pi
from typing import Any

from polebook.book import build
from polebook.book.ledger import Ledger
from polebook.book.poles import Root
from polebook.chain.model import Chain
from polebook.plan.compensate import Option, Task
from polebook.plan.compensate_figures import Figures, figures, upper_zeros
from polebook.plan.compensate_loop import Loop
from polebook.plan.compensate_search import changed, seen_ohm
from polebook.plan.compensate_zero import brought
from polebook.plan.peaking import PUBLISHED, SOURCE, Coil, CoilTask
from polebook.plan.proposal import Proposal

Row = dict[str, Any]


def compensation(of: Task, done: Sequence[Option], stopped: bool) -> Row:
    """What `polebook compensate --edge` and `--pole` answer of a file."""
    by_name = {one.name: one for one in done if one.values}
    both = by_name.get("across"), by_name.get("ground")
    ratio = both[1].values[of.ground] / both[0].values[of.across] if both[0] and both[1] else None
    return {
        "file": of.file, "digest": of.chain.digest, "stage": of.stage.name, "kind": of.stage.kind,
        "wanted": {"figure": "upper_edge_hz" if of.wanted.what == "edge" else "dominant_pole_hz", "hz": of.wanted.hz},
        "loop": _loop_of(of.today, of.beta), "series": _series(of.chain, ("capacitor", "resistor")),
        "across": of.across or None, "resistor": of.resistor or None, "ground": of.ground,
        "gm_ohm": _gm_ohm(of), "today": _today(of), "options": [_option(of, one) for one in done],
        "ratio": ratio, "total": len(of.names), "stopped": stopped,
    }


def _today(of: Task) -> Row:
    now = of.today
    present = of.across if of.across and of.chain.get(of.across) else of.ground
    return {"values": _given(of.chain, (of.across, of.resistor, of.ground)), "zeros_brought": _brought_today(of),
            "sees_ohm": seen_ohm(of.chain, present), **_figures(figures(now, of.stage.name, of.beta)),
            "targets": _targets(now)}


def _brought_today(of: Task) -> list[Row]:
    """What the capacitor across that the file already has does to the stage's zeros."""
    if not of.across or not of.chain.get(of.across):
        return []
    without = Ledger(changed(of.chain, {of.across: 0.0}))
    both = [upper_zeros(one, of.stage.name) for one in (of.today, without)]
    return [] if both[0] is None or both[1] is None else _roots(brought(both[0], both[1]).came)


def _option(of: Task, one: Option) -> Row:
    stand = _given(of.chain, (of.across, of.resistor, of.ground)) | one.values
    seen: Row = {"sees_ohm": one.ohm, "k": one.k, "tau_s": None}
    if one.values and one.ohm is not None:
        seen["tau_s"] = one.ohm * next(iter(one.values.values()))
    zeros = one.zeros
    return {
        "name": one.name, "solved": dict(one.values), "values": stand if one.values else {}, **seen,
        "zero_on": None if one.on is None else _root(one.on[0]) | {"place": one.on[1]},
        "zeros_brought": _roots(zeros.came) if zeros else [], "zeros_taken": _roots(zeros.went) if zeros else [],
        "figures": _figures(one.figures) if one.figures else None,
        "fit": _fit(one.bought, one.bought_figures), "why": one.why or None,
    }


def peaking(of: CoilTask, done: Sequence[Coil], stopped: bool) -> Row:
    """What `polebook compensate --coil` answers of a file."""
    def bare(now: Ledger) -> Row:
        return _figures(figures(now, of.stage.name, of.beta))

    return {
        "file": of.file, "digest": of.chain.digest, "stage": of.stage.name, "kind": of.stage.kind,
        "loop": _loop_of(of.today, of.beta), "series": _series(of.chain, ("inductor",)),
        "coil": of.path, "resistor": f"{of.stage.name}.{of.resistor}", "ohm": of.ohm, "tau_s": of.tau, "node": of.node,
        "node_share": of.share,
        "today": {"values": _given(of.chain, (of.path,)), **bare(of.today), "targets": _targets(of.today)},
        "without": bare(of.without),
        "options": [_coil(of, one) for one in done], "published_source": SOURCE,
        "total": len(PUBLISHED), "stopped": stopped,
    }


def _coil(of: CoilTask, one: Coil) -> Row:
    m, factor = PUBLISHED[one.name]
    return {
        "name": one.name, "solved": {} if one.henry is None else {of.path: one.henry},
        "values": {} if one.henry is None else {of.path: one.henry}, "m": one.m, "published_m": m,
        "factor": one.factor, "published_factor": factor, "figures": _figures(one.figures) if one.figures else None,
        "fit": _fit(one.bought, one.bought_figures), "why": one.why or None,
    }


def _figures(of: Figures) -> Row:
    return {
        "upper_edge_hz": of.edge_hz, "peaking_db": of.peaking_db, "overshoot_percent": of.overshoot_percent,
        "rise_time_s": of.rise_s, "first_pole": _known(of.first), "second_pole": _known(of.second),
        "split_pole": _known(of.split), "zeros": [_root(zero) for zero in of.zeros], **_crossing(of.loop),
    }


def _crossing(of: Loop | None) -> Row:
    if of is None:
        return dict.fromkeys(("crossing_hz", "phase_margin_deg", "lower_crossing_hz", "lower_margin_deg", "loop_why"))
    return {"crossing_hz": of.hz, "phase_margin_deg": of.margin_deg, "lower_crossing_hz": of.lower_hz,
            "lower_margin_deg": of.lower_margin_deg, "loop_why": of.why or None}


def _loop_of(today: Ledger, beta: float | None) -> Row | None:
    """The loop as asked for, and what it is defined as."""
    if beta is None:
        return None
    gain = beta * abs(today.solution.gain)
    return {"beta": beta, "unit": "S" if today.chain.source_kind == "current" else "", "gain": gain,
            "gain_db": build.decibels(gain),
            "definition": "T = beta·H of the whole chain, negative at midband; margin = 180° less the phase that H "
                          "has turned from midband to the crossing |T| = 1 above the band"}


def _fit(of: Proposal | None, shown: Figures | None) -> Row | None:
    """The values to buy, and what they make of the chain."""
    if of is None or shown is None:
        return None
    keys = [{"path": key.path, "unit": key.unit, "now": key.now, "now_text": key.now_text or None, "value": key.value,
             "text": key.text or None, "moved": key.moved} for key in of.keys]
    return {"keys": keys, "figures": _figures(shown), "targets": _targets(of.after), "cautions": list(of.cautions)}


def _targets(of: Ledger) -> list[Row]:
    return [{"name": one.name, "want": one.want, "got": one.got, "margin": one.margin, "met": one.met}
            for one in of.targets]


def _given(chain: Chain, paths: Iterable[str]) -> dict[str, float]:
    """What stands at some paths; a value of 0 is no part."""
    return {path: value for path in paths if path and (value := chain.get(path))}


def _series(chain: Chain, sorts: Iterable[str]) -> Row:
    return {sort: chain.preferred[sort] for sort in sorts}


def _gm_ohm(of: Task) -> float | None:
    """1/gm of the stage's device; None where it has none."""
    network = of.today.solution.circuit.network
    parts = network.layout.parts
    gm = next((float(network.values[k]) for k, part in enumerate(parts)
               if part.stage == of.stage.name and part.type == "gm"), None)
    return 1.0 / gm if gm else None


def _roots(values: Iterable[complex]) -> list[Row]:
    return [_value(value) for value in values]


def _root(of: Root) -> Row:
    return _value(of.value) | {"stage": of.stage}


def _known(of: Root | None) -> Row | None:
    return None if of is None else _root(of)


def _value(value: complex) -> Row:
    q = abs(value) / (2.0 * abs(value.real)) if value.imag and value.real else None
    return {"re": value.real, "im": value.imag, "hz": abs(value) / (2.0 * pi), "q": q if q and isfinite(q) else None}
