"""Why the step response is not what was wanted: what slows its rise, what rings, what lets a pulse sag."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from polebook.book import verdict_peak
from polebook.book.verdict_edge import limit, name_of
from polebook.book.verdict_lever import chosen
from polebook.book.verdict_words import UNITS, figure, per_cent, plain, slope, stated
from polebook.circuit.views import network

if TYPE_CHECKING:
    from polebook.book.ledger import Ledger
    from polebook.book.targets import Target

NONE = 1e-4  # of the final value; less overshoot or sag tells nothing of what limits the chain


def headline(_: Ledger, target: Target) -> str:
    """"rise 830 ns for 400 ns", "overshoot 9.4 % for 5 %"."""
    got = target.got or 0.0
    if target.name == "rise":
        return f"rise {figure(got, 's')} for {stated(target.want, 's')}"
    return f"{target.name} {slope(100.0 * got)} for {100.0 * target.want:g} %"


def cause(of: Ledger, target: Target) -> str:
    """What makes it so, in one clause."""
    if target.name == "rise":
        found = limit(of, "upper")
        return f"it goes with the upper edge, {figure(of.upper_hz, 'Hz')}: {found.brief()}" if found else ""
    return _overshoots(of) if target.name == "overshoot" else _sags(of)


def mend(of: Ledger, target: Target) -> str:
    """What would change it, in one clause."""
    if target.name == "rise":
        found = limit(of, "upper")
        return found.mend(of) if found else ""
    if target.name == "sag":
        return _steadies(of)
    return verdict_peak.missed(of)[1].rstrip(".") if _peaks(of) else ""


def _peaks(of: Ledger) -> bool:
    return of.solution.band.peaking_db >= verdict_peak.SLIGHT


def _overshoots(of: Ledger) -> str:
    """Where the response peaks, why it does; else the pair of poles that rings, else what lets something pass early."""
    if _peaks(of):
        return verdict_peak.missed(of)[0].rstrip(".")
    poles, transient = of.pulse.poles, of.pulse.transient
    pairs = [] if transient is None else np.nonzero(transient.poles.imag > 0)[0].tolist()
    if transient is not None and pairs:
        poles = transient.poles
        most = max(pairs, key=lambda k: transient.sizes[k])
        size = abs(complex(poles[most]))
        q = size / (-2.0 * complex(poles[most]).real)
        if q > 0.5 and transient.sizes[most] > NONE:
            return f"a pair of poles at {figure(size / (2.0 * np.pi), 'Hz')}, Q {plain(q)}, rings"
    return "a part of the signal is ahead of the rest, and the rest comes after"


def _droop(of: Ledger) -> list[tuple[int, float]]:
    """(part, its share of the slope at which a pulse begins to sag), the greatest first: 1/tau over their sum."""
    constants = of.solution.constants.by_part
    parts = of.solution.circuit.layout.parts
    rates = {k: 1.0 / tau for k, tau in constants.items() if tau and parts[k].role == "low"}
    total = sum(rates.values())
    return sorted(((k, rate / total) for k, rate in rates.items()), key=lambda pair: -pair[1]) if total else []


def _sags(of: Ledger) -> str:
    """The part that lets go of most of the height, by its time constant."""
    droop = _droop(of)
    if not droop:
        return ""
    owner, share = droop[0]
    tau = of.solution.constants.by_part[owner]
    part, value = of.solution.circuit.layout.parts[owner], float(of.solution.circuit.network.values[owner])
    own = f"{name_of(of, owner)}" if part.type == "tau" else f"{name_of(of, owner)}, {stated(value, UNITS[part.type])},"
    return f"{own} lets go of it fastest, {per_cent(share)}, with a time constant of {figure(tau, 's')}"


def _steadies(of: Ledger) -> str:
    """What 1 % more of the part that can be chosen and sags fastest takes off the sag, computed anew."""
    from polebook.book.pulse import sag  # deferred with the step response: only a sag that matters gets here

    parts, net = of.solution.circuit.layout.parts, of.solution.circuit.network
    owner = next((k for k, _ in _droop(of) if chosen(of, parts[k]) and parts[k].type != "tau"), None)
    now = of.sag.percent
    if owner is None or now is None:
        return ""
    more = [value * 1.01 if k == owner else value for k, value in enumerate(net.values)]
    then = sag(of.solution, of.sag.pulse_s, network(net.layout, more)).percent
    if then is None or now - then < 1e-4:
        return ""
    return f"1 % more {name_of(of, owner)} takes {now - then:.2g} % of the height off it"
