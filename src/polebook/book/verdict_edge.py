"""What limits an edge: the part or the node that owns it, how it comes to that, and the part that would mend it."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from polebook.book.verdict_how import how, loop_of
from polebook.book.verdict_lever import lever
from polebook.book.verdict_words import figure, listed, loss, number, per_cent, sentences, stated

if TYPE_CHECKING:
    from polebook.book.ledger import Ledger
    from polebook.book.sites import Site

BESIDE = 0.6  # share of the greatest owner's from which another one is named with it
ADDED = 0.1  # share from which a part counts among those that add up
ALONE = 0.45  # share from which one part is to blame, not the sum
NEAR = 2.5  # poles within this many times the lowest one add up
TRUST = 0.2  # share by which the node estimate may miss the exact edge and still tell how it comes about


@dataclass(frozen=True, slots=True)
class Limit:
    """What limits one end of the band, in clauses.

    owns, how  who owns it, and by which way, of the part `first` that owns most of it
    mend       what would move it
    alone      no other part is named beside the first
    """

    owns: str
    how: str
    mend: str
    first: str
    alone: bool = True

    def told(self) -> str:
        """Owner and way as sentences, the first without a capital."""
        its = "Its" if self.alone else f"{self.first}'s"
        return f"{self.owns}. {sentences(f'{its} {self.how}' if self.how else '')}".rstrip()

    def brief(self) -> str:
        """Owner and way in one clause."""
        return f"{self.owns} ({self.how})" if self.how and self.alone else self.owns


def ranked(of: Ledger, end: str) -> list[tuple[int, float]]:
    """(part number, share) of the parts that hold an edge back, the greatest owner first."""
    shares = of.owns_upper if end == "upper" else of.owns_lower
    return sorted(((k, share) for k, share in shares.items() if share > 0), key=lambda pair: -pair[1])


def name_of(of: Ledger, index: int) -> str:
    part = of.solution.circuit.layout.parts[index]
    return f"{part.stage}.{part.name}"


def limit(of: Ledger, end: str) -> Limit | None:
    """What limits the "upper" or "lower" edge; None where the chain has no such edge, or nothing that owns it."""
    owners = ranked(of, end)
    if not owners:
        return None
    first, share = owners[0]
    name, clause = name_of(of, first), how(of, first, end)
    poles = alike(of) if end == "upper" and share < ALONE else []
    if poles:
        return Limit(_adding(of, poles), "", lever(of, end, first, name), name)
    node = _node(of, clause) if end == "upper" and share < ALONE else ""
    if node:
        return Limit(f"{node}; {name} owns most of it, {per_cent(share)}", clause, lever(of, end, first, "it"), name)
    named = [pair for pair in owners if pair[1] >= BESIDE * share][:3]
    if len(named) == 1:
        part = "all of it" if round(100 * share) >= 99 else per_cent(share)
        return Limit(f"{name} owns {part}", clause, lever(of, end, first, "it"), name)
    owns = listed([f"{name_of(of, k)}{' owns' if k == first else ''} {per_cent(s)}" for k, s in named])
    loop = loop_of(of, first)
    if loop and loop == loop_of(of, named[1][0]):
        rf = of.chain.get(f"{loop}.rf")
        through = f" through rf, {stated(rf, 'Ω')}" if rf else ""
        return Limit(f"{owns}; they make one loop{through}", "", lever(of, end, first, name), name)
    lead = "corners add up, " if share < ALONE else ""
    return Limit(f"{lead}{owns}", clause, lever(of, end, first, "it"), name, alone=False)


def alike(of: Ledger) -> list[Site]:
    """Sites whose poles lie together and shrink the band between them; none where one of them is to blame."""
    sites = sorted((site for site in of.sites if site.pole_hz is not None), key=lambda site: site.pole_hz or 0.0)
    near = [site for site in sites if (site.pole_hz or 0.0) <= NEAR * (sites[0].pole_hz or 0.0)]
    exact, estimate = of.upper_hz, of.node_upper_hz
    if len(near) < 3 or not exact or not estimate or abs(estimate / exact - 1.0) > TRUST:
        return []
    return near


def _adding(of: Ledger, poles: list[Site]) -> str:
    ends = [f"{figure(site.pole_hz, 'Hz')} ({site.name})" for site in (poles[0], poles[-1])]
    left = per_cent(of.shrinkage or 0.0)
    return f"{number(len(poles))} poles add up, {ends[0]} to {ends[1]}, and leave {left} of the lowest"


def _node(of: Ledger, clause: str) -> str:
    """One node that loses most of what is lost, where no part owns most of it; the clause tells of the node."""
    account = of.upper_account
    known = {name: db for name, db in account.lost.items() if db is not None}
    total = account.total_db
    if not known or not total or total <= 0.0:
        return ""
    name = max(known, key=lambda key: known[key])
    site = next((site for site in of.sites if site.name == name), None)
    here = f" at {name}," in f"{clause}," or f" at {name} (" in clause
    if known[name] < 0.6 * total or site is None or site.ohm is None or not site.farad or not here:
        return ""
    load = f"{figure(site.farad, 'F')} on {figure(site.ohm, 'Ω')}"
    return f"{name} loses {loss(known[name])} of the {loss(total)}, with {load}"
