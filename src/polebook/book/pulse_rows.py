"""The figures of the step response as plain data, and all that its page draws."""

from __future__ import annotations

from typing import Any

from polebook.book.ledger import Ledger
from polebook.book.reach import within_reach

SEEN = 5e-5  # of the final value; a dip before the rise that is smaller is no mark


def overall(of: Ledger) -> dict[str, float | None]:
    """What the whole chain's figures say of it."""
    pulse, delays = of.pulse, of.delays
    return {
        "rise_time_s": pulse.rise_time_s, "overshoot_percent": pulse.overshoot_percent,
        "settling_1_s": pulse.settling_1_s, "settling_01_s": pulse.settling_01_s, "sag_percent": of.sag.percent,
        "group_delay_s": of.delay_s, "group_delay_spread_s": delays.seconds if delays else None,
    }


def page(of: Ledger) -> dict[str, Any]:
    """The response over time with its marks, the estimates of its rise, and where the delay is greatest and least.

    Times in s, heights as shares of the final value. "curve" and "marks" are None where `why` says why there is no
    response. "by" tells how it was computed, of how many poles.
    """
    from polebook.book.pulse import RISE, rise_by_edge, rise_by_nodes  # deferred: the rows are read by an audit too

    with within_reach(of.chain):
        pulse, sag, delays = of.pulse, of.sag, of.delays
        nodes = [{"name": site.name, "pole_hz": site.pole_hz, "rise_s": RISE / site.pole_hz}
                 for site in of.sites if site.pole_hz]
        return {
            "why": pulse.why, "marks": marks(of), "curve": curve(of), "final": of.solution.gain,
            "by": None if pulse.transient is None else "matrix" if pulse.transient.residues is None else "residues",
            "poles": len(pulse.poles), "undershoot_percent": pulse.undershoot_percent,
            "by_edge_s": rise_by_edge(of.upper_hz), "by_nodes_s": rise_by_nodes(of.sites), "nodes": nodes,
            "pulse_s": sag.pulse_s, "sag_why": sag.why,
            "delays": {"most_s": delays.most_s, "most_hz": delays.most_hz, "least_s": delays.least_s,
                       "least_hz": delays.least_hz} if delays else None,
        }


def marks(of: Ledger) -> list[dict[str, Any]] | None:
    """Points of the response that its figures are read at, in the order of time."""
    found = of.pulse.marks
    if found is None:
        return None
    dip_s = found.dip_s if found.dip < -SEEN else None
    rows = [("start", 0.0, found.start), ("dip", dip_s, found.dip), ("10 %", found.low_s, 0.1),
            ("90 %", found.high_s, 0.9), ("top", found.top_s, found.top)]
    settled = [("within 1 %", of.pulse.settling_1_s), ("within 0.1 %", of.pulse.settling_01_s)]
    rows += [(name, t, None if t is None else float(of.pulse.at_one(t))) for name, t in settled]
    known = [{"mark": name, "time_s": t, "height": height} for name, t, height in rows if t is not None]
    return sorted(known, key=lambda row: float(row["time_s"] or 0.0))


def curve(of: Ledger) -> list[tuple[float, float]] | None:
    """(time in s, share of the final value) over the window."""
    if of.pulse.transient is None:
        return None
    t, y = of.pulse.curve()
    return list(zip(t.tolist(), y.tolist(), strict=True))
