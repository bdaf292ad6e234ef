"""The verdict: what limits the chain now and by which mechanism, in one to three short clauses."""

from __future__ import annotations

from collections.abc import Mapping
from typing import TYPE_CHECKING, Protocol

from polebook.book import verdict_gain, verdict_levels, verdict_noise, verdict_peak, verdict_pulse, verdict_yield
from polebook.book.verdict_edge import limit, name_of
from polebook.book.verdict_lever import gain_lever
from polebook.book.verdict_unstable import unstable
from polebook.book.verdict_words import (
    capital,
    decibels,
    figure,
    fits,
    listed,
    loss,
    number,
    per_cent,
    sentences,
    stated,
    stated_decibels,
)

if TYPE_CHECKING:
    from polebook.book.ledger import Ledger
    from polebook.book.targets import Target

EDGES = ("upper", "lower")
AMPLE = 5.0  # margin from which its size says no more


class Teller(Protocol):
    """Who tells of a target beyond gain and band, in clauses."""

    def headline(self, of: Ledger, target: Target) -> str: ...
    def cause(self, of: Ledger, target: Target) -> str: ...
    def mend(self, of: Ledger, target: Target) -> str: ...


BEYOND: Mapping[str, Teller] = {
    "noise": verdict_noise, "swing": verdict_levels, "current": verdict_levels,
    "rise": verdict_pulse, "overshoot": verdict_pulse, "sag": verdict_pulse, "yield": verdict_yield,
}


def verdict(of: Ledger) -> str:
    """A few plain sentences, every number in them a figure of the ledger.

    Where they would take too many lines, the remedy is left away first, the way in which it comes about next.
    """
    told, mend, tail = _told(of)
    out = [stage.name for stage in of.chain.stages if stage.left_out]
    verb = "is" if len(out) == 1 else "are"
    if out:
        tail = f"{tail} {sentences(f'{listed(out)} {verb} left out')}".lstrip()
    ways = (told, mend, tail), (told, tail), (_told(of, short=True)[0], tail)
    texts = [" ".join(filter(None, way)) for way in ways]
    return next((text for text in texts if fits(text)), texts[-1])


def cause(of: Ledger, target: Target) -> str:
    """Why a target is missed, without what would mend it; "" where it is not missed."""
    if target.met is not False:
        return ""
    if target.name in EDGES:
        found = limit(of, target.name)
        return found.brief() if found else ""
    if target.name == "gain":
        return verdict_gain.cause(of, target)
    if target.name in BEYOND:
        return BEYOND[target.name].cause(of, target)
    return verdict_peak.missed(of)[0].rstrip(".")


def _told(of: Ledger, short: bool = False) -> tuple[str, str, str]:
    """What limits the chain, what would mend it, and what else is missed."""
    if of.solution.winding.right is None:
        return sentences("whether the chain is stable could not be told, so no edge is given",
                         "look for values many decades apart, or parts that all but cancel"), "", ""
    if of.unstable:
        return unstable(of), "", ""
    if not of.solution.band.clean:
        return _no_midband(of), "", ""
    missed = [target for target in of.targets if target.met is False]
    if not missed:
        return *_met(of, short), ""
    worst = min(missed, key=lambda target: target.margin or 0.0)
    others = [_called(target) for target in missed if target is not worst]
    why, mend = _why(of, worst, short)
    told = f"{capital(_headline(of, worst))}{',' if worst.name == 'gain' else ':'} {why}"
    return told, mend, sentences(f"{listed(others)} missed too") if others else ""


def _no_midband(of: Ledger) -> str:
    constants = of.solution.constants
    text = f"No clean midband: at no frequency does the response come within 3 dB of its {_gain(of)} of gain."
    if constants.lower_hz is None or constants.upper_hz is None:
        return text
    taus, parts = constants.by_part, of.solution.circuit.layout.parts
    low = min((k for k, tau in taus.items() if tau and parts[k].role == "low"), key=lambda k: taus[k] or 0.0)
    high = max((k for k, tau in taus.items() if tau and parts[k].role == "high"), key=lambda k: taus[k] or 0.0)
    return (f"{text} By time constants its lower edge would be {figure(constants.lower_hz, 'Hz')}, {name_of(of, low)} "
            f"foremost, its upper one {figure(constants.upper_hz, 'Hz')}, {name_of(of, high)} foremost.")


def _gain(of: Ledger) -> str:
    return decibels(of.solution.gain, verdict_gain.gain_unit(of))


def _headline(of: Ledger, target: Target) -> str:
    """"upper edge 400 kHz for 1 MHz"."""
    got = target.got or 0.0
    if target.name == "gain":
        return f"gain {verdict_gain.headline(of, target)}"
    if target.name in BEYOND:
        return BEYOND[target.name].headline(of, target)
    if target.name == "peaking":
        return f"peaking {loss(got, digits=2)} for {stated_decibels(target.want)}"
    return f"{target.name} edge {figure(got, 'Hz')} for {stated(target.want, 'Hz')}"


def _called(target: Target) -> str:
    return f"{target.name} edge" if target.name in EDGES else target.name


def _why(of: Ledger, target: Target, short: bool) -> tuple[str, str]:
    """(what follows the headline, what would mend it) of a missed target."""
    if target.name == "gain":
        return verdict_gain.missed(of, target)
    if target.name == "peaking":
        return verdict_peak.missed(of)
    if target.name in BEYOND:
        because = BEYOND[target.name].cause(of, target)
        return f"{because}." if because else "", sentences(BEYOND[target.name].mend(of, target))
    found = limit(of, target.name)
    return (found.told(short), sentences(found.mend(of))) if found else ("no part of it owns the edge.", "")


def _met(of: Ledger, short: bool) -> tuple[str, str]:
    """(what has the least to spare and what limits it, what would mend that); what limits the band without targets."""
    unjudged = [target.name for target in of.targets if target.met is None]
    met = len(of.targets) - len(unjudged)
    if not met:
        lead = f"not judged yet: {listed(unjudged)}" if unjudged else "no targets are set"
        return f"{sentences(lead)} {_band(of, short)}", ""
    lead = {1: "the target is met", 2: "both targets are met"}.get(met, f"all {number(met)} targets are met")
    if unjudged:
        lead += f" ({listed(unjudged)} not judged yet)"
    close = [target for target in of.targets if target.met and target.margin is not None and _tells(target)]
    if not close:
        return f"{sentences(lead)} {_band(of, short)}", ""
    least = min(close, key=lambda target: target.margin or 0.0)
    headline = f"{_headline(of, least)}{_spare(of, least)}"
    told = sentences(f"{lead}: {headline}") if met == 1 else sentences(lead, f"least to spare: {headline}")
    why, mend = _near(of, least, short)
    return f"{told} {why}".rstrip(), mend


def _tells(target: Target) -> bool:
    """A response that does not peak, overshoot or sag says nothing of what limits the chain."""
    least = {"peaking": verdict_peak.SLIGHT, "overshoot": verdict_pulse.NONE, "sag": verdict_pulse.NONE}
    return (target.got or 0.0) >= least.get(target.name, 0.0)


def _spare(of: Ledger, target: Target) -> str:
    if target.name == "gain":
        within = of.chain.get("target.gain_tolerance") or 1.0
        return f", ±{stated_decibels(within)}"
    margin = target.margin or 0.0
    return "" if margin > AMPLE else f" ({per_cent(margin)}{' to spare' if len(of.targets) == 1 else ''})"


def _near(of: Ledger, target: Target, short: bool) -> tuple[str, str]:
    """(what limits a target that is met, what would give it more room)."""
    if target.name in EDGES:
        found = limit(of, target.name)
        return (capital(found.told(short)), sentences(found.mend(of))) if found else ("", "")
    if target.name == "peaking":
        return verdict_peak.missed(of)
    if target.name in BEYOND:
        return sentences(BEYOND[target.name].cause(of, target)), sentences(BEYOND[target.name].mend(of, target))
    return "", sentences(gain_lever(of, verdict_gain.difference(target) < 0.0))


def _band(of: Ledger, short: bool) -> str:
    """What limits the band, where no target says which end matters."""
    upper, lower = of.upper_hz, of.lower_hz
    high, low = (_end(of, end, short) for end in EDGES)
    if upper is None and lower is None:
        return f"Nothing in the file limits its band; the gain is {_gain(of)}."
    if upper is None:
        return f"The band has no upper edge. {low}"
    if lower is None:
        return f"The band reaches down to d.c. {high}"
    return f"{high} {low}"


def _end(of: Ledger, end: str, short: bool) -> str:
    found = limit(of, end)
    edge = f"{end.capitalize()} edge {figure(of.upper_hz if end == 'upper' else of.lower_hz, 'Hz')}"
    return f"{edge}: {found.brief(short)}." if found else f"{edge}."
