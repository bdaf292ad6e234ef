"""What the drawings show beside the ledger, as plain data: curves over frequency and time, and limits of targets."""

from __future__ import annotations

from collections.abc import Iterable
from math import log10
from typing import TYPE_CHECKING, Any

import numpy as np

from polebook.book.account import BUDGET_DB
from polebook.book.build import document
from polebook.book.ledger import Ledger
from polebook.book.pulse_rows import page
from polebook.book.reach import within_reach
from polebook.book.response import grid, response, whole_band
from polebook.book.targets import TOLERANCE_DB

if TYPE_CHECKING:
    from polebook.record.bench import Overlay

HZ, SECONDS = 400, 801  # points of a curve, at least
NOTES = {True: "unstable: curves of the network, which no signal will follow",
         None: "stability not told: curves of the network"}
"""What is said over a response that no signal has, by whether the chain is unstable."""


def drawn(of: Ledger, benches: Iterable[Overlay] = ()) -> dict[str, Any]:
    """The whole document of a ledger, and all that the drawings ask for beside it: `response`, `pulse`, `signal`.

    benches  sweeps that were measured, `record.bench.overlays`

    Raises ProblemsFound.
    """
    whole = document(of)
    with within_reach(of.chain):
        return {**whole, "limits": limits(of), "response": over_frequency(of, whole["overall"]["unstable"]),
                "pulse": over_time(of), "signal": signal(of), "sweeps": sweeps(benches)}


def sweeps(benches: Iterable[Overlay]) -> list[dict[str, Any]]:
    """Sweeps that can be laid over the chain's response: measured at its load, between the file's own resistances."""
    return [{"name": one.label, "hz": one.sweep.hz.tolist(), "gain_db": one.sweep.gain_db.tolist()}
            for one in benches if one.sweep is not None and not one.at and not one.apart]


def limits(of: Ledger) -> dict[str, float | None]:
    """Targets that a drawing can show, in SI units and dB; None where the file states none."""
    get = of.chain.get
    gain = get("target.gain")
    return {
        "gain_db": None if gain is None else 20.0 * log10(gain),
        "gain_tolerance_db": get("target.gain_tolerance", TOLERANCE_DB) or TOLERANCE_DB,
        "reference_hz": get("target.reference"),
        **{f"{name}_{unit}": get(f"target.{name}")
           for name, unit in (("lower", "hz"), ("upper", "hz"), ("peaking", "db"), ("overshoot", "share"),
                              ("rise", "s"), ("swing", "v"))},
    }


def over_frequency(of: Ledger, unstable: bool | None) -> dict[str, Any]:
    """Gain and phase of the chain over its whole band, and the level by which edges are told."""
    low, high = whole_band(of)
    hz = grid(of, low, high, HZ)
    found = response(of, hz)
    middle = 20.0 * log10(abs(of.solution.gain)) if of.solution.gain else None
    return {
        "from_hz": low, "to_hz": high, "hz": hz.tolist(), "gain_db": _known(found.gain_db),
        "phase_deg": _known(found.phase_deg), "mid_db": middle,
        "corner_db": None if middle is None else middle - BUDGET_DB, "note": NOTES.get(unstable, ""),
    }


def over_time(of: Ledger) -> dict[str, Any]:
    """The page of the step response, its curve in more points."""
    told = page(of)
    if told["curve"] is not None:
        t, y = of.pulse.curve(points=SECONDS)
        told["curve"] = list(zip(t.tolist(), y.tolist(), strict=True))
    return told


def signal(of: Ledger) -> dict[str, Any]:
    """The source's own signals, peak; V or A."""
    get = of.chain.get
    return {"unit": "V" if of.chain.source_kind == "voltage" else "A", "largest": get("source.largest"),
            "smallest": get("source.smallest")}


def _known(values: Any) -> list[float | None]:
    return [float(value) if np.isfinite(value) else None for value in values]
