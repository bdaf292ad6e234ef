"""A small document in the ledger's schema, made by hand: two stages, one held back by a Miller capacitance."""

from __future__ import annotations

from copy import deepcopy
from typing import Any

_UNKNOWN = ("rise_time_s", "overshoot_percent", "settling_1_s", "settling_01_s", "sag_percent", "group_delay_s",
            "group_delay_spread_s", "noise_density", "noise_total_output", "noise_total_input", "noise_from_hz",
            "noise_to_hz", "noise_figure_db", "supply_current_a", "clips_first", "largest_source", "dynamic_range_db",
            "noise_margin_db", "full_power_hz")
_NO_LEVERAGE = {"gain": None, "lower_edge": None, "upper_edge": None, "noise": None}


def _line(name: str, kind: str, gain: float, gain_db: float, **more: Any) -> dict[str, Any]:
    keys = ("open_gain", "loading", "transfer_ohm", "k", "input_ohm", "output_ohm", "owns_upper", "owns_lower")
    line: dict[str, Any] = {"name": name, "kind": kind, "gain": gain, "gain_db": gain_db, **dict.fromkeys(keys)}
    return line | {"noise_share": None, "bridges": []} | more


def _node(name: str, stage: str, **more: Any) -> dict[str, Any]:
    keys = ("ohm", "farad", "pole_hz", "lost_upper_db", "allotted_upper_db", "lost_lower_db", "allotted_lower_db")
    return {"name": name, "stage": stage, "interstage": True, **dict.fromkeys(keys), "room": None} | more


def _part(stage: str, part: str, type_: str, value: float, **more: Any) -> dict[str, Any]:
    fixed = {"stage": stage, "part": part, "type": type_, "value": value, "leverage": dict(_NO_LEVERAGE)}
    return {**fixed, **dict.fromkeys(("role", "tau_s", "owns_upper", "owns_lower", "noise_share"))} | more


_BRIDGE = {"part": "cmu", "type": "C", "value": 4.7e-12, "k": -35.6, "at_input": 1.72e-10, "at_output": 4.83e-12}

_DOCUMENT: dict[str, Any] = {
    "format": 1,
    "tool": "polebook 0.1.0",
    "chain": {"title": "Two stages", "digest": "0" * 64},
    "overall": {
        "gain": -33.1,
        "gain_db": 30.396559,
        "gain_unit": "V/V",
        "unstable": False,
        "reference_hz": 50e3,
        "gain_at_reference": None,
        "lower_edge_hz": 1234.5,
        "upper_edge_hz": 274312.0,
        "peaking_db": 0.0,
        "octc_upper_hz": 268e3,
        "sctc_lower_hz": 1300.0,
        "node_upper_hz": 301e3,
        "shrinkage": 0.8,
        **dict.fromkeys(_UNKNOWN),
    },
    "lines": [
        _line("source", "voltage", 0.93, -0.630, output_ohm=600.0, owns_upper=0.06, owns_lower=0.0),
        _line(
            "Q1",
            "common-emitter",
            -35.6,
            31.029,
            open_gain=-40.0,
            loading=0.89,
            k=-35.6,
            input_ohm=3020.0,
            output_ohm=4530.0,
            owns_upper=0.9,
            owns_lower=0.75,
            bridges=[_BRIDGE],
        ),
        _line(
            "Q2",
            "emitter-follower",
            0.98,
            -0.1755,
            open_gain=0.99,
            loading=0.99,
            k=0.98,
            input_ohm=97e3,
            output_ohm=32.0,
            owns_upper=0.03,
            owns_lower=0.25,
        ),
        _line("load", "load", 1.0, 0.0, owns_upper=0.01, owns_lower=0.0),
    ],
    "nodes": [
        _node(
            "n0",
            "source",
            ohm=500.0,
            farad=1.9e-10,
            pole_hz=1.67e6,
            lost_upper_db=0.1,
            allotted_upper_db=1.0,
            lost_lower_db=0.02,
            allotted_lower_db=1.0,
            room=0.85,
        ),
        _node(
            "n1",
            "Q1",
            ohm=4400.0,
            farad=1.2e-10,
            pole_hz=301e3,
            lost_upper_db=10.5,
            allotted_upper_db=1.0,
            lost_lower_db=0.5,
            allotted_lower_db=1.0,
            room=0.15,
        ),
        _node(
            "n2",
            "Q2",
            ohm=31.0,
            farad=2.2e-10,
            pole_hz=23.3e6,
            lost_upper_db=-0.02,
            allotted_upper_db=1.0,
            lost_lower_db=0.0,
            allotted_lower_db=1.0,
            room=11.9,
        ),
    ],
    "parts": [
        _part("source", "resistance", "R", 600.0),
        _part("Q1", "couple", "C", 1e-6, role="low", tau_s=3.6e-3, owns_upper=0.0, owns_lower=0.75),
        _part("Q1", "cmu", "C", 4.7e-12, role="high", tau_s=5.2e-7, owns_upper=0.9, owns_lower=0.0),
        _part("Q1", "rc", "R", 4700.0),
        _part("Q1", "gm", "gm", 0.0389),
        _part("Q2", "cpi", "C", 1.8e-11, role="high", tau_s=1e-9, owns_upper=0.1, owns_lower=0.0),
        _part("Q2", "couple", "C", 1e-7, role="low", tau_s=1e-2, owns_upper=0.0, owns_lower=0.25),
    ],
    "cards": None,
    "bias": [
        {
            "stage": "Q1",
            "device": "A",
            "current_a": 1e-3,
            "across_v": 5.3,
            "control_v": 1.65,
            "lower_v": 1.0,
            "output_v": 7.3,
            "dissipation_w": 5.3e-3,
            "from": "given",
        },
        {
            "stage": "Q2",
            "device": "A",
            "current_a": None,
            "across_v": None,
            "control_v": None,
            "lower_v": None,
            "output_v": None,
            "dissipation_w": None,
            "from": None,
        },
    ],
    "rails": [{"rail": "positive", "current_a": 2.1e-3}],
    "poles": None,
    "zeros": None,
    "account": {
        "upper": {"edge_hz": 1e6, "budget_db": 3.0103, "lost_db": 10.58, "left_db": -7.5697},
        "lower": {"edge_hz": 20e3, "budget_db": 3.0103, "lost_db": 0.52, "left_db": 2.4903},
    },
    "targets": [
        {"name": "gain", "want": 31.6, "got": 33.1, "margin": 0.6, "met": True, "why": None},
        {"name": "upper", "want": 1e6, "got": 274312.0, "margin": -0.7257, "met": False, "why": None},
        {"name": "noise", "want": 5e-9, "got": None, "margin": None, "met": None, "why": "not computed"},
    ],
    "levels": None,
    "verdict": None,
    "cautions": [
        {
            "stage": "Q1",
            "text": "ic is given as 1.00 mA, but its resistors and rails set 1.33 mA: the given one stands "
            "and every figure of this stage rests on it",
        },
        {"stage": None, "text": "a caution of the whole chain"},
    ],
}


def document() -> dict[str, Any]:
    """A fresh copy, so that a test may change it."""
    return deepcopy(_DOCUMENT)
