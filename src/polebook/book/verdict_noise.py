"""Why the noise is not what was wanted: who makes most of it, and what lowers it most."""

from __future__ import annotations

from typing import TYPE_CHECKING

from polebook.book.noise_rows import plain, what
from polebook.book.verdict_lever import strongest
from polebook.book.verdict_words import figure, per_cent, slope, stated

if TYPE_CHECKING:
    from polebook.book.ledger import Ledger
    from polebook.book.targets import Target

TOLD = 0.05  # share of the noise power from which the source's own is told


def headline(of: Ledger, target: Target) -> str:
    """"noise 3.77 nV/√Hz for 3 nV/√Hz"."""
    unit = "V/√Hz" if of.chain.source_kind == "voltage" else "A/√Hz"
    return f"noise {figure(target.got, unit)} for {stated(target.want, unit)}"


def cause(of: Ledger, target: Target) -> str:
    """Who makes most of it beside the source's own resistance, in one clause."""
    shares = dict(of.noise.shares) if of.noise else {}
    own = shares.pop(("source", "resistance"), 0.0)
    source = f"the source's own resistance {per_cent(own)}" if own >= TOLD else ""
    if not shares:
        return f"{source} of its power" if source else ""
    at = max(shares, key=lambda one: shares[one])
    return f"{maker(of, *at)} makes {per_cent(shares[at])} of its power{', ' if source else ''}{source}"


def maker(of: Ledger, stage: str, part: str) -> str:
    """A source of noise in words: "Q1.rx", "the base current of Q1"."""
    words = what(of, stage, part)
    if not words:
        return f"{stage}.{part}"
    return f"the {words} of {stage}" if part == plain(part) else f"the {words} of {stage}'s upper device"


def mend(of: Ledger, target: Target) -> str:
    """The part or current that lowers it most, and what that costs in gain."""
    best = strongest(of, "noise")
    return f"most leverage: {best.step(False)} lowers it by {slope(best.value)}{best.price(False)}" if best else ""
